"""The studentized range: the tails of the widest difference of k means, over an estimated sigma.

Q = (largest - smallest of k independent standard normal values) / S, with df S^2 chi-square on df degrees of
freedom. P(Q > q) is the average of W(qS) over S, W being the tail of the range itself: W comes from
`normal_range`, the average from `studentized`. Everything is formed on the side of the smaller tail, with its
exponent apart, so that small tails keep their relative accuracy. All rules are fixed: the same q, k and df
give the same digits, alone or in any array.

Methods: R. E. Lund and J. R. Lund, Algorithm AS 190, Appl. Stat. 32, 1983; M. D. Copenhaver and B. Holland,
J. Stat. Comput. Simul. 30, 1988 (both from memory), with the inner integral as a curve made once for each k.
"""

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import Final

import numpy as np

from assayfolio.statistics.arguments import (
    Floats,
    Places,
    Values,
    degrees_of_freedom_or_infinite,
    probabilities,
    shaped,
    statistic_values,
)
from assayfolio.statistics.normal_range import range_cumulative, range_survival
from assayfolio.statistics.roots import Improvement, settled_points
from assayfolio.statistics.studentized import (
    Averages,
    average_over_spread,
    interval_above,
    where_tail_counts,
)
from assayfolio.statistics.tails import t_isf

MOST_MEANS: Final = 200
_NEGLIGIBLE: Final = 40.0  # exp(-40) is 4e-18
_NEGLIGIBLE_BELOW: Final = 50.0  # the lower tail is meant down to 1e-7 and may be that much smaller
_LARGEST: Final = 1e300
_SLOPE_STEP: Final = 1e-4


def studentized_range_sf(q: Values, k: int, df: float) -> Values:
    """P(Q > `q`) for the studentized range of `k` means on `df` degrees of freedom.

    `q` may be an array; 2 <= `k` <= 200; `df` is a number from 1 upwards, not necessarily whole, or infinite
    where sigma is known. Measured (tests/generate/measure_digits.py): 13.0 digits wherever the tail exceeds
    1e-14, 12.8 down to 1e-300, with df up to 1e6. Never rises with `q` beyond that accuracy.
    Raises ValueError for a negative `q` or NaN, and for `k` and `df` out of range.
    """
    return shaped(q, np.exp(_log_survival(q, k, df)))


def studentized_range_log10_sf(q: Values, k: int, df: float) -> Values:
    """The base-10 logarithm of `studentized_range_sf`, finite also where that is below the smallest double.

    Measured: 12.8 digits of the tail down to 1e-300; beyond, 15 of the logarithm itself.
    """
    return shaped(q, _log_survival(q, k, df) / math.log(10))


def studentized_range_isf(p: Values, k: int, df: float) -> Values:
    """The q that the studentized range of `k` means on `df` degrees of freedom exceeds with probability `p`.

    Limits as for `studentized_range_sf`; 0 < `p` < 1. Measured: 15 digits for p from 0.999 to 1e-10;
    11 and more at 1 - 1e-6, nearer to which p itself leaves fewer. Infinite where q exceeds
    1e300.
    """
    law = _Law.of(k, df)
    upper = probabilities(p)
    # With one pair in place of all, and with Bonferroni's bound, q is at least and at most what is sought.
    start = np.minimum(math.sqrt(2) * t_isf(upper / (law.k * (law.k - 1)), law.df), _LARGEST)
    points = np.empty_like(upper)
    far = upper <= 0.5
    points[far] = settled_points(_improvement(law.upper, np.log(upper[far])), start[far])
    points[~far] = settled_points(_improvement(law.lower, np.log1p(-upper[~far])), start[~far])
    return shaped(p, np.where(points < _LARGEST, points, np.inf))


@dataclass(frozen=True, slots=True)
class _LogTail:
    """The natural logarithm of a tail for each q, and its slope against log q."""

    value: Floats
    slope: Floats


