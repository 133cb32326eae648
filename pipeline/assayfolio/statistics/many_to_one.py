"""The many-to-one distribution: the largest of t statistics that share a control and sigma.

T_i = (mean_i - mean_0) / (S sqrt(1/n_i + 1/n_0)) over sigma, with df S^2 chi-square on df degrees of freedom;
where no true difference is there, T_i and T_j have correlation b_i b_j, b_i^2 = n_i/(n_0 + n_i). Their tails
P(max |T_i| > d) and P(max T_i > d) are averages over S of the tails with sigma known: those come from
`many_to_one_normal`, the average from `studentized`. Everything is formed on the side of the smaller tail,
with its exponent apart. All rules are fixed: the same arguments give the same digits, alone or in any array,
and in any order of the sizes.

Method: C. W. Dunnett, J. Am. Stat. Assoc. 50, 1955; C. W. Dunnett, Algorithm AS 251, Appl. Stat. 38, 1989
(both from memory), with the inner integral as a curve made once for each set of sizes.
"""

import math
from collections.abc import Callable, Iterable
from dataclasses import dataclass
from typing import Final

import numpy as np

from assayfolio.statistics.arguments import (
    Floats,
    Places,
    Values,
    degrees_of_freedom_or_infinite,
    probabilities,
    real_values,
    shaped,
    statistic_values,
)
from assayfolio.statistics.many_to_one_normal import Maximum
from assayfolio.statistics.roots import Improvement, settled_points
from assayfolio.statistics.studentized import Interval, average_over_spread, interval_above, where_tail_counts
from assayfolio.statistics.tails import t_isf, t_log10_sf, t_sf, t_two_sided, t_two_sided_log10

MOST_OTHERS: Final = 199
_NEGLIGIBLE: Final = 40.0  # exp(-40) is 4e-18
_NEGLIGIBLE_BELOW: Final = 50.0  # the lower tail is meant down to 1e-7 and may be that much smaller
_LARGEST: Final = 1e300
_SLOPE_STEP: Final = 1e-4


def many_to_one_sf(
    d: Values, n_control: float, n_others: Iterable[float], df: float, two_sided: bool = True
) -> Values:
    """P(max |T_i| > `d`), or P(max T_i > `d`) where not `two_sided`, for t statistics that share a control.

    The control's mean is of `n_control` values, those of the others of `n_others`, up to 199 of any sizes;
    sigma is estimated on `df` degrees of freedom, a number from 1 upwards, not necessarily whole, or infinite
    where sigma is known. `d` may be an array; it may be negative where signs count. With one other it is
    Student's t. Measured (tests/generate/measure_digits.py): 13.9 digits for p from 0.999 to 1e-14, 13.0 down
    to 1e-200; with sizes a million apart 13.8 and 12.5. Never rises with `d` beyond that accuracy.
    Raises ValueError for NaN, for a negative `d` where signs do not count, for sizes and `df` out of range.
    """
    law = _Law.of(n_control, n_others, df, two_sided)
    if law.is_students:
        return shaped(d, (t_two_sided if two_sided else t_sf)(law.values(d), law.df))
    return shaped(d, np.exp(law.log_survival(law.values(d))))


def many_to_one_log10_sf(
    d: Values, n_control: float, n_others: Iterable[float], df: float, two_sided: bool = True
) -> Values:
    """The base-10 logarithm of `many_to_one_sf`, finite also where that is below the smallest double.

    Measured: 12.5 digits of the tail down to 1e-290. Far beyond, where sigma is known or nearly so, the ratio
    to Bonferroni's sum is held as it is at 1e-300: the tail is then right within a factor of their number.
    """
    law = _Law.of(n_control, n_others, df, two_sided)
    if law.is_students:
        return shaped(d, (t_two_sided_log10 if two_sided else t_log10_sf)(law.values(d), law.df))
    return shaped(d, law.log_survival(law.values(d)) / math.log(10))


def many_to_one_isf(
    p: Values, n_control: float, n_others: Iterable[float], df: float, two_sided: bool = True
) -> Values:
    """The d that max |T_i|, or max T_i where not `two_sided`, exceeds with probability `p`.

    Limits as for `many_to_one_sf`; 0 < `p` < 1. Measured: 15 digits for p from 0.999 to 1e-10.
    Infinite where d exceeds 1e300.
    """
    law = _Law.of(n_control, n_others, df, two_sided)
    upper = probabilities(p)
    bonferroni = t_isf(upper / law.singles, law.df)
    if law.is_students:
        return shaped(p, bonferroni)
    scale = _WITHOUT_SIGN if two_sided else _WITH_SIGN
    start = scale.positive(np.minimum(bonferroni, _LARGEST))
    points = np.empty_like(upper)
    far = upper <= 0.5
    points[far] = settled_points(_improvement(law.log_survival, np.log(upper[far]), scale), start[far])
    points[~far] = settled_points(
        _improvement(law.log_cumulative, np.log1p(-upper[~far]), scale), start[~far]
    )
    points = scale.statistic(points)
    return shaped(p, np.where(points < _LARGEST, points, np.inf))


