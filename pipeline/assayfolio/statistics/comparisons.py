"""Comparisons of level means with the pooled error: pairs, differences from a reference, contrasts.

A comparison is a weighted sum of means, L = sum(c_i * mean_i) with sum(c_i) = 0. With the pooled variance
s^2 = MS within on N - k degrees of freedom its standard error is s * sqrt(sum(c_i^2 / n_i)), and L divided by
it follows Student's t where the true value is zero, for equal and unequal n. Estimates, standard errors and
statistics are exact; tails and quantiles are doubles.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from fractions import Fraction
from itertools import combinations
from math import sqrt

import numpy as np

from assayfolio.exact import Root, round_significant, to_double
from assayfolio.statistics.adjustment import P_ADJUSTMENTS, Tail, bonferroni_level, sidak_level
from assayfolio.statistics.distributions import (
    MOST_MEANS,
    studentized_range_isf,
    studentized_range_log10_sf,
    studentized_range_sf,
)
from assayfolio.statistics.oneway import NotComputableError, OneWay
from assayfolio.statistics.tails import t_isf, t_log10_sf, t_sf, t_two_sided, t_two_sided_log10

TWO_SIDED, GREATER, LESS = "two-sided", "greater", "less"


@dataclass(frozen=True, slots=True)
class Estimate:
    """A comparison before inference: its label, its value, and sum(c_i^2 / n_i)."""

    label: str
    value: Fraction
    variance_factor: Fraction


@dataclass(frozen=True, slots=True)
class ComparisonResult:
    """A comparison with the pooled error.

    `tail` is the unadjusted, `adjusted` the adjusted p-value. `interval` is simultaneous over the family at
    1 - alpha; an end is None where the alternative leaves it open, and the interval is None where the method
    has none.
    """

    label: str
    estimate: Fraction
    se: Root
    df: int
    statistic: Root
    tail: Tail
    adjusted: Tail
    interval: tuple[float | None, float | None] | None


def pair_estimates(analysis: OneWay) -> tuple[Estimate, ...]:
    """Every pair of levels, "A - B" with A before B in the order of the levels."""
    return tuple(
        Estimate(f"{a.level} - {b.level}", a.mean - b.mean, Fraction(1, a.n) + Fraction(1, b.n))
        for a, b in combinations(analysis.levels, 2)
    )


def reference_estimates(analysis: OneWay, reference: str) -> tuple[Estimate, ...]:
    """Every other level minus the reference, in the order of the levels."""
    r = analysis.summary_of(reference)
    return tuple(
        Estimate(f"{x.level} - {r.level}", x.mean - r.mean, Fraction(1, x.n) + Fraction(1, r.n))
        for x in analysis.levels
        if x.level != reference
    )


def contrast_estimate(analysis: OneWay, label: str, weights: Mapping[str, Fraction]) -> Estimate:
    """The contrast with these weights; levels that are not named have weight zero.

    Raises ValueError where the weights do not sum to zero or are all zero.
    """
    if sum(weights.values()) != 0:
        raise ValueError("the weights of a contrast sum to zero")
    if not any(weights.values()):
        raise ValueError("a contrast has at least two weights that are not zero")
    summaries = [(analysis.summary_of(level), weight) for level, weight in weights.items()]
    return Estimate(
        label,
        sum((weight * level.mean for level, weight in summaries), Fraction(0)),
        sum((Fraction(weight) ** 2 / level.n for level, weight in summaries), Fraction(0)),
    )


def compare(
    analysis: OneWay, estimates: Sequence[Estimate], adjust: str, alternative: str, alpha: float
) -> tuple[ComparisonResult, ...]:
    """The comparisons of one family with t tails, adjusted by `adjust`.

    `adjust` is none, bonferroni, sidak or holm; Holm's procedure has no simultaneous interval. `alternative`
    is two-sided, greater or less: what the test shows about the estimate against zero.
    Raises NotComputableError where nothing varies within the levels, KeyError for another adjustment.
    """
    _require_error_term(analysis)
    statistics = _statistics(analysis, estimates)
    tails = _t_tails(statistics, analysis.df_within, alternative)
    adjusted = P_ADJUSTMENTS[adjust](tails)
    multiplier = _t_multiplier(adjust, alternative, alpha, len(estimates), analysis.df_within)
    return _results(analysis, estimates, statistics, tails, adjusted, multiplier, alternative)


def compare_tukey_kramer(
    analysis: OneWay, estimates: Sequence[Estimate], alpha: float
) -> tuple[ComparisonResult, ...]:
    """All pairs by the Tukey-Kramer procedure: tails of the studentised range of k means.

    k is the number of levels, whatever `estimates` holds. The statistic stays t; the range statistic is
    q = |t| * sqrt(2). Exact for equal n, conservative for unequal n (Hayter 1984, Ann. Stat. 12, 61; Kramer
    1956, Biometrics 12, 307; from memory). For two levels it is the t test.
    Raises NotComputableError where nothing varies within the levels, and for more than 200 levels.
    """
    _require_error_term(analysis)
    df, k = analysis.df_within, analysis.k
    if k > MOST_MEANS:
        raise NotComputableError(
            f"the studentized range is computed for up to {MOST_MEANS} levels; here are {k:,}"
        )
    if k == 2:
        return compare(analysis, estimates, "none", TWO_SIDED, alpha)
    statistics = _statistics(analysis, estimates)
    tails = _t_tails(statistics, df, TWO_SIDED)
    q = np.array([to_double(Root.of(2 * statistic.square)) for statistic in statistics])
    p, log10_p = studentized_range_sf(q, k, df), studentized_range_log10_sf(q, k, df)
    adjusted = tuple(Tail(float(a), float(b)) for a, b in zip(p, log10_p, strict=True))
    multiplier = float(studentized_range_isf(alpha, k, df)) / sqrt(2)
    return _results(analysis, estimates, statistics, tails, adjusted, multiplier, TWO_SIDED)


def _require_error_term(analysis: OneWay) -> None:
    if not analysis.ss_within:
        raise NotComputableError("nothing varies within the levels, so there is no error to compare with")


def _statistics(analysis: OneWay, estimates: Sequence[Estimate]) -> list[Root]:
    variance = analysis.ms_within
    return [
        Root((one.value > 0) - (one.value < 0), one.value**2 / (variance * one.variance_factor))
        for one in estimates
    ]


def _t_tails(statistics: Sequence[Root], df: int, alternative: str) -> tuple[Tail, ...]:
    t = np.array([to_double(statistic) for statistic in statistics])
    if alternative == TWO_SIDED:
        p, log10_p = t_two_sided(t, df), t_two_sided_log10(t, df)
    else:
        directed = t if alternative == GREATER else -t
        p, log10_p = t_sf(directed, df), t_log10_sf(directed, df)
    return tuple(Tail(float(a), float(b)) for a, b in zip(p, log10_p, strict=True))


def _t_multiplier(adjust: str, alternative: str, alpha: float, size: int, df: int) -> float | None:
    levels = {"none": alpha, "bonferroni": bonferroni_level(alpha, size), "sidak": sidak_level(alpha, size)}
    if adjust not in levels:
        return None
    level = levels[adjust]
    return float(t_isf(level / 2 if alternative == TWO_SIDED else level, df))


def _results(
    analysis: OneWay,
    estimates: Sequence[Estimate],
    statistics: Sequence[Root],
    tails: Sequence[Tail],
    adjusted: Sequence[Tail],
    multiplier: float | None,
    alternative: str,
) -> tuple[ComparisonResult, ...]:
    results = []
    variance, df = analysis.ms_within, analysis.df_within
    for estimate, statistic, tail, after in zip(estimates, statistics, tails, adjusted, strict=True):
        se = Root.of(variance * estimate.variance_factor)
        interval = None
        if multiplier is not None:
            lower, upper = centred_interval(estimate.value, multiplier * to_double(se))
            interval = (
                None if alternative == LESS else lower,
                None if alternative == GREATER else upper,
            )
        results.append(
            ComparisonResult(estimate.label, estimate.value, se, df, statistic, tail, after, interval)
        )
    return tuple(results)


def centred_interval(centre: Fraction, half_width: float) -> tuple[float, float]:
    """`centre` minus and plus `half_width`, the half width rounded to 12 significant digits first.

    Rounding the half width, not the ends, keeps its digits where the centre is large beside it.
    """
    half = Fraction(round_significant(half_width))
    return to_double(centre - half), to_double(centre + half)
