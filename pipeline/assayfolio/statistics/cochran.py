"""Cochran's test of the largest variance, for equal and unequal numbers of values.

The statistic is the share of one level in SS within. With equal n it is Cochran's C, the largest variance
divided by the sum of the variances (Cochran 1941, Ann. Eugen. 11, 47). With unequal n the share of each level
is held against the distribution of its own degrees of freedom, and the level with the smallest tail is the
one tested ('t Lam 2010, Anal. Chim. Acta 659, 68; both from memory).

Under equal variances and normality the share G of a level with df degrees of freedom of `total` in all
corresponds to F = (G / df) / ((1 - G) / (total - df)) on (df, total - df). Times the number of levels its
tail is a bound by Bonferroni's inequality: never too small, and for equal n exact where G > 1/2, since only
one level can have more than half.
"""

from dataclasses import dataclass
from fractions import Fraction
from math import log10

from assayfolio.exact import to_double
from assayfolio.statistics.adjustment import Tail
from assayfolio.statistics.oneway import LevelSummary, NotComputableError, OneWay
from assayfolio.statistics.tails import f_isf, f_log10_sf, f_sf


@dataclass(frozen=True, slots=True)
class CochranCheck:
    """The level tested, its share in SS within, (its own df, those of the rest), and the bound on the tail.

    `levels` is the number of levels with a variance.
    """

    level: str
    share: Fraction
    df: tuple[int, int]
    bound: Tail
    levels: int


def cochran_variances(analysis: OneWay) -> CochranCheck:
    """Cochran's test that no level has a larger variance than the others.

    Levels with one value have no variance and take no part. Among equals the first level is named.
    Raises NotComputableError where fewer than two levels have a variance, or fewer than two levels vary.
    """
    levels = _with_variance(analysis)
    if sum(bool(level.ss) for level in levels) < 2:
        raise NotComputableError("fewer than two levels vary, so there is nothing to compare")
    checks = [_share(analysis, level, len(levels)) for level in levels]
    return min(checks, key=lambda check: (check.bound.log10_p, -check.share))


def largest_variance_share(analysis: OneWay) -> tuple[str, Fraction]:
    """The level with the largest variance, and that variance divided by the sum of all: Cochran's C.

    A description for unequal n, where the test goes by `cochran_variances`.
    Raises NotComputableError where fewer than two levels have a variance, or nothing varies.
    """
    levels = _with_variance(analysis)
    if not analysis.ss_within:
        raise NotComputableError("nothing varies within the levels")
    variances = {level.level: level.ss / (level.n - 1) for level in levels}
    largest = max(variances, key=variances.__getitem__)
    return largest, variances[largest] / sum(variances.values())


def cochran_limit(alpha: float, levels: int, df: int, df_rest: int) -> float:
    """The share that a level on `df` of `df + df_rest` degrees of freedom exceeds with tail alpha / levels.

    1 / (1 + (df_rest / df) / F), F the upper alpha / levels point of F on (df, df_rest).
    """
    return 1 / (1 + df_rest / df / float(f_isf(alpha / levels, df, df_rest)))


def _with_variance(analysis: OneWay) -> list[LevelSummary]:
    levels = [level for level in analysis.levels if level.n > 1]
    if len(levels) < 2:
        raise NotComputableError("fewer than two levels have more than one value")
    return levels


def _share(analysis: OneWay, level: LevelSummary, levels: int) -> CochranCheck:
    share = level.ss / analysis.ss_within
    df, rest = level.n - 1, analysis.df_within - level.n + 1
    f = to_double(share / df / ((1 - share) / rest))
    bound = Tail(
        min(1.0, levels * float(f_sf(f, df, rest))),
        min(0.0, log10(levels) + float(f_log10_sf(f, df, rest))),
    )
    return CochranCheck(level.level, share, (df, rest), bound, levels)