def _improvement(tail: Callable[[Floats], _LogTail], targets: Floats) -> Improvement:
    def improved(q: Floats, places: Places) -> Floats:
        at = tail(q)
        with np.errstate(invalid="ignore"):
            step = np.clip((targets[places] - at.value) / at.slope, -1, 1)
        # Where the lower tail has underflowed there is no slope, but it is clear which way to go.
        return np.minimum(q * np.exp(np.where(np.isnan(step), 1, step)), _LARGEST)

    return improved


@dataclass(frozen=True, slots=True)
class _Law:
    """The distribution for one number of means and of degrees of freedom."""

    k: int
    df: float

    @staticmethod
    def of(k: int, df: float) -> "_Law":
        """The distribution, after its parameters were found in range."""
        if isinstance(k, bool) or not isinstance(k, int | np.integer) or not 2 <= k <= MOST_MEANS:
            raise ValueError(f"the number of means must be a whole number from 2 to {MOST_MEANS}, not {k!r}")
        return _Law(int(k), degrees_of_freedom_or_infinite(df))

    def upper(self, q: Floats) -> _LogTail:
        """The tail P(Q > q), for q > 0."""
        if math.isinf(self.df):
            return _with_slope(lambda r: _log_range_survival(r, self.k), q)
        interval, scale = where_tail_counts(_NEGLIGIBLE, self._flat_to / 2, q * math.sqrt(0.5), self.df)
        averages = average_over_spread(
            lambda rows, u: range_survival(q[rows, None] * np.exp(u), self.k),
            interval,
            scale,
            self.df,
            self._finest,
        )
        return _log_tail(averages, scale)

    def lower(self, q: Floats) -> _LogTail:
        """The tail P(Q <= q), for q > 0."""
        if math.isinf(self.df):
            return _with_slope(lambda r: _log_range_cumulative(r, self.k), q)
        scale = np.zeros_like(q)
        averages = average_over_spread(
            lambda rows, u: (range_cumulative(q[rows, None] * np.exp(u), self.k), np.zeros_like(u)),
            interval_above(scale + _NEGLIGIBLE_BELOW, self.df / 2),
            scale,
            self.df,
            self._finest,
        )
        return _log_tail(averages, scale)

    @property
    def _flat_to(self) -> float:
        # Of the square of the range: up to here W is near 1, from here on it falls as exp(-r^2/4).
        return 4 * math.log(self.k * (self.k - 1) / 2)

    @property
    def _finest(self) -> float:
        # The more means, the more steeply W leaves 1. The figures are measured: panels of this width, with
        # twenty nodes, hold 13 digits.
        return 0.5 / (1 + self._flat_to / 22)


def _log_tail(averages: Averages, scale: Floats) -> _LogTail:
    with np.errstate(divide="ignore", invalid="ignore"):
        return _LogTail(np.log(averages.mean) + scale, averages.drift / averages.mean)


def _log_range_survival(r: Floats, k: int) -> Floats:
    factor, exponent = range_survival(r, k)
    return np.log(factor) + exponent


def _log_range_cumulative(r: Floats, k: int) -> Floats:
    with np.errstate(divide="ignore"):
        return np.log(range_cumulative(r, k))


def _with_slope(log_tail: Callable[[Floats], Floats], q: Floats) -> _LogTail:
    # A difference is enough for the slope: Newton's method then gains eight digits a step.
    wide = np.exp(_SLOPE_STEP)
    with np.errstate(invalid="ignore"):
        slope = (log_tail(q * wide) - log_tail(q / wide)) / (2 * _SLOPE_STEP)
    return _LogTail(log_tail(q), slope)


def _log_survival(q: float | Floats, k: int, df: float) -> Floats:
    law = _Law.of(k, df)
    values = statistic_values(q, "a studentized range")
    log_tail = np.where(values == 0, 0.0, -np.inf)
    inside = np.flatnonzero((values > 0) & (values < _LARGEST))
    upper = law.upper(values[inside]).value
    near = upper > -math.log(2)
    upper[near] = np.log1p(-np.exp(law.lower(values[inside[near]]).value))
    log_tail[inside] = upper
    return log_tail
