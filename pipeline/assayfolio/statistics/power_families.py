"""Power of all pairs under one critical value: of one pair, of at least one, of every one.

k levels with n values each; two extreme levels differ by `difference` and the k - 2 others lie midway. The
truly different pairs are then the extremes with each other, and each extreme with each level midway (half the
difference); the levels midway do not differ, and declaring such a pair different is an error, not a success.

At least one (any-pair power): at least one truly different pair is declared different.
Every one (all-pairs power): every truly different pair is declared different, in its true direction.

A pair is declared different where |mean_i - mean_j| > critical * s * sqrt(2/n), with the same critical value
for every pair. Given s, and the extremes' distance and midpoint, the levels midway are independent; distance
and midpoint are independent of each other. So both powers are integrals over s, the distance and the
midpoint, however many levels there are. With unequal numbers of values that no longer separates, and no such
power is offered. Any-pair and all-pairs power after P. H. Ramsey, J. Am. Stat. Assoc. 73, 1978 (from memory).
"""

import math
from collections.abc import Sequence
from functools import lru_cache
from typing import Final

import numpy as np
from scipy.special import ndtr

from assayfolio.statistics.arguments import Floats
from assayfolio.statistics.comparisons import GREATER, TWO_SIDED
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.statistics.power import error_df, pair_power, positive
from assayfolio.statistics.quadrature import PiecewiseCurve, chebyshev_points, composite_rule
from assayfolio.statistics.spread_rule import spread_rule
from assayfolio.statistics.studentized_range import studentized_range_isf

_ROOT_TWO: Final = math.sqrt(2)
_REACH: Final = 13.0  # nine standard deviations of a difference of two means with unit variance
_PANEL: Final = 3.0
_NODES: Final = 16
_SERIES: Final = 18
_SETTLED: Final = 18.0  # an interval of this length about the midpoint holds every mean
_MIDPOINT_STEP: Final = 0.15


def tukey_critical(k: int, df: float, alpha: float) -> float:
    """What |t| of a pair is held against by Tukey's procedure: the studentized range point over sqrt(2)."""
    return float(studentized_range_isf(alpha, k, df)) / _ROOT_TWO


def tukey_pair_power(
    n_a: int, n_b: int, k: int, df: float, difference: float, sigma: float, alpha: float
) -> float:
    """The probability that one given pair of k levels is declared different by Tukey-Kramer.

    The pair differs by `difference`; its sizes may differ. Both directions count.
    Raises ValueError unless `difference` and `sigma` are positive.
    """
    return pair_power(n_a, n_b, df, difference, sigma, tukey_critical(k, df, alpha), TWO_SIDED)


def tukey_any_power(n: int, k: int, difference: float, sigma: float, alpha: float) -> float:
    """The any-pair power of Tukey's procedure, `n` values at each of `k` levels; see `any_pair_power`."""
    return any_pair_power(n, k, difference, sigma, tukey_critical(k, error_df((n,) * k), alpha))


def tukey_all_power(n: int, k: int, difference: float, sigma: float, alpha: float) -> float:
    """The all-pairs power of Tukey's procedure, `n` values at each of `k` levels; see `all_pairs_power`."""
    return all_pairs_power(n, k, difference, sigma, tukey_critical(k, error_df((n,) * k), alpha))


def common_size(n: Sequence[int]) -> int:
    """The number of values that every level has, as the powers below need it.

    Raises NotComputableError where the numbers differ.
    """
    if len(set(n)) > 1:
        raise NotComputableError(
            "the power to declare at least one or every pair is computed for the same number of values at"
            f" every level; here are {', '.join(map(str, n))}. The power of one pair holds for any numbers"
        )
    return n[0]


