"""Tests of equal means, and intervals for means, that do not pool the variances of the levels.

With s_i^2 the variance of level i on n_i - 1 degrees of freedom. F statistics and their degrees of freedom
are exact. Two tests bear the names of Brown and Forsythe: the one of means is here, the one of variances in
`checks`.
"""

from collections.abc import Iterable
from dataclasses import dataclass
from fractions import Fraction

from assayfolio.exact import Root, to_double
from assayfolio.statistics.adjustment import Tail
from assayfolio.statistics.comparisons import centred_interval
from assayfolio.statistics.f_tails import f_tails
from assayfolio.statistics.oneway import LevelSummary, NotComputableError, OneWay, without_variance
from assayfolio.statistics.tails import f_isf, t_isf


@dataclass(frozen=True, slots=True)
class WelchTest:
    """Welch's test of equal means: exact F, its degrees of freedom, the tail, the critical F at alpha."""

    f: Fraction
    df1: int
    df2: Fraction
    tail: Tail
    f_critical: float


@dataclass(frozen=True, slots=True)
class BrownForsytheMeans:
    """The Brown-Forsythe test of equal means, F*, with both choices of the numerator degrees of freedom.

    `tail` is that on `df1` = k - 1 as published, `tail_mehrotra` that on `df1_mehrotra`.
    """

    f: Fraction
    df1: int
    df2: Fraction
    tail: Tail
    df1_mehrotra: Fraction
    tail_mehrotra: Tail


def welch_test(analysis: OneWay, alpha: float) -> WelchTest:
    """Welch's test of "all k level means are equal" with separate variances, at level `alpha`.

    With w_i = n_i / s_i^2, W = sum(w_i), the weighted mean m = sum(w_i mean_i) / W and
    L = sum((1 - w_i / W)^2 / (n_i - 1)),

        F = sum(w_i (mean_i - m)^2) / (k - 1) / (1 + 2 (k - 2) L / (k^2 - 1))

    is referred to F on k - 1 and (k^2 - 1) / (3 L) degrees of freedom (Welch 1951, Biometrika 38, 330; from
    memory). An approximation; for two levels it is Welch's t test, F = t^2.
    Raises NotComputableError, naming the levels, where a level has one value or does not vary; and where F is
    beyond the range of doubles.
    """
    variances = _variances(analysis)
    k = analysis.k
    by_level = [(level.n / square, level) for level, square in zip(analysis.levels, variances, strict=True)]
    total = _sum(w for w, _ in by_level)
    centre = _sum(w * level.mean for w, level in by_level) / total
    between = _sum(w * (level.mean - centre) ** 2 for w, level in by_level) / (k - 1)
    lack = _sum((1 - w / total) ** 2 / (level.n - 1) for w, level in by_level)
    f = between / (1 + Fraction(2 * (k - 2), k * k - 1) * lack)
    df1, df2 = k - 1, (k * k - 1) / (3 * lack)
    (tail,) = f_tails([f], df1, to_double(df2))
    return WelchTest(f, df1, df2, tail, float(f_isf(alpha, df1, to_double(df2))))


def brown_forsythe_means(analysis: OneWay) -> BrownForsytheMeans:
    """The Brown-Forsythe test of "all k level means are equal" with separate variances.

    With f_i = n_i / N and c_i = (1 - f_i) s_i^2,

        F* = SS between / sum(c_i)
        df2 = (sum c_i)^2 / sum(c_i^2 / (n_i - 1))
        df1 = k - 1, or after Mehrotra
              (sum c_i)^2 / (sum s_i^4 + (sum f_i s_i^2)^2 - 2 sum f_i s_i^4)

    Sources: Brown and Forsythe 1974, Technometrics 16, 129; Mehrotra 1997, Commun. Stat. Simul. 26, 1139
    (both from memory), the latter since on k - 1 the test can be liberal. Approximations; for two levels both
    are Welch's t test. Not the test of variances by the same authors.
    Raises NotComputableError, naming the levels, where a level has one value or does not vary; and where F*
    is beyond the range of doubles.
    """
    variances = _variances(analysis)
    by_level = [
        (level.n - 1, Fraction(level.n, analysis.n_total), square)
        for level, square in zip(analysis.levels, variances, strict=True)
    ]
    total = _sum((1 - share) * square for _, share, square in by_level)
    spread = _sum(((1 - share) * square) ** 2 / df for df, share, square in by_level)
    weighted = _sum(share * square for _, share, square in by_level)
    fourth = _sum((1 - 2 * share) * square**2 for _, share, square in by_level)
    f, df1, df2 = analysis.ss_between / total, analysis.df_between, total**2 / spread
    df1_mehrotra = total**2 / (fourth + weighted**2)
    (tail,) = f_tails([f], df1, to_double(df2))
    (tail_mehrotra,) = f_tails([f], to_double(df1_mehrotra), to_double(df2))
    return BrownForsytheMeans(f, df1, df2, tail, df1_mehrotra, tail_mehrotra)


def separate_mean_interval(level: LevelSummary, alpha: float) -> tuple[float, float] | None:
    """The 1 - alpha interval for one level's mean from its own spread: mean -+ t(n_i - 1) s_i / sqrt(n_i).

    None where n_i = 1 or all values of the level are equal.
    """
    if level.n < 2 or not level.ss:
        return None
    se = Root.of(level.ss / ((level.n - 1) * level.n))
    return centred_interval(level.mean, float(t_isf(alpha / 2, level.n - 1)) * to_double(se))


def _variances(analysis: OneWay) -> list[Fraction]:
    reason = without_variance(analysis.levels)
    if reason is not None:
        raise NotComputableError(reason)
    return [level.ss / (level.n - 1) for level in analysis.levels]


def _sum(terms: Iterable[Fraction]) -> Fraction:
    return sum(terms, Fraction(0))
