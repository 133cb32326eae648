"""Checks of what the analysis assumes. They inform; they never choose the analysis."""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from math import frexp, ldexp

import numpy as np

from assayfolio.exact import Decimal10, ExactSums
from assayfolio.statistics.adjustment import Tail
from assayfolio.statistics.inference import variance_ratio_tail
from assayfolio.statistics.oneway import NotComputableError, one_way

SHAPIRO_WILK_LIMITS = (3, 5000)


@dataclass(frozen=True, slots=True)
class EqualVariancesCheck:
    """A test of equal variances that is an F test: exact statistic, degrees of freedom, tail."""

    f: Fraction
    df: tuple[int, int]
    tail: Tail


@dataclass(frozen=True, slots=True)
class NormalityCheck:
    """A test of normal residuals: statistic W and its p-value."""

    w: float
    p: float


def brown_forsythe_variances(groups: Sequence[tuple[str, Sequence[Decimal10]]]) -> EqualVariancesCheck:
    """The Brown-Forsythe test of equal variances: one-way F of the distances from each level's median.

    Null hypothesis: all levels have the same variance. The median of an even number of values is the mean of
    the middle two. The statistic is exact. Source: Brown and Forsythe 1974, J. Am. Stat. Assoc. 69, 364 (from
    memory). Not the test of means by the same authors.
    Raises NotComputableError where the distances do not vary within any level.
    """
    distances = [(level, _distances_from_median(values)) for level, values in groups]
    analysis = one_way(distances)
    if analysis.f is None:
        raise NotComputableError("the distances from the level medians do not vary within any level")
    tail = variance_ratio_tail(analysis)
    return EqualVariancesCheck(analysis.f, (analysis.df_between, analysis.df_within), tail)


def _distances_from_median(values: Sequence[Decimal10]) -> ExactSums:
    # In units of half the finest decimal place the median and every distance are whole numbers; F does not
    # depend on the unit.
    exponent = min(value.exponent for value in values)
    doubled = sorted(2 * value.mantissa * 10 ** (value.exponent - exponent) for value in values)
    middle = len(doubled) // 2
    median = doubled[middle] if len(doubled) % 2 else (doubled[middle - 1] + doubled[middle]) // 2
    return ExactSums.of(Decimal10(5 * abs(value - median), exponent - 1) for value in doubled)


def residuals(groups: Sequence[tuple[str, Sequence[Decimal10]]]) -> tuple[float, ...]:
    """Each value minus the exact mean of its level, rounded once; in the order of `groups`."""
    out: list[float] = []
    for _, values in groups:
        sums = ExactSums.of(values)
        unit = Fraction(10) ** sums.exponent / sums.n
        for value in values:
            steps = value.mantissa * 10 ** (value.exponent - sums.exponent) * sums.n - sums.total
            out.append(steps * unit.numerator / unit.denominator)  # integers: rounded once, correctly
    return tuple(out)


def shapiro_wilk(values: Sequence[float]) -> NormalityCheck:
    """The Shapiro-Wilk test of normality, for 3 to 5,000 values.

    Null hypothesis: the values come from one normal distribution. Computed by scipy (Royston 1995, AS R94);
    implementations agree to about three digits of p.
    Raises NotComputableError outside those limits and where all values are equal.
    """
    low, high = SHAPIRO_WILK_LIMITS
    if not low <= len(values) <= high:
        raise NotComputableError(
            f"the Shapiro-Wilk test is defined for {low} to {high:,} values; here are {len(values):,}"
        )
    if min(values) == max(values):
        raise NotComputableError("all residuals are equal")
    from scipy.stats import shapiro  # slow to load, so only where asked for

    # The algorithm takes a range below 1e-19 for no range at all, whatever the unit; W does not depend on the
    # unit, and a power of two changes no digit. It also starts from a value in the middle of the list, so the
    # last digit of p would follow the order of the rows.
    _, power = frexp(max(values) - min(values))
    scaled = [ldexp(value, -power) for value in sorted(values)]
    result = shapiro(np.asarray(scaled, dtype=np.float64))
    return NormalityCheck(float(result.statistic), float(result.pvalue))
