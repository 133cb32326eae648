"""Whether values drift with the order in which they were measured. It informs and never chooses."""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from itertools import islice
from math import lcm

from assayfolio.exact import Decimal10, Root, in_one_unit, to_double
from assayfolio.statistics.adjustment import Tail
from assayfolio.statistics.comparisons import signed_root
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.statistics.tails import t_two_sided, t_two_sided_log10

OrderedValues = Sequence[tuple[Fraction | int, Decimal10]]
"""Values with their places in the order of measurement: (place, value)."""


@dataclass(frozen=True, slots=True)
class RunOrderTrend:
    """The drift within the levels: its slope per unit of order, t statistic, degrees of freedom, tail."""

    slope: Fraction
    statistic: Root
    df: int
    tail: Tail


def run_order_trend(groups: Sequence[tuple[str, OrderedValues]]) -> RunOrderTrend:
    """The two-sided t test of no common slope of value on order within the levels.

    Analysis of covariance with one covariate: with S the sums over all values of products of deviations from
    the level means, slope = S_xy / S_xx and t = slope / sqrt(s^2 / S_xx), where
    s^2 = (S_yy - S_xy^2 / S_xx) / (N - k - 1); differences between the levels do not count as drift.
    Textbook formulas (from memory). Slope and statistic are exact.
    Raises NotComputableError where N - k - 1 < 1, the order does not vary within any level, or the values lie
    on the common line (or are equal) so that no error is left.
    """
    listed = [values for _, values in groups if values]
    df = sum(len(values) for values in listed) - len(listed) - 1
    if df < 1:
        raise NotComputableError("too few values to tell a trend in run order from chance")
    s_xx, s_xy, s_yy = _sums_within(listed)
    if not s_xx:
        raise NotComputableError("the run order does not vary within any level")
    slope = s_xy / s_xx
    residual = s_yy - s_xy * slope
    if not residual:
        raise NotComputableError("no error is left beside a trend in run order")
    statistic = signed_root(slope, slope * s_xy * df / residual)
    t = to_double(statistic)
    return RunOrderTrend(
        slope, statistic, df, Tail(float(t_two_sided(t, df)), float(t_two_sided_log10(t, df)))
    )


def _sums_within(groups: Sequence[OrderedValues]) -> tuple[Fraction, Fraction, Fraction]:
    # In whole units: the common denominator of the places, the finest decimal place of the values.
    unit = lcm(*(Fraction(place).denominator for values in groups for place, _ in values))
    numbers, exponent, divisor = in_one_unit(value for values in groups for _, value in values)
    left = iter(numbers)
    s_xx = s_xy = s_yy = Fraction(0)
    for values in groups:
        n = len(values)
        x = [int(place * unit) for place, _ in values]
        y = list(islice(left, n))
        s_xx += sum(a * a for a in x) - Fraction(sum(x) ** 2, n)
        s_xy += sum(a * b for a, b in zip(x, y, strict=True)) - Fraction(sum(x) * sum(y), n)
        s_yy += sum(b * b for b in y) - Fraction(sum(y) ** 2, n)
    step_x, step_y = Fraction(1, unit), Fraction(10) ** exponent / divisor
    return s_xx * step_x**2, s_xy * step_x * step_y, s_yy * step_y**2
