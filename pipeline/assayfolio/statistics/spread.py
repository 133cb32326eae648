"""The spread of each level against that of a reference: ratios of variances.

An imprecise method can have the right mean, so a comparison of means is not the whole comparison. The F test
and interval for two variances lean on normality far more than those for means do.
"""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from math import log10

from assayfolio.exact import round_significant, to_double
from assayfolio.statistics.adjustment import Tail, adjusted_beside_missing, bonferroni_level
from assayfolio.statistics.oneway import LevelSummary, OneWay
from assayfolio.statistics.tails import f_isf, f_log10_sf, f_sf


@dataclass(frozen=True, slots=True)
class VarianceRatio:
    """The variance of level X divided by that of the reference R, label "X / R".

    `tail` is that of the two-sided F test of equal variances, `adjusted` that after the adjustment for the
    family. Where the ratio has none of these they are None and `reason` says why; else `reason` is None.
    """

    label: str
    level: str
    ratio: Fraction | None
    df: tuple[int, int] | None
    tail: Tail | None
    adjusted: Tail | None
    interval: tuple[float, float] | None
    reason: str | None


def variance_ratios(analysis: OneWay, reference: str, alpha: float, adjust: str) -> tuple[VarianceRatio, ...]:
    """s_X^2 / s_R^2 for every other level X, in the order of the levels, R the level `reference`.

    Under normality the ratio divided by that of the true variances follows F on (n_X - 1, n_R - 1) degrees of
    freedom. The two-sided p is twice the smaller tail, at most 1. The interval is
    (ratio / F(alpha/2; df_X, df_R), ratio * F(alpha/2; df_R, df_X)), F the upper points: it excludes 1
    exactly where p < alpha. `adjust` is none, bonferroni or holm over all m rows, of which those without a
    test count as p = 1; intervals with bonferroni are at alpha / m, those with holm, which has no
    simultaneous interval, unadjusted.
    A level with one value, or whose values are all equal, has a row with the reason; so have all levels where
    the reference is such.
    Raises KeyError for an unknown level or adjustment.
    """
    r = analysis.summary_of(reference)
    others = [level for level in analysis.levels if level.level != reference]
    reasons = [_why_no_variance(r) or _why_no_variance(x) or _why_beyond(x, r) for x in others]
    level = bonferroni_level(alpha, len(others)) if adjust == "bonferroni" else alpha
    rows = [
        _row(x, r, level) if reason is None else _without(x, r, reason)
        for x, reason in zip(others, reasons, strict=True)
    ]
    return _adjusted(rows, adjust)


def _why_no_variance(level: LevelSummary) -> str | None:
    if level.n == 1:
        return f"level {level.level!r} has one value, so it has no variance"
    if not level.ss:
        return f"all values of level {level.level!r} are equal"
    return None


def _why_beyond(x: LevelSummary, r: LevelSummary) -> str | None:
    try:
        to_double(_ratio(x, r))
        to_double(1 / _ratio(x, r))
    except OverflowError:
        return "the values differ by more than 150 powers of ten"
    return None


def _ratio(x: LevelSummary, r: LevelSummary) -> Fraction:
    return (x.ss / (x.n - 1)) / (r.ss / (r.n - 1))


def _row(x: LevelSummary, r: LevelSummary, alpha: float) -> VarianceRatio:
    ratio, df_x, df_r = _ratio(x, r), x.n - 1, r.n - 1
    f, inverse = to_double(ratio), to_double(1 / ratio)
    p = min(float(f_sf(f, df_x, df_r)), float(f_sf(inverse, df_r, df_x)))
    log10_p = min(float(f_log10_sf(f, df_x, df_r)), float(f_log10_sf(inverse, df_r, df_x)))
    tail = Tail(min(1.0, 2 * p), min(0.0, log10_p + log10(2)))
    interval = (
        round_significant(f / float(f_isf(alpha / 2, df_x, df_r))),
        round_significant(f * float(f_isf(alpha / 2, df_r, df_x))),
    )
    return VarianceRatio(f"{x.level} / {r.level}", x.level, ratio, (df_x, df_r), tail, tail, interval, None)


def _without(x: LevelSummary, r: LevelSummary, reason: str) -> VarianceRatio:
    return VarianceRatio(f"{x.level} / {r.level}", x.level, None, None, None, None, None, reason)


def _adjusted(rows: Sequence[VarianceRatio], adjust: str) -> tuple[VarianceRatio, ...]:
    known = [row.tail for row in rows if row.tail is not None]
    tails = iter(adjusted_beside_missing(adjust, known, len(rows) - len(known)))
    return tuple(row if row.tail is None else replace(row, adjusted=next(tails)) for row in rows)
