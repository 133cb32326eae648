"""Outlier tests that propose what to look into; nothing is ever removed here.

A value or level is called a straggler where the test has p <= 5 %, an outlier where it has p <= 1 %, in the
words and with the levels of ISO 5725-2:1994, 7.3 (from memory). Each test keeps its own error rate: among
twenty levels without any fault one straggler is to be expected.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Final

from assayfolio.exact import Decimal10, Root, round_significant, to_double
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
from assayfolio.statistics.oneway import NotComputableError, OneWay

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
    and `reason` says why; else `reason` is None.
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


def grubbs_single(level: str, values: Sequence[Decimal10]) -> OutlierTest:
    """Grubbs' test of the value farthest from the mean of its level, at either end.

    G = |x - mean| / s, exact; limits and p two-sided: t points at alpha / (2 n), the limits that ISO 5725-2
    prints for the test at each end. The values are taken as independent and normal. Where both ends are
    equally far the low one is named. For 3 values or more.
    """
    reason = _why_not(values, FEWEST_FOR_GRUBBS)
    if reason is not None:
        return not_done(GRUBBS, level, reason)
    low, high = lowest_and_highest(values)
    farthest = high if high.g.square > low.g.square else low
    n = len(values)
    p = grubbs_tail(farthest.g, n, ends=2)
    limits = (grubbs_limit(STRAGGLER_LEVEL, n, ends=2), grubbs_limit(OUTLIER_LEVEL, n, ends=2))
    return _done(GRUBBS, level, (farthest.index,), farthest.g, limits, p)


def grubbs_double(level: str, values: Sequence[Decimal10]) -> OutlierTest:
    """Grubbs' test of the two largest or the two smallest values of a level.

    The sum of squares about the mean without the two, divided by that of all values, exact; small where both
    lie far out. Of both ends the one with the smaller ratio is tested, p is twice the tail of one end, and
    the limits are the points of one end at alpha / 2, as ISO 5725-2 prints them; computed by quadrature, not
    from tables. Where both ends are equal the low one is named. For 4 to 100 values. ISO 5725-2 applies it
    where the test of one value finds none, since two outlying values can hide each other.
    """
    reason = _why_not(values, FEWEST_FOR_PAIRS)
    if reason is None and len(values) > MOST_FOR_PAIRS:
        reason = f"the test of two values is computed for up to {MOST_FOR_PAIRS}; here are {len(values):,}"
    if reason is not None:
        return not_done(GRUBBS_DOUBLE, level, reason)
    low, high = lowest_and_highest_pair(values)
    extreme = high if high.ratio < low.ratio else low
    n = len(values)
    p = min(1.0, 2 * pair_tail(to_double(extreme.ratio), n))
    limits = (pair_limit(STRAGGLER_LEVEL / 2, n), pair_limit(OUTLIER_LEVEL / 2, n))
    return _done(GRUBBS_DOUBLE, level, extreme.indexes, extreme.ratio, limits, p)


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


def _why_not(values: Sequence[Decimal10], fewest: int) -> str | None:
    if len(values) < fewest:
        return f"the test needs {fewest} values in the level; here are {len(values)}"
    if len({value.fraction for value in values}) == 1:
        return "all values of the level are equal"
    return None


def _done(
    test: str,
    level: str,
    indexes: tuple[int, ...],
    statistic: Root | Fraction,
    limits: tuple[float, float],
    p: float,
) -> OutlierTest:
    straggler, outlier = (round_significant(limit) for limit in limits)
    stated = round_significant(p)
    verdict = OUTLIER if stated <= OUTLIER_LEVEL else STRAGGLER if stated <= STRAGGLER_LEVEL else NEITHER
    small = test == GRUBBS_DOUBLE
    return OutlierTest(test, level, indexes, statistic, straggler, outlier, stated, small, verdict, None)


def not_done(test: str, level: str | None, reason: str) -> OutlierTest:
    """A test that cannot be done on a level, or on any, for a reason in words."""
    small = test == GRUBBS_DOUBLE
    return OutlierTest(test, level, (), None, None, None, None, small, None, reason)