def any_pair_power(n: int, k: int, difference: float, sigma: float, critical: float) -> float:
    """The probability that at least one truly different pair is declared different.

    `n` values at each of `k` levels, each t against `critical`. Either direction counts, as in the two-sided
    test itself. For k = 2 the power of the pair. Measured: absolute error below 1e-12.
    Raises ValueError unless `difference` and `sigma` are positive, NotComputableError for n = 1.
    """
    df = error_df((n,) * k)
    if k == 2:
        return pair_power(n, n, df, difference, sigma, critical, TWO_SIDED)
    apart = _apart(n, difference, sigma)
    scale = _ROOT_TWO * critical
    # Only where a declaration takes as much as the extremes are apart does it depend on S.
    active = (_ROOT_TWO * (apart - _REACH), _ROOT_TWO * (max(apart, _SETTLED) + _REACH))
    s, weights = spread_rule(df, _ROOT_TWO * scale, active)
    needed = scale * s
    # How much further apart than they truly are the extremes may be found without being declared so.
    more, more_weights = _on_intervals(
        np.full_like(s, max(-apart, -_REACH)), np.minimum(needed - apart, _REACH)
    )
    density = _distance_density(more) + _distance_density(more + 2 * apart)
    share = _share_between((2 * needed - apart)[:, None] - more, k - 2)
    none = np.sum(more_weights * density * share, axis=-1)
    return max(0.0, 1 - float(np.sum(weights * none)))


def all_pairs_power(n: int, k: int, difference: float, sigma: float, critical: float) -> float:
    """The probability that every truly different pair is declared so, in its true direction.

    `n` values at each of `k` levels, each t against `critical`. Every level midway then lies between the
    extremes, at least critical * s * sqrt(2/n) from both. Measured: absolute error below 1e-12.
    Raises ValueError unless `difference` and `sigma` are positive, NotComputableError for n = 1.
    """
    df = error_df((n,) * k)
    if k == 2:
        return pair_power(n, n, df, difference, sigma, critical, GREATER)
    apart = _apart(n, difference, sigma)
    scale = _ROOT_TWO * critical
    active = (_ROOT_TWO * (apart - _SETTLED - _REACH), _ROOT_TWO * (apart + _REACH))
    s, weights = spread_rule(df, _ROOT_TWO * scale, active)
    needed = scale * s
    # Beyond what is needed on both sides the extremes leave `room` for the levels midway.
    expected = apart - 2 * needed
    more, more_weights = _on_intervals(np.maximum(-expected, -_REACH), np.full_like(s, _REACH))
    share = _share_between(expected[:, None] + more, k - 2)
    every = np.sum(more_weights * _distance_density(more) * share, axis=-1)
    return min(1.0, float(np.sum(weights * every)))


def _apart(n: int, difference: float, sigma: float) -> float:
    # Of the extremes, in standard deviations of a mean.
    return positive("the difference", difference) / positive("sigma", sigma) * math.sqrt(n)


def _distance_density(deviation: Floats) -> Floats:
    # Of the difference of two means with unit variance.
    density: Floats = np.exp(-deviation * deviation / 4) / math.sqrt(4 * math.pi)
    return density


def _on_intervals(low: Floats, high: Floats) -> tuple[Floats, Floats]:
    # Nodes and weights on each row's own interval, as many as the longest one needs; an empty one counts for
    # nothing.
    length = np.maximum(high - low, 0.0)[:, None]
    count = max(1, math.ceil(float(length.max()) / _PANEL))
    nodes, weights = composite_rule(np.linspace(0.0, 1.0, count + 1), _NODES)
    return low[:, None] + length * nodes, length * weights


def _share_between(length: Floats, levels: int) -> Floats:
    # The probability that `levels` means of unit variance lie in an interval of that length about the
    # extremes' midpoint, averaged over the midpoint.
    return _share_curve(levels)(length)


@lru_cache(maxsize=64)
def _share_curve(levels: int) -> PiecewiseCurve:
    # The midpoint has variance one half; the trapezoidal rule is exact to the last digit for such averages.
    steps = math.ceil(_REACH / 2 / _MIDPOINT_STEP)
    midpoint = _MIDPOINT_STEP * np.arange(-steps, steps + 1)
    weights = _MIDPOINT_STEP * np.exp(-midpoint * midpoint) / math.sqrt(math.pi)
    half = chebyshev_points(np.arange(_SETTLED + 1.0), _SERIES)[:, :, None] / 2
    inside = ndtr(half + midpoint) - ndtr(midpoint - half)
    return PiecewiseCurve.through(np.sum(weights * inside**levels, axis=-1), 0.0, 1.0)
