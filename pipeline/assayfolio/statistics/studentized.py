"""Averages over the spread: the one integral that a statistic divided by an estimated sigma needs.

S = s/sigma on df degrees of freedom; averages of h(S) are taken in u = log S, where S has the density
sqrt(df/π) exp(-δ) exp(-(df/2)(S^2 - 1 - log S^2)) with δ Stirling's correction: no digits are lost at any df.
The caller gives the interval of u outside which nothing counts; it is divided into panels that widen to the
left, where integrands fall off as slowly as exp(df u), each with twenty Gauss-Legendre nodes. How many panels
follows from the interval's length and the finest width, never from how the quadrature fares.
"""

import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache
from typing import Final

import numpy as np

from assayfolio.statistics.arguments import Floats, Places
from assayfolio.statistics.deviance import excess, stirling_correction
from assayfolio.statistics.quadrature import composite_rule

_NODES: Final = 20
_WIDENING: Final = 1.4
_FEWEST_PANELS: Final = 3
_BLOCK: Final = 32_768

Integrand = Callable[[Places, Floats], tuple[Floats, Floats]]
"""Of which rows, and log S for each of them and each node: a factor, and an exponent of e beside it."""


@dataclass(frozen=True, slots=True)
class Averages:
    """The average of h(S), a row each: `mean` times exp(the row's scale), and `drift` likewise.

    `drift` is the average of df (S^2 - 1) h(S). Where h(S) is H(qS), that is the derivative of the average
    against log q (by parts), which is what Newton's method asks for.
    """

    mean: Floats
    drift: Floats


@dataclass(frozen=True, slots=True)
class Interval:
    """From `low` to `high` in log S, a row each."""

    low: Floats
    high: Floats

    def moved(self, by: Floats) -> "Interval":
        """The interval with both ends moved by `by`."""
        return Interval(self.low + by, self.high + by)

    def meeting(self, other: "Interval") -> "Interval":
        """What both have in common."""
        return Interval(np.maximum(self.low, other.low), np.minimum(self.high, other.high))


def interval_above(depth: Floats, half_df: float) -> Interval:
    """Where `half_df` times (e^2u - 1 - 2u) is below `depth`, or a little more than that."""
    c = depth / half_df
    s = np.sqrt(2 * c)
    low = np.minimum(s + s**2 / 6 + s**3 / 36 + s**4 / 270, 1 + c)
    high = s
    for _ in range(3):  # each step stays above the root of e^v - 1 - v = c and comes closer to it
        high = np.minimum(high, np.log1p(c + high))
    return Interval(-low / 2, high / 2)


def where_tail_counts(depth: float, flat: float, x: Floats, df: float) -> tuple[Interval, Floats]:
    """Where h(xS), times the density of S, comes within exp(-`depth`) of its maximum; and that maximum's log.

    log h(r) is near min(0, (`flat` - r^2)/2), as for the upper tail of an extreme of normal values. With that
    in its place the logarithm of the integrand is the lesser of two curves, both solved in closed form.
    """
    half = df / 2
    peak = 0.5 * math.log(df) - np.log(np.hypot(math.sqrt(df), x))
    falling = df * peak + flat / 2
    with np.errstate(divide="ignore"):
        kink = 0.5 * np.log(flat) - np.log(x)
    at_kink = np.minimum(kink, 0)
    level = np.where(peak > kink, falling, -half * (np.expm1(2 * at_kink) - 2 * at_kink))
    everywhere = interval_above(depth - level, half)
    beyond = interval_above(depth - level + falling, half).moved(peak)
    return everywhere.meeting(beyond), level


def average_over_spread(
    integrand: Integrand, interval: Interval, scale: Floats, df: float, finest: float
) -> Averages:
    """The averages of `integrand` over S on `df` degrees of freedom, as multiples of exp(`scale`).

    `finest` is the width in log S over which the integrand may change by itself. A row's digits do not depend
    on the other rows.
    """
    length = interval.high - interval.low
    growth = np.log1p(length * (_WIDENING - 1) / finest) / math.log(_WIDENING)
    panels = np.maximum(np.ceil(growth).astype(np.intp), _FEWEST_PANELS)
    mean, drift = np.empty_like(length), np.empty_like(length)
    for count in np.unique(panels):
        nodes, weights = _unit_rule(int(count))
        rows = np.flatnonzero(panels == count)
        step = max(1, _BLOCK // nodes.size)
        for begin in range(0, rows.size, step):
            block = rows[begin : begin + step]
            u = interval.low[block, None] + length[block, None] * nodes
            square_less_one = np.expm1(2 * u)
            factor, exponent = integrand(block, u)
            exponent = exponent - df / 2 * excess(square_less_one, 2 * u) - scale[block, None]
            terms = weights * factor * np.exp(exponent)
            mean[block] = np.sum(terms, axis=-1)
            drift[block] = np.sum(terms * (df * square_less_one), axis=-1)
    at_mode = math.sqrt(df / math.pi) * math.exp(-stirling_correction(df / 2))
    return Averages(mean * length * at_mode, drift * length * at_mode)


@lru_cache(maxsize=64)
def _unit_rule(panels: int) -> tuple[Floats, Floats]:
    widening = _WIDENING if panels > _FEWEST_PANELS else 1.0
    widths = widening ** np.arange(panels - 1, -1, -1)
    bounds = np.concatenate([np.zeros(1), np.add.accumulate(widths)])
    return composite_rule(bounds / bounds[-1], _NODES)
