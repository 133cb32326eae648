"""The precision of a measurement from a one-way layout: what one level repeats, and what the levels add.

The model is y_ij = mean + L_i + e_ij with the levels a random sample, variance s_L^2 between them and s_r^2
within. From the mean squares, with n0 = (N - sum n_i^2 / N) / (k - 1), which is n for equal n,

    s_r^2 = MS within        s_L^2 = (MS between - MS within) / n0        s_total^2 = s_r^2 + max(0, s_L^2)

All of these are exact. Sources: ISO 5725-2:1994, clause 7.4 (repeatability, between-laboratory and
reproducibility variance); NIST/SEMATECH e-Handbook 7.4.5; JCGM 100:2008 (GUM), H.5; all from memory. What the
total is called follows from what was varied between the levels: reproducibility only between laboratories.
"""

from dataclasses import dataclass
from fractions import Fraction
from math import sqrt
from typing import Final

from assayfolio.exact import Root, round_significant, to_double
from assayfolio.statistics.between_interval import between_sd_interval
from assayfolio.statistics.comparisons import centred_interval
from assayfolio.statistics.intraclass import icc_interval
from assayfolio.statistics.mean_squares import (
    Part,
    modified_large_sample_interval,
    satterthwaite_df,
    sd_interval_by_chi_square,
)
from assayfolio.statistics.oneway import OneWay
from assayfolio.statistics.tails import t_isf

LIMIT_FACTOR: Final = Fraction(14, 5)
"""ISO 5725-6:1994, clause 4.1: 1.96 times the square root of 2, rounded to 2.8 (from memory)."""

BETWEEN_LEVELS: Final = "between levels"
POOLED: Final = "pooled"

Interval = tuple[float, float]


@dataclass(frozen=True, slots=True)
class Repeatability:
    """The spread within the levels, pooled over them: `variance` = MS within on `df` = N - k.

    `interval` is the chi-square interval of the standard deviation, None where nothing varies within the
    levels. `limit` is the repeatability limit, 2.8 standard deviations: two single results differ by no more
    with a probability near 95 %. `relative_percent` is in percent of the absolute mean of all values, or, for
    a sample of levels, of the mean that is stated; None where that is zero.
    """

    variance: Fraction
    df: int
    interval: Interval | None
    relative_percent: Root | None

    @property
    def sd(self) -> Root:
        """The standard deviation."""
        return Root.of(self.variance)

    @property
    def limit(self) -> Root:
        """2.8 standard deviations."""
        return Root.of(LIMIT_FACTOR**2 * self.variance)


@dataclass(frozen=True, slots=True)
class BetweenLevels:
    """The spread that the levels add; where `raw_variance` comes out negative, it is stated as 0.

    `interval` is that of the standard deviation (see `between_interval`), None where all values are equal.
    """

    raw_variance: Fraction
    interval: Interval | None
    relative_percent: Root | None

    @property
    def truncated(self) -> bool:
        """Whether the estimate is negative and 0 is stated in its place."""
        return self.raw_variance < 0

    @property
    def variance(self) -> Fraction:
        """The estimate, or 0 where it is negative."""
        return max(Fraction(0), self.raw_variance)

    @property
    def sd(self) -> Root:
        """The standard deviation, 0 where the estimated variance is negative."""
        return Root.of(self.variance)


@dataclass(frozen=True, slots=True)
class Total:
    """The spread of single values at levels not yet seen: `variance` = s_r^2 + max(0, s_L^2).

    `raw_variance` = MS between / n0 + (1 - 1/n0) MS within is the same with a negative component kept.
    Intervals are those of the standard deviation, None where all values are equal:

    `interval` is the one to report, by the modified large sample method on `raw_variance`; for unequal n it
    takes n0 in the place of n, one approximation more. Where a component was truncated it still belongs to
    `raw_variance`, so that it may lie wholly below the stated standard deviation.
    `satterthwaite_interval` is the second one, on `df` degrees of freedom: those of `raw_variance`, or, where
    a component was truncated and the total is s_r, N - k.
    """

    variance: Fraction
    raw_variance: Fraction
    df: Fraction | None
    interval: Interval | None
    satterthwaite_interval: Interval | None
    relative_percent: Root | None

    @property
    def sd(self) -> Root:
        """The standard deviation."""
        return Root.of(self.variance)

    @property
    def limit(self) -> Root:
        """2.8 standard deviations: for single values at two levels what the repeatability limit is at one."""
        return Root.of(LIMIT_FACTOR**2 * self.variance)


