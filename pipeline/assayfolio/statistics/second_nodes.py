"""The second node set: tails of a largest standardised difference by trapezoidal sums, for the second route.

With S = s/sigma on df degrees of freedom, P(statistic > q) is the average over S of W(qS), W being the tail
where sigma is known. Both integrals are trapezoidal sums in doubles: over z for W, and over log S, where the
nodes of all q lie on one grid of log(qS), so that W is formed once for all of them. Integrands that are
analytic and fall off at both ends make such sums converge faster than any power of the step (L. N. Trefethen
and J. A. C. Weideman, SIAM Review 56, 2014, 385; from memory). The density of log S is normalised by its own
sum. Steps follow from k, the sizes and df alone.

Written apart from `distributions`, `studentized` and `quadrature`; it uses nothing of them.
"""

import math
from collections import Counter
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np
from scipy.special import ndtr

from assayfolio.statistics.arguments import Floats

KnownSigmaTail = Callable[[Floats], Floats]
"""W: of distances r in units of sigma, the tail there."""

_NEGLIGIBLE: Final = 42.0  # exp(-42) is 6e-19
_FARTHEST: Final = 1e100  # below minus this, the tail is 1
_TOO_SMALL: Final = -700.0  # of the logarithm of a tail's bound; answered with zero
_STEP_IN_LOG_S: Final = 0.11
_STEP_IN_Z: Final = 0.3
_LOWEST_Z: Final = -9.2
_BLOCK: Final = 1 << 17


def range_tails(q: Floats, k: int, df: float) -> Floats:
    """P(Q > q) for the studentized range of `k` means on `df` degrees of freedom, for `q` of zero or more."""
    found = np.ones_like(q)
    inside = q > 0
    bound = _Bound(math.log(k * (k - 1)), 0.5)
    step = _step_in_log_s(k * (k - 1), df)
    found[inside] = _averaged(q[inside], df, lambda r: _range_tail(r, k), bound, step)
    return found


def many_to_one_tails(
    d: Floats, n_control: int, n_others: Sequence[int], df: float, two_sided: bool
) -> Floats:
    """P(max |T_i| > d), or P(max T_i > d) one-sided, for differences of means from one control's.

    T_i is the difference of the i-th mean (of n_i values) from the control's (of `n_control`), over its
    standard error with the pooled s on `df` degrees of freedom. One-sided, `d` may be negative.
    """
    spreads = _Spreads.of(n_control, n_others)
    tail = spreads.outside if two_sided else spreads.above
    most = 2 * len(n_others)
    step = _step_in_log_s(most, df)
    found = np.empty_like(d)
    above, below = d > 0, d < 0
    found[above] = _averaged(d[above], df, tail, _Bound(math.log(most), 1.0), step)
    found[below] = _averaged(
        np.minimum(-d[below], _FARTHEST), df, lambda r: tail(-r), _Bound(math.inf, 1.0), step
    )
    found[d == 0] = tail(np.zeros(1))
    return found


@dataclass(frozen=True, slots=True)
class _Bound:
    """W(r) is at most 1, and at most exp(`log_pairs` - `square` r^2 / 2)."""

    log_pairs: float
    square: float


def _step_in_log_s(most: int, df: float) -> float:
    """The step over log S where W is a union of up to `most` events: more leave 1 more steeply."""
    return _STEP_IN_LOG_S / (1 + math.log(most) / 16) / math.sqrt(1 + df / 14)


def _averaged(q: Floats, df: float, tail: KnownSigmaTail, bound: _Bound, step: float) -> Floats:
    """The average of `tail`(qS) over S, for each q above zero; zero where that is below 1e-290."""
    averages = np.zeros_like(q)
    low, high, greatest = _where_it_counts(np.log(q), df, bound)
    rows = np.flatnonzero(greatest > _TOO_SMALL)
    if rows.size == 0:
        return averages
    first, last = np.floor(low[rows] / step).astype(np.intp), np.ceil(high[rows] / step).astype(np.intp)
    nodes = np.unique(np.concatenate([np.arange(a, b + 1) for a, b in zip(first, last, strict=True)]))
    tails = tail(np.exp(step * nodes))
    for row, a, b in zip(rows, np.searchsorted(nodes, first), np.searchsorted(nodes, last), strict=True):
        part = slice(int(a), int(b) + 1)
        density = np.exp(_log_density(step * nodes[part] - math.log(q[row]), df))
        averages[row] = math.fsum(density * tails[part])
    return averages / _sum_of_density(step, df)


def _log_density(u: Floats, df: float) -> Floats:
    """The logarithm of the density of u = log S, less its value at u = 0."""
    return -df / 2 * (np.expm1(2 * u) - 2 * u)


def _sum_of_density(step: float, df: float) -> float:
    lowest, highest = _reach(np.array([_NEGLIGIBLE]), df)
    nodes = step * np.arange(math.floor(lowest[0] / step), math.ceil(highest[0] / step) + 1)
    return math.fsum(np.exp(_log_density(nodes, df)))


