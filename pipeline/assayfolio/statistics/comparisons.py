"""Comparisons of level means with the pooled error, and what every comparison procedure shares.

With the pooled variance s^2 = MS within on N - k degrees of freedom the standard error of a comparison is
s * sqrt(sum(c_i^2 / n_i)), and the estimate divided by it follows Student's t where the true value is zero,
for equal and unequal n. Estimates, standard errors and statistics are exact; tails and quantiles are doubles.
Procedures with a distribution of their own are in `simultaneous` and `many_to_one_comparisons`, those
without a pooled error in `separate_variances`.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction

import numpy as np

from assayfolio.exact import Root, round_significant, to_double
from assayfolio.statistics.adjustment import INTERVAL_LEVELS, P_ADJUSTMENTS, Tail
from assayfolio.statistics.arguments import Floats
from assayfolio.statistics.estimates import Estimate
from assayfolio.statistics.oneway import NotComputableError, OneWay
from assayfolio.statistics.tails import t_isf, t_log10_sf, t_sf, t_two_sided, t_two_sided_log10

TWO_SIDED, GREATER, LESS = "two-sided", "greater", "less"

Interval = tuple[float | None, float | None]


@dataclass(frozen=True, slots=True)
class ComparisonResult:
    """A comparison after inference.

    `df` is N - k with the pooled error, and a real number (Welch-Satterthwaite) with separate variances.
    `tail` is the unadjusted, `adjusted` the adjusted p-value. `interval` is simultaneous over the family at
    1 - alpha; an end is None where the alternative leaves it open, and the interval is None where the method
    has none. `critical` is what the standard error is multiplied by for it, None with it.
    """

    label: str
    estimate: Fraction
    se: Root
    df: int | float
    statistic: Root
    tail: Tail
    adjusted: Tail
    interval: Interval | None
    critical: float | None


def compare(
    analysis: OneWay, estimates: Sequence[Estimate], adjust: str, alternative: str, alpha: float
) -> tuple[ComparisonResult, ...]:
    """The comparisons of one family with t tails, adjusted by `adjust`.

    `adjust` is none, bonferroni, sidak, holm or hochberg (see `adjustment` for what each assumes); the two
    stepwise ones have no simultaneous interval. `alternative` is two-sided, greater or less: what the test
    shows about the estimate against zero.
    Raises NotComputableError where nothing varies within the levels, KeyError for another adjustment.
    """
    require_error_term(analysis)
    df = analysis.df_within
    statistics = pooled_statistics(analysis, estimates)
    tails = t_tails(doubles(statistics), df, alternative)
    adjusted = P_ADJUSTMENTS[adjust](tails)
    multiplier = _t_multiplier(adjust, alternative, alpha, len(estimates), df)
    return pooled_results(analysis, estimates, statistics, tails, adjusted, multiplier, alternative)


def require_error_term(analysis: OneWay) -> None:
    """Raises NotComputableError where nothing varies within the levels."""
    if not analysis.ss_within:
        raise NotComputableError("nothing varies within the levels, so there is no error to compare with")


def pooled_statistics(analysis: OneWay, estimates: Sequence[Estimate]) -> tuple[Root, ...]:
    """Each estimate over its standard error with the pooled variance, exactly."""
    variance = analysis.ms_within
    return tuple(signed_root(one.value, one.value**2 / (variance * one.variance_factor)) for one in estimates)


def signed_root(sign_of: Fraction, square: Fraction) -> Root:
    """The root of `square` with the sign of `sign_of`."""
    return Root((sign_of > 0) - (sign_of < 0), square)


def doubles(roots: Sequence[Root]) -> Floats:
    """The nearest doubles."""
    return np.array([to_double(root) for root in roots], dtype=np.float64)


def directed(t: Floats, alternative: str) -> Floats:
    """The statistics in the direction of a one-sided `alternative`; their sizes for the two-sided one."""
    if alternative == TWO_SIDED:
        return np.abs(t)
    return t if alternative == GREATER else -t


def t_tails(t: Floats, df: float, alternative: str) -> tuple[Tail, ...]:
    """The tails of Student's t on `df` degrees of freedom at `t`, for `alternative`."""
    towards = directed(t, alternative)
    if alternative == TWO_SIDED:
        return _paired(t_two_sided(towards, df), t_two_sided_log10(towards, df))
    return _paired(t_sf(towards, df), t_log10_sf(towards, df))


def tails_from_logs(log10_p: Floats) -> tuple[Tail, ...]:
    """Tails from the base-10 logarithms of their probabilities.

    For distributions whose tails cost far more than a power of ten; p keeps 13 digits down to 1e-300.
    """
    return tuple(Tail(10.0**one, one) for one in log10_p.tolist())


def pooled_results(
    analysis: OneWay,
    estimates: Sequence[Estimate],
    statistics: Sequence[Root],
    tails: Sequence[Tail],
    adjusted: Sequence[Tail],
    multiplier: float | None,
    alternative: str,
) -> tuple[ComparisonResult, ...]:
    """The rows of a family with the pooled error; without a `multiplier` they have no interval."""
    variance, df = analysis.ms_within, analysis.df_within
    rows = []
    for estimate, statistic, tail, after in zip(estimates, statistics, tails, adjusted, strict=True):
        se = Root.of(variance * estimate.variance_factor)
        interval = interval_about(estimate.value, se, multiplier, alternative)
        rows.append(
            ComparisonResult(
                estimate.label, estimate.value, se, df, statistic, tail, after, interval, multiplier
            )
        )
    return tuple(rows)


def interval_about(centre: Fraction, se: Root, multiplier: float | None, alternative: str) -> Interval | None:
    """`centre` minus and plus `multiplier` times `se`, open on the side that `alternative` leaves open.

    None without a multiplier.
    """
    if multiplier is None:
        return None
    lower, upper = centred_interval(centre, multiplier * to_double(se))
    return None if alternative == LESS else lower, None if alternative == GREATER else upper


def centred_interval(centre: Fraction, half_width: float) -> tuple[float, float]:
    """`centre` minus and plus `half_width`, the half width rounded to 12 significant digits first.

    Rounding the half width, not the ends, keeps its digits where the centre is large beside it.
    """
    half = Fraction(round_significant(half_width))
    return to_double(centre - half), to_double(centre + half)


def _t_multiplier(adjust: str, alternative: str, alpha: float, size: int, df: float) -> float | None:
    """The t point by which a standard error is multiplied for an interval in a family of `size`.

    None where `adjust` has no simultaneous interval.
    """
    if adjust not in INTERVAL_LEVELS:
        return None
    level = INTERVAL_LEVELS[adjust](alpha, size)
    return float(t_isf(level / 2 if alternative == TWO_SIDED else level, df))


def _paired(p: Floats, log10_p: Floats) -> tuple[Tail, ...]:
    return tuple(Tail(a, b) for a, b in zip(p.tolist(), log10_p.tolist(), strict=True))