@dataclass(frozen=True, slots=True)
class MeanUncertainty:
    """A mean with its standard uncertainty `u` on `df` degrees of freedom, and its interval by Student's t.

    `way` is "between levels" or "pooled". `interval` is None where `u` is zero.
    """

    way: str
    mean: Fraction
    u: Root
    df: int
    interval: Interval | None


@dataclass(frozen=True, slots=True)
class Precision:
    """The precision of a random-effects layout at one confidence level.

    `icc` is the share of the total variance that lies between the levels, `icc_raw` the same with a negative
    component kept, both None where all values are equal; `icc_interval` is None where nothing varies within
    the levels. `mean` is the stated one of `mean_ways`, which are the two of GUM H.5. All relative standard
    deviations are in percent of it.
    """

    confidence: Fraction
    k: int
    n_total: int
    n0: Fraction
    repeatability: Repeatability
    between: BetweenLevels
    total: Total
    icc: Fraction | None
    icc_raw: Fraction | None
    icc_interval: Interval | None
    mean_ways: tuple[MeanUncertainty, MeanUncertainty]

    @property
    def balanced(self) -> bool:
        """Whether every level has the same number of values."""
        return self.n0 * self.k == self.n_total

    @property
    def mean(self) -> MeanUncertainty:
        """The way to state: between levels, or pooled where MS between is below MS within."""
        return _stated(self.mean_ways, self.between.raw_variance)


def precision(analysis: OneWay, confidence: Fraction | float) -> Precision:
    """The precision from `analysis`, whose levels are a random sample; intervals at `confidence`.

    Degenerate input is answered: with nothing varying within the levels s_r is 0 without an interval, the ICC
    is 1 without an interval, and the total rests on MS between alone; with all values equal every spread is 0
    and no interval is given. `unavailable` names what is missing and why.
    Raises ValueError for a confidence that is not between 0 and 1, NotComputableError where F is beyond the
    range of doubles.
    """
    alpha = _alpha(confidence)
    n0 = _n0(analysis)
    raw = (analysis.ms_between - analysis.ms_within) / n0
    raw_total = raw + analysis.ms_within
    mean_ways = (_between_levels(analysis, alpha), _pooled(analysis, alpha))
    mean = _stated(mean_ways, raw).mean
    icc_raw = raw / raw_total if raw_total else None
    return Precision(
        confidence=Fraction(confidence),
        k=analysis.k,
        n_total=analysis.n_total,
        n0=n0,
        repeatability=_repeatability(analysis, alpha, mean),
        between=BetweenLevels(
            raw, between_sd_interval(analysis, alpha), _percent(max(Fraction(0), raw), mean)
        ),
        total=_total(analysis, n0, alpha, mean),
        icc=None if icc_raw is None else max(Fraction(0), icc_raw),
        icc_raw=icc_raw,
        icc_interval=icc_interval(analysis, alpha) if analysis.ss_within else None,
        mean_ways=mean_ways,
    )


def repeatability(analysis: OneWay, confidence: Fraction | float) -> Repeatability:
    """The spread within the levels, which needs no assumption about how the levels were chosen.

    Raises ValueError for a confidence that is not between 0 and 1.
    """
    return _repeatability(analysis, _alpha(confidence), analysis.grand_mean)


def _repeatability(analysis: OneWay, alpha: float, mean: Fraction) -> Repeatability:
    variance, df = analysis.ms_within, analysis.df_within
    interval = sd_interval_by_chi_square(variance, df, alpha) if variance else None
    return Repeatability(variance, df, interval, _percent(variance, mean))