def _reach(depth: Floats, df: float) -> tuple[Floats, Floats]:
    """From where to where, or a little more, the density of log S is within exp(-`depth`) of its mode."""
    c = 2 * depth / df
    s = np.sqrt(2 * c)
    return -np.minimum(s + c, 1 + c) / 2, np.minimum(s, np.log1p(c + s)) / 2


def _where_it_counts(log_q: Floats, df: float, bound: _Bound) -> tuple[Floats, Floats, Floats]:
    """Where log(qS) is outside this interval the integrand is negligible; its greatest value's logarithm.

    Both by the bound in the place of W.
    """
    # Where the bound falls off, its product with the density is greatest at S^2 = df / (df + square q^2).
    ratio = math.log(bound.square / df) + 2 * log_q
    peak = -0.5 * np.logaddexp(0, ratio)
    kink = 0.5 * (math.log(2 * max(bound.log_pairs, 1e-300)) - math.log(bound.square)) - log_q
    top = np.where(peak > kink, peak, np.minimum(kink, 0))
    falling = np.minimum(0, bound.log_pairs - bound.square / 2 * np.exp(2 * (log_q + top)))
    greatest = _log_density(top, df) + falling
    depth = _NEGLIGIBLE - greatest
    low, high = _reach(depth, df)
    farthest = 0.5 * np.log(2 * (bound.log_pairs + depth) / bound.square)
    return log_q + low, np.minimum(log_q + high, farthest), greatest


def _range_tail(r: Floats, k: int) -> Floats:
    """P(range of k standard normal values > r): the largest at z, and not all others within r below it."""
    step = _STEP_IN_Z / (1 + 0.2 * math.log(k))
    z = np.arange(_LOWEST_Z, math.sqrt(float(np.max(r)) ** 2 / 2 + 2 * _NEGLIGIBLE) + step, step)
    below = ndtr(z)
    weights = k * step / math.sqrt(2 * math.pi) * np.exp(-z * z / 2) * below ** (k - 1)

    def outside(block: Floats) -> Floats:
        share = np.minimum(ndtr(z - block[:, None]) / below, 1)
        return -np.expm1((k - 1) * _log_of_rest(share))

    return _summed(r, weights, outside)


@dataclass(frozen=True, slots=True)
class _Spreads:
    """How far each difference follows the control: b_i and sqrt(1 - b_i^2), and how many share them."""

    follows: Floats
    own: Floats
    counts: Floats

    @staticmethod
    def of(n_control: int, n_others: Sequence[int]) -> "_Spreads":
        """b_i^2 = n_i / (n_control + n_i), equal ones together."""
        sizes = sorted(Counter(n_others).items())
        n = np.array([float(size) for size, _ in sizes])
        total = n_control + n
        counts = np.array([float(count) for _, count in sizes])
        return _Spreads(np.sqrt(n / total), np.sqrt(n_control / total), counts)

    def above(self, r: Floats) -> Floats:
        """P(max Z_i > r) for standard normal Z_i with correlations b_i b_j."""
        step, reach = self._grid(r)
        z: Floats = step * np.arange(-reach, reach + 1, dtype=np.float64)
        return self._tail(r, z, step, lambda at, drift: ndtr((drift - at) / self.own))

    def outside(self, r: Floats) -> Floats:
        """P(max |Z_i| > r); the integrand is the same at z and -z."""
        step, reach = self._grid(r)
        z: Floats = step * np.arange(reach + 1, dtype=np.float64)
        steps = np.where(z > 0, 2 * step, step)
        return self._tail(
            r, z, steps, lambda at, drift: ndtr((drift - at) / self.own) + ndtr((-drift - at) / self.own)
        )

    def _grid(self, r: Floats) -> tuple[float, int]:
        steepest = float(np.min(self.own / self.follows))
        step = _STEP_IN_Z * min(1.0, 1.3 * steepest) / (1 + 0.2 * math.log(float(np.sum(self.counts))))
        farthest = max(0.0, float(np.max(r)))
        return step, math.ceil(math.sqrt(farthest**2 + 2 * _NEGLIGIBLE) / step)

    def _tail(
        self, r: Floats, z: Floats, steps: Floats | float, beyond: Callable[[Floats, Floats], Floats]
    ) -> Floats:
        weights = steps / math.sqrt(2 * math.pi) * np.exp(-z * z / 2)
        drift = z[:, None] * self.follows

        def lost(block: Floats) -> Floats:
            shares = np.minimum(beyond(block[:, None, None], drift), 1)
            rest: Floats = np.sum(self.counts * _log_of_rest(shares), axis=-1)
            return -np.expm1(rest)

        return _summed(r, weights, lost, self.counts.size)


def _log_of_rest(share: Floats) -> Floats:
    with np.errstate(divide="ignore"):
        return np.asarray(np.log1p(-share))


def _summed(r: Floats, weights: Floats, lost: Callable[[Floats], Floats], depth: int = 1) -> Floats:
    rows = max(1, _BLOCK // (weights.size * depth))
    parts = [np.sum(weights * lost(r[at : at + rows]), axis=-1) for at in range(0, r.size, rows)]
    return np.concatenate(parts)
