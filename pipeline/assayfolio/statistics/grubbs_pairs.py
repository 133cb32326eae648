"""The null distribution of Grubbs' statistic for two outlying values, by quadrature instead of tables.

For n independent values of one normal distribution let u_i = (x_i - mean) / sqrt(SS) * sqrt(n / (n - 1)), the
cosine of the angle between the residuals and the axis of value i. Its density is proportional to
(1 - u^2)^((n - 4) / 2); without value i the sum of squares is SS (1 - u_i^2), and the residuals of the other
n - 1 values about their own mean are again in a uniformly random direction, whatever u_i is. Hence, for the
largest cosine M_n of n values, with S_n(v) = P(M_n > v) (Grubbs 1950, Ann. Math. Stat. 21, 27; from memory),

    dS_n(u) = -n density_n(u) (1 - S_(n-1)(h)) du,   h = sqrt(n / (n - 2)) u / sqrt(1 - u^2),

where h says that no other value lies beyond x_i; and the statistic of the two largest values is
W = (1 - u^2) (1 - v^2), u the cosine of the largest of n and v that of the largest of the n - 1 others:

    P(W <= w) = n * integral of density_n(u) * P(v0 < M_(n-1) <= h) du,   v0^2 = 1 - w / (1 - u^2).

S_n is smooth between the cosines at which the j largest values are equal and so are the others,
v_j^2 = (n - j) / (j (n - 1)); towards such a place from below it runs like powers of the square root of the
distance, which the substitutions remove. Above v_2 only one value can lie: there S_n is n times a t tail.
Angles a with u = sin(a) are used throughout.
"""

from dataclasses import dataclass
from functools import lru_cache
from math import exp, log, pi
from typing import Final

import numpy as np

from assayfolio.statistics.arguments import Floats, Places
from assayfolio.statistics.false_position import root_between
from assayfolio.statistics.quadrature import gauss_legendre
from assayfolio.statistics.tails import t_sf

FEWEST_FOR_PAIRS: Final = 4
MOST_FOR_PAIRS: Final = 100

Squares = tuple[Floats, Floats]

_DEGREE: Final = 28
_NODES: Final = 24
_SCALE: Final = 2 * log(2)
_SETTLED: Final = 1e-13


def pair_tail(ratio: float, n: int) -> float:
    """P(W <= `ratio`) for W the sum of squares without the two largest of n normal values by that of all.

    By symmetry the same for the two smallest. For n from 4 to 100. Measured: 13 digits for n up to 40, 11 up
    to 100, for probabilities of 1e-14 and more, by doubling nodes and degrees.
    Raises ValueError for another n.
    """
    _require_size(n)
    if ratio <= 0:
        return 0.0
    if ratio >= largest_pair_ratio(n):
        return 1.0
    angle, weight = _outer_rule(ratio, n)
    cosine2 = np.cos(angle) ** 2
    tangent2 = np.tan(angle) ** 2
    below = np.minimum(ratio / cosine2, 1.0)
    room = np.maximum(1 - n / (n - 2) * tangent2, 0.0)
    chance = _largest_cosine(n - 1).between((1 - below, below), (1 - room, room))
    density = n * _density_constant(n) * np.cos(angle) ** (n - 3)
    return min(1.0, float(np.sum(weight * density * chance)))


@lru_cache(maxsize=512)
def pair_limit(alpha: float, n: int) -> float:
    """The ratio that the two largest of n normal values fall below with probability `alpha`; n from 4 to 100.

    Raises ValueError for another n, and for an alpha that is not between 0 and 1.
    """
    if not 0 < alpha < 1:
        raise ValueError(f"a probability between 0 and 1 is needed, not {alpha!r}")
    _require_size(n)

    def excess(log_ratio: float) -> float:
        return log(max(pair_tail(exp(log_ratio), n), 1e-300) / alpha)

    high = log(largest_pair_ratio(n))
    low = high - 1
    while excess(low) > 0:
        low, high = low - 2, low
    return exp(root_between(excess, low, high, _SETTLED))


def largest_pair_ratio(n: int) -> float:
    """The largest value that W can have: one value below, all others equal."""
    return n * (n - 3) / ((n - 1) * (n - 2))


def _require_size(n: int) -> None:
    if not FEWEST_FOR_PAIRS <= n <= MOST_FOR_PAIRS:
        raise ValueError(f"the pair is judged among {FEWEST_FOR_PAIRS} to {MOST_FOR_PAIRS} values, not {n}")


def _outer_rule(ratio: float, n: int) -> tuple[Floats, Floats]:
    # From the angle at which both are equal (v0 = h), over all places where a factor has a break.
    first = np.arcsin(np.sqrt((1 - ratio) * (n - 2) / (2 * (n - 1))))
    cosine2 = ratio / np.cos(_breaks(n - 1)[1:]) ** 2
    # Where W is small the second factor turns over many scales of the cosine.
    scales = np.exp(np.arange(log(ratio) + _SCALE, 0, _SCALE))
    moving = np.arccos(np.sqrt(np.concatenate([cosine2[cosine2 < 1], scales[scales < 1]])))
    places = np.concatenate([_breaks(n), moving])
    bounds = np.unique(np.concatenate([[first], places[places > first], [pi / 2]]))
    nodes, weights = gauss_legendre(_NODES)
    # (3 t - t^3) / 2 flattens both ends of an interval, so that square roots there become smooth.
    stretched, slope = (3 * nodes - nodes**3) / 2, 1.5 * (1 - nodes) * (1 + nodes)
    half = np.diff(bounds)[:, None] / 2
    middle = (bounds[:-1] + bounds[1:])[:, None] / 2
    return (middle + half * stretched).reshape(-1), (half * slope * weights).reshape(-1)


