"""Checks of what the analysis assumes. They inform; they never choose the analysis."""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction

import numpy as np

from assayfolio.exact import Decimal10, ExactSums, to_double
from assayfolio.statistics.adjustment import Tail
from assayfolio.statistics.oneway import NotComputableError, one_way
from assayfolio.statistics.tails import f_log10_sf, f_sf

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
    f, df1, df2 = to_double(analysis.f), analysis.df_between, analysis.df_within
    tail = Tail(float(f_sf(f, df1, df2)), float(f_log10_sf(f, df1, df2)))
    return EqualVariancesCheck(analysis.f, (df1, df2), tail)


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
        mean = sums.sum / sums.n
        out.extend(to_double(value.fraction - mean) for value in values)
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

    result = shapiro(np.asarray(values, dtype=np.float64))
    return NormalityCheck(float(result.statistic), float(result.pvalue))
