"""Outlier tests that propose what to look into; nothing is ever removed here.

A value or level is called a straggler where the test has p <= 5 %, an outlier where it has p <= 1 %, in the
words and with the levels of ISO 5725-2:1994, 7.3 (from memory). Each test keeps its own error rate: among
twenty levels without any fault one straggler is to be expected.

Grubbs' tests hold a value or two against the spread of the m others, and recorded values agree more often
than unrounded ones: with n = 4 and a step of half a standard deviation two of them agree in two samples of
five, and the test of two values would then name the other two. So both tests are not assessable

- where the m others are all equal: their spread is not known;
- where the verdict would be another with (m - 1) step^2 / 12 added to the sum of squares of the m others,
  which is what rounding to the step adds or hides on the average (errors uniform over the step).

Common practice has no rule for it that we know of; this one has no source. Measured on rounded normal
samples of 3 to 20 values, steps from 0.05 to 2 standard deviations: at most 5.2 % stragglers and outliers
together and 1.1 % outliers, against up to 74 % without the rule.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from math import lcm
from typing import Final

from assayfolio.exact import Decimal10, ExactSums, Root, round_significant, to_double
from assayfolio.statistics.cochran import cochran_limit, cochran_variances
from assayfolio.statistics.grubbs import (
    grubbs_limit,
    grubbs_tail,
    lowest_and_highest,
    lowest_and_highest_pair,
)
from assayfolio.statistics.grubbs_pairs import (
    FEWEST_FOR_PAIRS,
    MOST_FOR_PAIRS,
    pair_limit,
    pair_tail,
)
from assayfolio.statistics.oneway import LevelSummary, NotComputableError, OneWay

GRUBBS: Final = "grubbs"
GRUBBS_DOUBLE: Final = "grubbs-double"
COCHRAN: Final = "cochran"

OUTLIER: Final = "outlier"
STRAGGLER: Final = "straggler"
NEITHER: Final = "neither"

STRAGGLER_LEVEL: Final = 0.05
OUTLIER_LEVEL: Final = 0.01
FEWEST_FOR_GRUBBS: Final = 3


@dataclass(frozen=True, slots=True)
class OutlierTest:
    """One outlier test on one level.

    `indexes` are the places of the values in question within the level (from 0, rising); empty for
    Cochran's test, which is about the variance of the whole level. `statistic` is a Root for one value, a
    Fraction for the other tests. `p` is a bound on the probability of a statistic as extreme where nothing is
    wrong. `small_is_extreme` says on which side of the limits the statistic is extreme: below them for the
    pair. Where a test cannot be done all these are None and empty, `level` is None if it concerns all levels,
    and `reason` says why; else `reason` is None. Where only the resolution stands in the way, `indexes` still
    has the places of the values that would have been tested.
    """

    test: str
    level: str | None
    indexes: tuple[int, ...]
    statistic: Root | Fraction | None
    straggler_limit: float | None
    outlier_limit: float | None
    p: float | None
    small_is_extreme: bool
    verdict: str | None
    reason: str | None


@dataclass(frozen=True, slots=True)
class _Rounding:
    """What rounding may do to the values of a Grubbs test, and what these are called in words.

    `variance` is that of the rounding of one value, in the square of the unit the values are counted in;
    `step` the recorded step, for the words.
    """

    variance: Fraction
    step: Fraction
    of: str
    where: str
    whose: str

    def why_not(
        self, values: Sequence[Decimal10], ratio: Fraction, others: int, tail: Callable[[Fraction], float]
    ) -> str | None:
        """Why the verdict at `ratio`, the sum of squares of the `others` by that of all, is none; or None."""
        step = f"{to_double(self.step):g}"
        if not ratio:
            return (
                f"the other {others} {self.of} {self.whose} are all equal at the recorded step of {step}, so "
                "there is no spread to judge by"
            )
        verdict = _verdict(round_significant(tail(ratio)))
        if verdict == NEITHER:
            return None
        hidden = (others - 1) * self.variance
        sums = ExactSums.of(values)
        total = sums.sum_of_squares - sums.sum**2 / sums.n
        if _verdict(round_significant(tail((ratio * total + hidden) / (total + hidden)))) == verdict:
            return None
        return (
            f"the verdict rests on the recorded step of {step}: it would be another with the spread that "
            f"rounding can hide among the other {others} {self.of}"
        )


def _recorded(values: Sequence[Decimal10], step: Fraction | None) -> _Rounding:
    if step is None:
        step = Fraction(10) ** min((value.exponent for value in values), default=0)
    return _Rounding(step**2 / 12, step, "values", " in the level", "of the level")


def _means(levels: Sequence[LevelSummary], step: Fraction) -> tuple[list[Decimal10], _Rounding]:
    # Whole numbers of one unit, on which no statistic depends. Rounding errors average out over the values of
    # a level, unless these are all equal.
    unit = lcm(*(level.mean.denominator for level in levels))
    share = max(Fraction(1, level.n) if level.ss else Fraction(1) for level in levels)
    rounding = _Rounding(share * step**2 / 12 * unit**2, step, "level means", "", "of the study")
    return [Decimal10(int(level.mean * unit), 0) for level in levels], rounding


def grubbs_single(level: str, values: Sequence[Decimal10], step: Fraction | None = None) -> OutlierTest:
    """Grubbs' test of the value farthest from the mean of its level, at either end.

    G = |x - mean| / s, exact; limits and p two-sided: t points at alpha / (2 n), the limits that ISO 5725-2
    prints for the test at each end. The values are taken as independent and normal. Where both ends are
    equally far the low one is named. For 3 values or more. `step` is that in which the values are recorded,
    by default one unit of their finest decimal place; see the head of this module for its part.
    """
    return _single(level, values, _recorded(values, step))


def grubbs_double(level: str, values: Sequence[Decimal10], step: Fraction | None = None) -> OutlierTest:
    """Grubbs' test of the two largest or the two smallest values of a level.

    The sum of squares about the mean without the two, divided by that of all values, exact; small where both
    lie far out. Of both ends the one with the smaller ratio is tested, p is twice the tail of one end, and
    the limits are the points of one end at alpha / 2, as ISO 5725-2 prints them; computed by quadrature, not
    from tables. Where both ends are equal the low one is named. For 4 to 100 values. ISO 5725-2 applies it
    where the test of one value finds none, since two outlying values can hide each other. `step` as in
    `grubbs_single`.
    """
    return _double(level, values, _recorded(values, step))


def grubbs_single_of_means(levels: Sequence[LevelSummary], step: Fraction) -> OutlierTest:
    """As `grubbs_single` on the means of the levels, as ISO 5725-2 applies it to cell means.

    `indexes` are the places of the levels in question among `levels`, `level` is None. The means count as
    values of one normal distribution, which is exact for equal n only.
    """
    return _single(None, *_means(levels, step))


def grubbs_double_of_means(levels: Sequence[LevelSummary], step: Fraction) -> OutlierTest:
    """As `grubbs_double` on the means of the levels; `indexes` as in `grubbs_single_of_means`."""
    return _double(None, *_means(levels, step))


def _single(level: str | None, values: Sequence[Decimal10], rounding: _Rounding) -> OutlierTest:
    reason = _why_not(values, FEWEST_FOR_GRUBBS, rounding)
    if reason is not None:
        return not_done(GRUBBS, level, reason)
    low, high = lowest_and_highest(values)
    farthest = high if high.g.square > low.g.square else low
    n = len(values)
    most = Fraction((n - 1) ** 2, n)  # G^2 where all other values are equal

    def tail(ratio: Fraction) -> float:
        return grubbs_tail(Root.of(most * (1 - ratio)), n, ends=2)

    ratio = 1 - farthest.g.square / most
    blurred = rounding.why_not(values, ratio, n - 1, tail)
    if blurred is not None:
        return not_done(GRUBBS, level, blurred, (farthest.index,))
    limits = (grubbs_limit(STRAGGLER_LEVEL, n, ends=2), grubbs_limit(OUTLIER_LEVEL, n, ends=2))
    return _done(GRUBBS, level, (farthest.index,), farthest.g, limits, grubbs_tail(farthest.g, n, ends=2))


def _double(level: str | None, values: Sequence[Decimal10], rounding: _Rounding) -> OutlierTest:
    reason = _why_not(values, FEWEST_FOR_PAIRS, rounding)
    if reason is None and len(values) > MOST_FOR_PAIRS:
        reason = f"the test of two {rounding.of} is computed for up to {MOST_FOR_PAIRS}; here are "
        reason += f"{len(values):,}"
    if reason is not None:
        return not_done(GRUBBS_DOUBLE, level, reason)
    low, high = lowest_and_highest_pair(values)
    extreme = high if high.ratio < low.ratio else low
    n = len(values)

    def tail(ratio: Fraction) -> float:
        return min(1.0, 2 * pair_tail(to_double(ratio), n))

    blurred = rounding.why_not(values, extreme.ratio, n - 2, tail)
    if blurred is not None:
        return not_done(GRUBBS_DOUBLE, level, blurred, extreme.indexes)
    limits = (pair_limit(STRAGGLER_LEVEL / 2, n), pair_limit(OUTLIER_LEVEL / 2, n))
    return _done(GRUBBS_DOUBLE, level, extreme.indexes, extreme.ratio, limits, tail(extreme.ratio))


def cochran_outlier(analysis: OneWay) -> OutlierTest:
    """Cochran's test of the level with the largest variance, one-sided.

    The statistic is the share of the level in SS within: Cochran's C for equal n. With unequal n the level
    with the smallest tail is tested and the limits are those of its own degrees of freedom (see `cochran`).
    """
    try:
        check = cochran_variances(analysis)
    except NotComputableError as error:
        return not_done(COCHRAN, None, str(error))
    limits = (
        cochran_limit(STRAGGLER_LEVEL, check.levels, *check.df),
        cochran_limit(OUTLIER_LEVEL, check.levels, *check.df),
    )
    return _done(COCHRAN, check.level, (), check.share, limits, check.bound.p)


def _why_not(values: Sequence[Decimal10], fewest: int, rounding: _Rounding) -> str | None:
    if len(values) < fewest:
        return f"the test needs {fewest} {rounding.of}{rounding.where}; here are {len(values)}"
    if len({value.fraction for value in values}) == 1:
        return f"all {rounding.of} {rounding.whose} are equal"
    return None


def _done(
    test: str,
    level: str | None,
    indexes: tuple[int, ...],
    statistic: Root | Fraction,
    limits: tuple[float, float],
    p: float,
) -> OutlierTest:
    straggler, outlier = (round_significant(limit) for limit in limits)
    stated = round_significant(p)
    verdict = _verdict(stated)
    small = test == GRUBBS_DOUBLE
    return OutlierTest(test, level, indexes, statistic, straggler, outlier, stated, small, verdict, None)


def _verdict(p: float) -> str:
    return OUTLIER if p <= OUTLIER_LEVEL else STRAGGLER if p <= STRAGGLER_LEVEL else NEITHER


def not_done(test: str, level: str | None, reason: str, indexes: tuple[int, ...] = ()) -> OutlierTest:
    """A test that cannot be done on a level, or on any, for a reason in words."""
    small = test == GRUBBS_DOUBLE
    return OutlierTest(test, level, indexes, None, None, None, None, small, None, reason)
