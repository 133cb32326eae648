"""Comparisons of level means with separate variances: each level has its own, none is pooled.

The standard error of a comparison is sqrt(sum(v_i)) with v_i = c_i^2 s_i^2 / n_i, on the degrees of freedom
of Welch and Satterthwaite, (sum v_i)^2 / sum(v_i^2 / (n_i - 1)), a real number between the smallest n_i - 1
and the sum of them (Satterthwaite 1946, Biometrics Bull. 2, 110; Welch 1947, Biometrika 34, 28; from memory).
Standard errors, statistics and degrees of freedom are exact, the latter then rounded to a double. Student's t
on these degrees of freedom is an approximation.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from math import sqrt

import numpy as np

from assayfolio.exact import Root, to_double
from assayfolio.statistics.adjustment import INTERVAL_LEVELS, Tail, adjusted_beside_missing
from assayfolio.statistics.comparisons import (
    TWO_SIDED,
    ComparisonResult,
    directed,
    doubles,
    interval_about,
    signed_root,
    tails_from_logs,
)
from assayfolio.statistics.distributions import studentized_range_isf, studentized_range_log10_sf
from assayfolio.statistics.estimates import Estimate
from assayfolio.statistics.oneway import LevelSummary, NotComputableError, OneWay, without_variance
from assayfolio.statistics.points_by_df import points_by_df
from assayfolio.statistics.simultaneous import require_computed_range
from assayfolio.statistics.tails import t_isf, t_log10_sf, t_two_sided_log10


def compare_separate(
    estimates: Sequence[Estimate], adjust: str, alternative: str, alpha: float, missing: int = 0
) -> tuple[ComparisonResult, ...]:
    """The comparisons of one family by Welch's t with separate variances, adjusted by `adjust`.

    `adjust` is none, bonferroni, sidak, holm or hochberg, `alternative` two-sided, greater or less, both as
    in `compare`. Each row has its own degrees of freedom, in its tail and in its interval. `missing` is the
    number of rows of the family that cannot be given: they count as p = 1.
    Raises NotComputableError where a level has one value only or does not vary (see `without_variance`);
    KeyError for another adjustment.
    """
    errors = _errors(estimates)
    tails = _t_tails(errors, alternative)
    adjusted = adjusted_beside_missing(adjust, tails, missing)
    multipliers: Sequence[float | None] = [None] * len(errors)
    if adjust in INTERVAL_LEVELS:
        level = INTERVAL_LEVELS[adjust](alpha, len(errors) + missing) / (2 if alternative == TWO_SIDED else 1)
        multipliers = points_by_df(lambda df: t_isf(level, df), [one.df for one in errors])
    return _results(estimates, errors, tails, adjusted, multipliers, alternative)


def compare_games_howell(
    analysis: OneWay, estimates: Sequence[Estimate], alpha: float
) -> tuple[ComparisonResult, ...]:
    """Pairs by the procedure of Games and Howell: the studentized range of k means, separate variances.

    The statistic stays Welch's t; the range statistic is q = |t| * sqrt(2), referred to the studentized range
    of k means on the pair's own Welch-Satterthwaite degrees of freedom. k is the number of levels, whatever
    `estimates` holds. Approximate, and somewhat liberal where n is small (Games and Howell 1976, J. Educ.
    Stat. 1, 113; from memory). For two levels it is Welch's t test.
    Raises NotComputableError where a level has one value only or does not vary, and for more than 200 levels.
    """
    k = analysis.k
    require_computed_range(k)
    if k == 2:
        return compare_separate(estimates, "none", TWO_SIDED, alpha)
    errors = _errors(estimates)
    dfs = [one.df for one in errors]
    q = doubles([Root.of(2 * one.statistic.square) for one in errors]).tolist()
    logs = [studentized_range_log10_sf(one, k, df) for one, df in zip(q, dfs, strict=True)]
    multipliers = points_by_df(lambda df: studentized_range_isf(alpha, k, df) / sqrt(2), dfs)
    adjusted = tails_from_logs(np.array(logs))
    return _results(estimates, errors, _t_tails(errors, TWO_SIDED), adjusted, multipliers, TWO_SIDED)


@dataclass(frozen=True, slots=True)
class _Error:
    """The standard error of a comparison, its degrees of freedom, and the estimate over the error."""

    se: Root
    df: float
    statistic: Root


def _errors(estimates: Sequence[Estimate]) -> list[_Error]:
    of_levels = {level.level: level for one in estimates for level, _ in one.weights}
    variances = {name: _variance_of_mean(level) for name, level in of_levels.items()}
    return [_error(estimate, variances) for estimate in estimates]


def _variance_of_mean(level: LevelSummary) -> Fraction:
    reason = without_variance([level])
    if reason is not None:
        raise NotComputableError(reason)
    return level.ss / ((level.n - 1) * level.n)


def _error(estimate: Estimate, variances: dict[str, Fraction]) -> _Error:
    parts = [(weight * weight * variances[level.level], level.n - 1) for level, weight in estimate.weights]
    square = sum((part for part, _ in parts), Fraction(0))
    spread = sum((part * part / df for part, df in parts), Fraction(0))
    statistic = signed_root(estimate.value, estimate.value**2 / square)
    return _Error(Root.of(square), to_double(square * square / spread), statistic)


def _t_tails(errors: Sequence[_Error], alternative: str) -> tuple[Tail, ...]:
    towards = directed(doubles([one.statistic for one in errors]), alternative).tolist()
    log10_tail = t_two_sided_log10 if alternative == TWO_SIDED else t_log10_sf
    return tails_from_logs(np.array([log10_tail(t, one.df) for t, one in zip(towards, errors, strict=True)]))


def _results(
    estimates: Sequence[Estimate],
    errors: Sequence[_Error],
    tails: Sequence[Tail],
    adjusted: Sequence[Tail],
    multipliers: Sequence[float | None],
    alternative: str,
) -> tuple[ComparisonResult, ...]:
    rows = []
    for at, (estimate, error) in enumerate(zip(estimates, errors, strict=True)):
        interval = interval_about(estimate.value, error.se, multipliers[at], alternative)
        rows.append(
            ComparisonResult(
                label=estimate.label,
                estimate=estimate.value,
                se=error.se,
                df=error.df,
                statistic=error.statistic,
                tail=tails[at],
                adjusted=adjusted[at],
                interval=interval,
                critical=multipliers[at],
            )
        )
    return tuple(rows)
