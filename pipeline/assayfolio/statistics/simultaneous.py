"""All pairs by the studentized range, and any contrasts by the F distribution, with the pooled error.

Both hold for the whole family at once: every pair, or every contrast that could be formed. Each is two-sided
by its nature.
"""

from collections.abc import Sequence
from math import sqrt

from assayfolio.exact import Root
from assayfolio.statistics.comparisons import (
    TWO_SIDED,
    ComparisonResult,
    compare,
    doubles,
    pooled_results,
    pooled_statistics,
    require_error_term,
    t_tails,
    tails_from_logs,
)
from assayfolio.statistics.distributions import (
    MOST_MEANS,
    studentized_range_isf,
    studentized_range_log10_sf,
)
from assayfolio.statistics.estimates import Estimate
from assayfolio.statistics.f_tails import f_tails
from assayfolio.statistics.oneway import NotComputableError, OneWay
from assayfolio.statistics.tails import f_isf


def compare_tukey_kramer(
    analysis: OneWay, estimates: Sequence[Estimate], alpha: float
) -> tuple[ComparisonResult, ...]:
    """All pairs by the Tukey-Kramer procedure: tails of the studentised range of k means.

    k is the number of levels, whatever `estimates` holds. The statistic stays t; the range statistic is
    q = |t| * sqrt(2). Exact for equal n, conservative for unequal n (Hayter 1984, Ann. Stat. 12, 61; Kramer
    1956, Biometrics 12, 307; from memory). For two levels it is the t test.
    Raises NotComputableError where nothing varies within the levels, and for more than 200 levels.
    """
    require_error_term(analysis)
    df, k = analysis.df_within, analysis.k
    require_computed_range(k)
    if k == 2:
        return compare(analysis, estimates, "none", TWO_SIDED, alpha)
    statistics = pooled_statistics(analysis, estimates)
    tails = t_tails(doubles(statistics), df, TWO_SIDED)
    q = doubles([Root.of(2 * statistic.square) for statistic in statistics])
    adjusted = tails_from_logs(studentized_range_log10_sf(q, k, df))
    multiplier = float(studentized_range_isf(alpha, k, df)) / sqrt(2)
    return pooled_results(analysis, estimates, statistics, tails, adjusted, multiplier, TWO_SIDED)


def require_computed_range(k: int) -> None:
    """Raises NotComputableError where the studentized range of `k` means is not computed."""
    if k > MOST_MEANS:
        raise NotComputableError(
            f"the studentized range is computed for up to {MOST_MEANS} levels; here are {k:,}"
        )


def compare_scheffe(
    analysis: OneWay, estimates: Sequence[Estimate], alpha: float
) -> tuple[ComparisonResult, ...]:
    """Contrasts by Scheffe's procedure: p = P(F >= t^2 / (k - 1)) for F on k - 1 and N - k.

    Intervals are the estimate -+ se * sqrt((k - 1) F(1 - alpha; k - 1, N - k)). The family is every contrast
    of the k means, those chosen after looking included, so its size does not enter; for few contrasts laid
    down beforehand it is wider than Bonferroni's. Exact for equal and unequal n (Scheffe 1953, Biometrika 40,
    87; from memory). For two levels it is the t test.
    Raises NotComputableError where nothing varies within the levels, or t^2 is beyond the range of doubles.
    """
    require_error_term(analysis)
    df1, df2 = analysis.df_between, analysis.df_within
    if df1 == 1:
        return compare(analysis, estimates, "none", TWO_SIDED, alpha)
    statistics = pooled_statistics(analysis, estimates)
    tails = t_tails(doubles(statistics), df2, TWO_SIDED)
    adjusted = f_tails([statistic.square / df1 for statistic in statistics], df1, df2)
    multiplier = sqrt(df1 * float(f_isf(alpha, df1, df2)))
    return pooled_results(analysis, estimates, statistics, tails, adjusted, multiplier, TWO_SIDED)
