"""Tests and intervals that go with the analysis of variance: the F test, intervals for means and spreads.

The error term is pooled: s^2 = MS within on N - k degrees of freedom for every mean, for equal and unequal n.
"""

from dataclasses import dataclass
from functools import lru_cache
from math import sqrt

from assayfolio.exact import Root, round_significant, to_double
from assayfolio.statistics.adjustment import Tail
from assayfolio.statistics.comparisons import centred_interval
from assayfolio.statistics.oneway import LevelSummary, NotComputableError, OneWay
from assayfolio.statistics.tails import chi2_isf, chi2_ppf, f_isf, f_log10_sf, f_sf, t_isf


@dataclass(frozen=True, slots=True)
class OmnibusTest:
    """The F test of equal means: its tail and the critical value at alpha."""

    tail: Tail
    f_critical: float


def omnibus_test(analysis: OneWay, alpha: float) -> OmnibusTest:
    """The F test of "all k level means are equal" at level `alpha`.

    Assumes independent values, normally distributed within each level with one common variance.
    Raises NotComputableError where nothing varies within the levels, or F is beyond the range of doubles.
    """
    df1, df2 = analysis.df_between, analysis.df_within
    return OmnibusTest(variance_ratio_tail(analysis), float(f_isf(alpha, df1, df2)))


def variance_ratio_tail(analysis: OneWay) -> Tail:
    """The probability of a variance ratio of at least `analysis.f` where all true means are equal.

    Raises NotComputableError where nothing varies within the levels, or F is beyond the range of doubles.
    """
    if analysis.f is None:
        raise NotComputableError("nothing varies within the levels, so F is not defined")
    try:
        f = to_double(analysis.f)
    except OverflowError:
        raise NotComputableError("the values differ by more than 150 powers of ten") from None
    df1, df2 = analysis.df_between, analysis.df_within
    return Tail(float(f_sf(f, df1, df2)), float(f_log10_sf(f, df1, df2)))


def mean_interval(analysis: OneWay, level: LevelSummary, alpha: float) -> tuple[float, float]:
    """The 1 - alpha interval for one level's mean: mean -+ t(N - k) * s / sqrt(n_i), s pooled."""
    t = _t_point(alpha / 2, analysis.df_within)
    se = Root.of(analysis.ms_within / level.n)
    return centred_interval(level.mean, t * to_double(se))


def sd_interval(level: LevelSummary, alpha: float) -> tuple[float, float] | None:
    """The 1 - alpha chi-square interval for one level's own standard deviation, n_i - 1 degrees of freedom.

    None where n_i = 1 or all values of the level are equal.
    """
    if level.n < 2 or not level.ss:
        return None
    ss = to_double(level.ss)
    upper_point, lower_point = _chi2_points(alpha / 2, level.n - 1)
    return round_significant(sqrt(ss / upper_point)), round_significant(sqrt(ss / lower_point))


# The levels of a study share their points, which are roots of equations and cost a millisecond each.
@lru_cache(maxsize=256)
def _t_point(tail: float, df: int) -> float:
    return float(t_isf(tail, df))


@lru_cache(maxsize=256)
def _chi2_points(tail: float, df: int) -> tuple[float, float]:
    return float(chi2_isf(tail, df)), float(chi2_ppf(tail, df))