def unavailable(found: Precision) -> tuple[tuple[str, str], ...]:
    """What `found` cannot give: (what, why)."""
    missing = []
    if found.repeatability.interval is None:
        missing.append(("interval of the repeatability standard deviation", _NO_VARIATION))
    if found.between.interval is None:
        missing.append(("interval of the standard deviation between levels", _ALL_EQUAL))
    if found.total.interval is None:
        missing.append(("intervals of the total standard deviation", _ALL_EQUAL))
    if found.icc is None:
        missing.append(("intraclass correlation", _ALL_EQUAL))
    elif found.icc_interval is None:
        missing.append(("interval of the intraclass correlation", _NO_VARIATION))
    if found.mean.interval is None:
        missing.append(("interval of the mean", "the values give it no uncertainty"))
    if found.repeatability.relative_percent is None:
        missing.append(("relative standard deviations", "the mean that is stated is zero"))
    return tuple(missing)


_NO_VARIATION: Final = "nothing varies within the levels"
_ALL_EQUAL: Final = "all values are equal"


def _alpha(confidence: Fraction | float) -> float:
    if not 0 < confidence < 1:
        raise ValueError(f"a confidence between 0 and 1 is needed, not {confidence!r}")
    return to_double(1 - Fraction(confidence))


def _n0(analysis: OneWay) -> Fraction:
    squares = sum(level.n**2 for level in analysis.levels)
    return (analysis.n_total - Fraction(squares, analysis.n_total)) / analysis.df_between


def _stated(ways: tuple[MeanUncertainty, MeanUncertainty], raw_between: Fraction) -> MeanUncertainty:
    between_levels, pooled = ways
    return pooled if raw_between < 0 else between_levels


def _percent(variance: Fraction, mean: Fraction) -> Root | None:
    return Root.of(10_000 * variance / mean**2) if mean else None


def _total(analysis: OneWay, n0: Fraction, alpha: float, mean: Fraction) -> Total:
    parts = (
        Part(1 / n0, analysis.ms_between, analysis.df_between),
        Part(1 - 1 / n0, analysis.ms_within, analysis.df_within),
    )
    raw = sum((part.amount for part in parts), Fraction(0))
    variance = max(raw, analysis.ms_within)
    relative = _percent(variance, mean)
    if not variance:
        return Total(variance, raw, None, None, None, relative)
    df = Fraction(analysis.df_within) if raw < analysis.ms_within else satterthwaite_df(parts)
    lower, upper = modified_large_sample_interval(parts, alpha)
    return Total(
        variance,
        raw,
        df,
        (round_significant(sqrt(lower)), round_significant(sqrt(upper))),
        sd_interval_by_chi_square(variance, df, alpha),
        relative,
    )


def _between_levels(analysis: OneWay, alpha: float) -> MeanUncertainty:
    """The mean of the level means; u = their standard deviation over sqrt(k), on k - 1 degrees of freedom.

    Equals sqrt(MS between / N) for equal n. For unequal n the square of u is still unbiased, whatever the
    variances, while the t distribution is an approximation: intervals at 95 % covered 95.0 to 96.7 % in
    simulations of five layouts with up to a twelvefold difference in n and s_L from 0 to 5 s_r. Weighting by
    n_i with u from the variance components covered 88 to 98 % in the same.
    """
    mean = sum((level.mean for level in analysis.levels), Fraction(0)) / analysis.k
    squares = sum(((level.mean - mean) ** 2 for level in analysis.levels), Fraction(0))
    square = squares / (analysis.df_between * analysis.k)
    return _uncertainty(BETWEEN_LEVELS, mean, square, analysis.df_between, alpha)


def _pooled(analysis: OneWay, alpha: float) -> MeanUncertainty:
    """The mean of all values; u = their standard deviation over sqrt(N), on N - 1 degrees of freedom.

    Right only where the levels add no spread of their own.
    """
    df = analysis.n_total - 1
    square = analysis.ss_total / (df * analysis.n_total)
    return _uncertainty(POOLED, analysis.grand_mean, square, df, alpha)


def _uncertainty(way: str, mean: Fraction, square: Fraction, df: int, alpha: float) -> MeanUncertainty:
    u = Root.of(square)
    interval = centred_interval(mean, float(t_isf(alpha / 2, df)) * to_double(u)) if square else None
    return MeanUncertainty(way, mean, u, df, interval)
