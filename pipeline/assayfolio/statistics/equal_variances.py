"""Tests of equal variances. They inform; they never choose the analysis."""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from math import fsum, lcm, log

import numpy as np

from assayfolio.exact import Decimal10, ExactSums, in_one_unit, to_double
from assayfolio.statistics.adjustment import Tail
from assayfolio.statistics.deviance import excess
from assayfolio.statistics.inference import variance_ratio_tail
from assayfolio.statistics.oneway import NotComputableError, OneWay, one_way
from assayfolio.statistics.tails import chi2_log10_sf, chi2_sf


@dataclass(frozen=True, slots=True)
class EqualVariancesCheck:
    """A test of equal variances that is an F test: exact statistic, degrees of freedom, tail."""

    f: Fraction
    df: tuple[int, int]
    tail: Tail


@dataclass(frozen=True, slots=True)
class BartlettCheck:
    """Bartlett's test: the corrected statistic, the correction it was divided by, degrees of freedom, tail.

    `left_out` names the levels with one value, which have no variance.
    """

    statistic: float
    correction: Fraction
    df: int
    tail: Tail
    left_out: tuple[str, ...]


def brown_forsythe_variances(groups: Sequence[tuple[str, Sequence[Decimal10]]]) -> EqualVariancesCheck:
    """The Brown-Forsythe test of equal variances: one-way F of the distances from each level's median.

    Null hypothesis: all levels have the same variance. The median of an even number of values is the mean of
    the middle two. The statistic is exact. Source: Brown and Forsythe 1974, J. Am. Stat. Assoc. 69, 364 (from
    memory). Not the test of means by the same authors.
    Raises NotComputableError where the distances do not vary within any level.
    """
    return _f_of_distances([(level, _distances_from_median(values)) for level, values in groups], "medians")


def levene_variances(groups: Sequence[tuple[str, Sequence[Decimal10]]]) -> EqualVariancesCheck:
    """Levene's test of equal variances: one-way F of the distances from each level's mean.

    Null hypothesis: all levels have the same variance. The statistic is exact. More easily misled by skewed
    values than the form with the median. Source: Levene 1960, in Contributions to Probability and Statistics,
    Stanford, 278 (from memory).
    Raises NotComputableError where the distances do not vary within any level.
    """
    common = lcm(*(max(1, len(values)) for _, values in groups))
    return _f_of_distances(
        [(level, _distances_from_mean(values, common)) for level, values in groups], "means"
    )


def _f_of_distances(distances: Sequence[tuple[str, ExactSums]], centres: str) -> EqualVariancesCheck:
    analysis = one_way(distances)
    if analysis.f is None:
        raise NotComputableError(f"the distances from the level {centres} do not vary within any level")
    tail = variance_ratio_tail(analysis)
    return EqualVariancesCheck(analysis.f, (analysis.df_between, analysis.df_within), tail)


def _distances_from_median(values: Sequence[Decimal10]) -> ExactSums:
    # In units of half the finest decimal place the median and every distance are whole numbers; F does not
    # depend on the unit.
    if not values:
        return ExactSums.of(())
    numbers, exponent, divisor = in_one_unit(values)
    doubled = sorted(2 * number for number in numbers)
    middle = len(doubled) // 2
    median = doubled[middle] if len(doubled) % 2 else (doubled[middle - 1] + doubled[middle]) // 2
    return ExactSums.of(Decimal10(5 * abs(value - median), exponent - 1, divisor) for value in doubled)


def _distances_from_mean(values: Sequence[Decimal10], common: int) -> ExactSums:
    # In units of 1/n of the finest decimal place every distance is a whole number; times common/n, all levels
    # count in the same unit, on which F does not depend.
    if not values:
        return ExactSums.of(())
    numbers, exponent, divisor = in_one_unit(values)
    n, total = len(numbers), sum(numbers)
    distances = [abs(n * number - total) for number in numbers]
    factor = common // n
    squares = sum(distance * distance for distance in distances)
    return ExactSums(n, factor * sum(distances), factor**2 * squares, exponent, divisor)


def bartlett_variances(analysis: OneWay) -> BartlettCheck:
    """Bartlett's test of equal variances: chi-square on k - 1 degrees of freedom.

    Null hypothesis: all levels have the same variance. The statistic is
    ((N - k) log s^2 - sum((n_i - 1) log s_i^2)) / C, where
    C = 1 + (sum(1 / (n_i - 1)) - 1 / (N - k)) / (3 (k - 1)); k counts the levels with more than one value.
    Leans on normality: it takes long tails for unequal variances. Formed from the exact variances as
    sum((n_i - 1) (u_i - log(1 + u_i))), u_i = s_i^2 / s^2 - 1, in which nothing cancels.
    Source: Bartlett 1937, Proc. R. Soc. A 160, 268 (from memory).
    Raises NotComputableError where fewer than two levels have a variance, or all values of a level are equal.
    """
    levels = [level for level in analysis.levels if level.n > 1]
    if len(levels) < 2:
        raise NotComputableError("fewer than two levels have more than one value")
    for level in levels:
        if not level.ss:
            raise NotComputableError(
                f"all values of level {level.level!r} are equal, and a variance of zero has no logarithm"
            )
    pooled = analysis.ms_within
    shares = [level.ss / (level.n - 1) / pooled for level in levels]
    u = np.array([to_double(share - 1) for share in shares])
    logs = np.array([_log(share) for share in shares])
    terms = (n * e for n, e in zip((level.n - 1 for level in levels), excess(u, logs).tolist(), strict=True))
    inverse = sum((Fraction(1, level.n - 1) for level in levels), Fraction(0))
    df = len(levels) - 1
    correction = 1 + (inverse - Fraction(1, analysis.df_within)) / (3 * df)
    statistic = fsum(terms) / to_double(correction)
    tail = Tail(float(chi2_sf(statistic, df)), float(chi2_log10_sf(statistic, df)))
    left_out = tuple(level.level for level in analysis.levels if level.n == 1)
    return BartlettCheck(statistic, correction, df, tail, left_out)


def _log(value: Fraction) -> float:
    # The power of two goes by itself, for the value may be beyond the range of doubles.
    power = value.numerator.bit_length() - value.denominator.bit_length()
    return log(to_double(value / Fraction(2) ** power)) + power * log(2)