@dataclass(frozen=True, slots=True)
class _LargestCosine:
    """The largest cosine of m values: tails on both sides by series, one a piece between successive breaks.

    `breaks` falls from pi/2 (the m - 1 others equal) to the smallest possible angle. Row p of `series` holds
    the piece under breaks[p + 1], a Chebyshev series in y = sqrt((top - angle) / width) that is zero at
    y = 0: the probability between the angle and the top. `beyond_top` and `below_bottom` are the tails
    outside the piece, summed from the side on which they are small. Above breaks[1] there is a t tail.
    """

    m: int
    breaks: Floats
    series: Floats
    beyond_top: Floats
    below_bottom: Floats

    def between(self, low: Squares, high: Squares) -> Floats:
        """P(sine of low < largest cosine <= sine of high), from the smaller tails; at least 0."""
        below_low, beyond_low = self.tails(*low)
        below_high, beyond_high = self.tails(*high)
        chance = np.where(below_high < 0.5, below_high - below_low, beyond_low - beyond_high)
        return np.maximum(chance, 0.0)

    def tails(self, sine2: Floats, cosine2: Floats) -> Squares:
        """(P(largest cosine <= sine), P(largest cosine > sine)) at angles with these squares."""
        angle = np.arctan2(np.sqrt(sine2), np.sqrt(cosine2))
        below, beyond = np.zeros_like(angle), np.ones_like(angle)
        high = angle >= self.breaks[1]
        with np.errstate(divide="ignore"):
            tangent = np.sqrt(sine2[high]) / np.sqrt(cosine2[high])
        beyond[high] = self.m * t_sf(tangent * np.sqrt(self.m - 2), self.m - 2)
        below[high] = 1 - beyond[high]
        middle = ~high & (angle > self.breaks[-1])
        if middle.any():
            piece = np.searchsorted(-self.breaks, -angle[middle]) - 2
            down = self._down_to(piece, angle[middle])
            beyond[middle] = self.beyond_top[piece] + down
            below[middle] = self.below_bottom[piece] + np.maximum(self.series[piece].sum(axis=1) - down, 0.0)
        return below, beyond

    def _down_to(self, piece: Places, angle: Floats) -> Floats:
        top, bottom = self.breaks[piece + 1], self.breaks[piece + 2]
        t = 2 * np.sqrt(np.clip((top - angle) / (top - bottom), 0.0, 1.0)) - 1
        later, latest = np.zeros_like(t), np.zeros_like(t)
        for column in range(self.series.shape[1] - 1, 0, -1):
            later, latest = self.series[piece, column] + 2 * t * later - latest, later
        values: Floats = self.series[piece, 0] + t * later - latest
        return values


@lru_cache(maxsize=MOST_FOR_PAIRS)
def _largest_cosine(m: int) -> _LargestCosine:
    breaks = _breaks(m)
    if m == 3:
        return _LargestCosine(m, breaks, np.empty((0, _DEGREE + 1)), np.empty(0), np.empty(0))
    others = _largest_cosine(m - 1)
    tops, widths = breaks[1:-1], breaks[1:-1] - breaks[2:]
    series = _series_down(others, m, tops[:, None], widths[:, None])
    within = np.maximum(series.sum(axis=1), 0.0)
    first = m * float(t_sf(float(np.tan(breaks[1])) * (m - 2) ** 0.5, m - 2))
    beyond_top = first + np.concatenate([[0.0], np.cumsum(within)[:-1]])
    below_bottom = np.concatenate([np.cumsum(within[::-1])[-2::-1], [0.0]])
    return _LargestCosine(m, breaks, series, beyond_top, below_bottom)


def _series_down(others: _LargestCosine, m: int, top: Floats, width: Floats) -> Floats:
    """One row a piece: the Chebyshev series in y of the probability between the angle at y and `top`."""
    turns = pi * (np.arange(_DEGREE) + 0.5) / _DEGREE
    y = (np.cos(turns) + 1) / 2
    angle = top - width * y * y
    sine2 = np.minimum(m / (m - 2) * np.tan(angle) ** 2, 1.0)
    below, _ = others.tails(sine2.reshape(-1), 1 - sine2.reshape(-1))
    density = m * _density_constant(m) * np.cos(angle) ** (m - 3) * below.reshape(angle.shape)
    integrand = density * width * y  # 2 width y dy, and dy is half a step of the Chebyshev variable
    basis = np.cos(np.arange(_DEGREE)[:, None] * turns)
    series = 2 / _DEGREE * np.sum(integrand[:, None, :] * basis, axis=-1)
    # The integral of a Chebyshev series, term by term: (c[k - 1] - c[k + 1]) / (2 k), with c[0] doubled.
    padded = np.concatenate([series, np.zeros((len(series), 2))], axis=1)
    degrees = np.arange(1, _DEGREE + 1)
    integral = (padded[:, :-2] - padded[:, 2:]) / (2 * degrees)
    at_top = np.sum(integral * (-1.0) ** degrees, axis=1, keepdims=True)
    rows: Floats = np.concatenate([-at_top, integral], axis=1)
    return rows


def _breaks(m: int) -> Floats:
    # Falling angles at which the j largest of m values are equal and so are the others, j from 1 to m - 1.
    j = np.arange(1, m)
    angles: Floats = np.arctan2(np.sqrt(m - j), np.sqrt(m * (j - 1.0)))
    return angles


def _density_constant(n: int) -> float:
    # One over the integral of cos^(n - 3) from -pi/2 to pi/2 (Wallis).
    power = n - 3
    integral = pi if power % 2 == 0 else 2.0
    for k in range(power, 1, -2):
        integral *= (k - 1) / k
    return 1 / integral