@dataclass(frozen=True, slots=True)
class _Scale:
    """A positive number that stands for a statistic while a point is sought, and the way back."""

    positive: Callable[[Floats], Floats]
    statistic: Callable[[Floats], Floats]


def _exp_of_arsinh(d: Floats) -> Floats:
    size = np.abs(d) + np.hypot(d, 1)
    return np.where(d < 0, 1 / size, size)


_WITHOUT_SIGN: Final = _Scale(lambda d: d, lambda x: x)
_WITH_SIGN: Final = _Scale(_exp_of_arsinh, lambda x: (x - 1 / x) / 2)


def _improvement(tail: Callable[[Floats], Floats], targets: Floats, scale: _Scale) -> Improvement:
    # Newton's method on the logarithm of a tail; a difference for the slope still gains eight digits a step.
    wide = math.exp(_SLOPE_STEP)

    def improved(x: Floats, places: Places) -> Floats:
        log_tail = tail(scale.statistic(np.concatenate([x, x * wide, x / wide])))
        with np.errstate(divide="ignore", invalid="ignore"):
            here, above, below = log_tail.reshape(3, -1)
            step = np.clip(2 * _SLOPE_STEP * (targets[places] - here) / (above - below), -1, 1)
        # Where the lower tail has underflowed there is no slope, but it is clear which way to go.
        return np.minimum(x * np.exp(np.where(np.isnan(step), 1, step)), _LARGEST)

    return improved


@dataclass(frozen=True, slots=True)
class _Law:
    """The distribution for one set of sizes and one number of degrees of freedom."""

    maximum: Maximum
    df: float

    @staticmethod
    def of(n_control: float, n_others: Iterable[float], df: float, two_sided: bool) -> "_Law":
        """The distribution, after its parameters were found in range."""
        others = tuple(n_others)
        if not 1 <= len(others) <= MOST_OTHERS:
            raise ValueError(f"one to {MOST_OTHERS} others are compared with a control, not {len(others)}")
        for n in (n_control, *others):
            if not 1 <= n < math.inf:
                raise ValueError(f"a mean is of at least one value, not of {n!r}")
        sides = 2 if two_sided else 1
        return _Law(Maximum.of(n_control, others, sides), degrees_of_freedom_or_infinite(df))

    @property
    def is_students(self) -> bool:
        """Whether there is only one other."""
        return self.maximum.size == 1

    @property
    def singles(self) -> int:
        """How many single tails Bonferroni's bound adds up."""
        return self.maximum.sides * self.maximum.size

    def values(self, d: float | Floats) -> Floats:
        """The numbers of `d`, found in range."""
        if self.maximum.sides == 1:
            return real_values(d, "a many-to-one statistic")
        return statistic_values(d, "a many-to-one statistic without its sign")

    def log_survival(self, d: Floats) -> Floats:
        """The natural logarithm of P(max > d)."""
        least = -_LARGEST if self.maximum.sides == 1 else 0.0
        log_tail = np.where(d <= least, 0.0, -np.inf)
        inside = np.flatnonzero((d > least) & (d < _LARGEST))
        at = d[inside]
        if math.isinf(self.df):
            factor, exponent = self.maximum.survival(at)
            log_tail[inside] = np.log(factor) + exponent
        else:
            interval, scale = self._where_upper_counts(at)
            averages = average_over_spread(
                lambda rows, u: self.maximum.survival(at[rows, None] * np.exp(u)),
                interval,
                scale,
                self.df,
                self._finest,
            )
            log_tail[inside] = np.log(averages.mean) + scale
        return np.minimum(log_tail, 0)

    def log_cumulative(self, d: Floats) -> Floats:
        """The natural logarithm of P(max <= d), for finite d."""
        with np.errstate(divide="ignore"):
            if math.isinf(self.df):
                return np.log(self.maximum.cumulative(d))
            scale = np.zeros_like(d)
            averages = average_over_spread(
                lambda rows, u: (self.maximum.cumulative(d[rows, None] * np.exp(u)), np.zeros_like(u)),
                interval_above(scale + _NEGLIGIBLE_BELOW, self.df / 2),
                scale,
                self.df,
                self._finest,
            )
            return np.log(averages.mean)

    @property
    def _flat_to(self) -> float:
        # Of r squared: up to here W is near 1, from here on it falls as exp(-r²/2).
        return 2 * math.log(self.singles / 2)

    @property
    def _finest(self) -> float:
        # The more treatments, the more steeply W leaves 1. As for the range of as many.
        return 0.5 / (1 + math.log(self.singles) / 5.5)

    def _where_upper_counts(self, d: Floats) -> tuple[Interval, Floats]:
        everywhere = interval_above(np.full_like(d, _NEGLIGIBLE), self.df / 2)
        low, high, scale = everywhere.low, everywhere.high, np.zeros_like(d)
        above = d > 0
        interval, scale[above] = where_tail_counts(_NEGLIGIBLE, self._flat_to, d[above], self.df)
        low[above], high[above] = interval.low, interval.high
        return Interval(low, high), scale
