"""Equivalence and non-inferiority with margins in percent of the reference mean.

"X lies within lower % and upper % of R" is shown by two one-sided tests on linear combinations of the means,
mean(X) - (1 + lower/100) mean(R) above zero and mean(X) - (1 + upper/100) mean(R) below it, each divided by
its standard error; the reference mean is estimated, so its error counts (Sasabuchi 1980, Biometrika 67, 429;
Hauschke, Kieser and Hothorn 1999, Biom. J. 41, 573 for the two tests; from memory). The interval that goes
with them is Fieller's for the ratio of the means, less one, in percent, at 1 - 2 alpha.

A negative reference mean turns both tests round, for a percentage is then counted away from zero: -11 is 10 %
above -10. A reference mean that cannot be told from zero is refused.
"""

from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction

from assayfolio.exact import round_significant, to_double
from assayfolio.statistics.comparisons import require_error_term
from assayfolio.statistics.equivalence import (
    Boundary,
    EquivalenceResult,
    Margins,
    Pairs,
    Row,
    interval_level,
    levels_of,
    mean_variances,
    satterthwaite,
    tested,
)
from assayfolio.statistics.oneway import LevelSummary, OneWay
from assayfolio.statistics.ratio_interval import (
    MeanRatio,
    fieller_distances,
    fieller_distances_separate,
)
from assayfolio.statistics.tails import t_isf


def equivalence_percent_pooled(
    analysis: OneWay, pairs: Pairs, margins: Margins, alpha: float, adjust: str
) -> tuple[EquivalenceResult, ...]:
    """One row for each (X, R) of `pairs`, `margins` in percent of mean(R): t on N - k degrees of freedom.

    The estimate is 100 (mean(X) / mean(R) - 1), `se` and `df` of the row are None; statistic and degrees of
    freedom of each test stand with it. Levels, adjustment and intervals as in `equivalence_pooled`.
    Raises NotComputableError where nothing varies within the levels, or a reference mean cannot be told from
    zero at the level of the interval; KeyError and ValueError as `equivalence_pooled`.
    """
    level = interval_level(alpha, adjust, len(pairs))
    require_error_term(analysis)
    variance, df = analysis.ms_within, analysis.df_within
    t = float(t_isf(level, df))
    rows = []
    for x, r in levels_of(analysis, pairs):
        means = MeanRatio(x.mean, r.mean, variance / x.n, variance / r.n)
        rows.append(_row(x, r, means, margins, fieller_distances(means, t), lambda _: df))
    return tested(rows, adjust, 0)


def equivalence_percent_separate(
    analysis: OneWay, pairs: Pairs, margins: Margins, alpha: float, adjust: str, missing: int = 0
) -> tuple[EquivalenceResult, ...]:
    """As `equivalence_percent_pooled` with separate variances: only the two levels of a row enter it.

    Each test has the degrees of freedom of Welch and Satterthwaite for its own linear combination, and at
    each limit of the interval the test of that ratio has p = alpha, so interval and tests agree. `missing` as
    in `equivalence_separate`.
    Raises NotComputableError also where a level has one value or does not vary, or the ratios that are not
    rejected form no interval (a few values, far from normal use).
    """
    level = interval_level(alpha, adjust, len(pairs) + missing)
    rows = []
    for x, r in levels_of(analysis, pairs):
        means = MeanRatio(x.mean, r.mean, *mean_variances(x, r))
        distances = fieller_distances_separate(means, x.n - 1, r.n - 1, level)
        df = _Satterthwaite(means, x.n - 1, r.n - 1)
        rows.append(_row(x, r, means, margins, distances, df))
    return tested(rows, adjust, missing)


@dataclass(frozen=True, slots=True)
class _Satterthwaite:
    means: MeanRatio
    df_x: int
    df_r: int

    def __call__(self, ratio: Fraction) -> float:
        return satterthwaite((self.means.v_x, self.df_x), (ratio**2 * self.means.v_r, self.df_r))


def _row(
    x: LevelSummary,
    r: LevelSummary,
    means: MeanRatio,
    margins: Margins,
    distances: tuple[float, float],
    df_at: Callable[[Fraction], int | float],
) -> Row:
    estimate = 100 * (means.x / means.r - 1)
    lower, upper = margins.lower, margins.upper
    return Row(
        f"{x.level} - {r.level}",
        estimate,
        None,
        None,
        (
            None if lower is None else _end(estimate, distances[0]),
            None if upper is None else _end(estimate, distances[1]),
        ),
        None if lower is None else _boundary(means, lower, df_at),
        None if upper is None else _boundary(means, upper, df_at),
        None,
    )


def _end(estimate: Fraction, distance: float) -> float:
    # Rounding the distance, not the end, keeps its digits where the estimate is large beside it.
    return to_double(estimate + Fraction(round_significant(100 * distance)))


def _boundary(means: MeanRatio, percent: Fraction, df_at: Callable[[Fraction], int | float]) -> Boundary:
    ratio = 1 + percent / 100
    excess = means.x - ratio * means.r
    square = means.v_x + ratio**2 * means.v_r
    return Boundary(percent, excess if means.r > 0 else -excess, square, df_at(ratio))
