"""The interval of the intraclass correlation: which share of the total variance lies between the levels.

With rho = (variance between) / (variance within), the share is rho / (1 + rho). For equal n the interval
follows from F exactly; for unequal n it is Wald's, exact as well: with w_i = n_i / (1 + rho n_i), the
weighted mean square of the level means, over the mean square within, is F on k - 1 and N - k degrees of
freedom at the true rho, and falls as rho rises, so that each end is the root of one equation.

Sources: S. R. Searle, G. Casella and C. E. McCulloch, Variance Components, 1992; A. Wald 1940, Ann. Math.
Stat. 11, 96 (both from memory). Both assume normal values, and normal true level means.
"""

from math import inf
from typing import Final

import numpy as np

from assayfolio.exact import Root, round_significant, to_double
from assayfolio.statistics.arguments import Floats, Places
from assayfolio.statistics.oneway import NotComputableError, OneWay
from assayfolio.statistics.roots import settled_points
from assayfolio.statistics.tails import f_isf

_LARGEST_STEP_DOWN: Final = 1 / 16
_SMALLEST: Final = 1e-300


def f_icc_interval(analysis: OneWay, alpha: float) -> tuple[float, float]:
    """The 1 - alpha interval of the intraclass correlation for equal n, from F; its ends may be negative.

    With f = F over a point of F, an end is (f - 1) / (f - 1 + n); not rounded. Raises NotComputableError
    where n differs between the levels or nothing varies within them.
    """
    n = analysis.levels[0].n
    if any(level.n != n for level in analysis.levels):
        raise NotComputableError("the interval from F needs the same number of values at every level")
    ratio = _f(analysis)
    lower, upper = (ratio / point - 1 for point in _points(analysis, alpha))
    return lower / (lower + n), upper / (upper + n)


def wald_ratio_interval(analysis: OneWay, alpha: float) -> tuple[float, float]:
    """Wald's 1 - alpha interval of rho = (variance between) / (variance within), for equal or unequal n.

    An end that the equation would place below zero is 0; both are 0 where the level means lie closer together
    than the variation within explains. Not rounded. Raises NotComputableError where nothing varies within.
    """
    ratio = _f(analysis)
    targets = np.array(_points(analysis, alpha))
    above = np.flatnonzero(targets < ratio)
    ends = np.zeros(2)
    ends[above] = _roots(analysis, targets[above], ratio)
    return float(ends[0]), float(ends[1])


def icc_interval(analysis: OneWay, alpha: float) -> tuple[float, float]:
    """The 1 - alpha interval of the intraclass correlation: from F for equal n, Wald's for unequal n.

    Ends below zero are given as 0; rounded to 12 digits.
    Raises NotComputableError where nothing varies within the levels.
    """
    if len({level.n for level in analysis.levels}) == 1:
        lower, upper = f_icc_interval(analysis, alpha)
    else:
        lower, upper = (rho / (1 + rho) for rho in wald_ratio_interval(analysis, alpha))
    return round_significant(max(0.0, lower)), round_significant(max(0.0, upper))


def _f(analysis: OneWay) -> float:
    if analysis.f is None:
        raise NotComputableError("nothing varies within the levels, so there is nothing to compare with")
    try:
        return to_double(analysis.f)
    except OverflowError:
        raise NotComputableError("the values differ by more than 150 powers of ten") from None


def _points(analysis: OneWay, alpha: float) -> tuple[float, float]:
    """The upper and the lower alpha/2 point of F, which belong to the lower and the upper end."""
    df1, df2 = analysis.df_between, analysis.df_within
    return float(f_isf(alpha / 2, df1, df2)), 1 / float(f_isf(alpha / 2, df2, df1))


def _roots(analysis: OneWay, targets: Floats, ratio: float) -> Floats:
    n = np.array([float(level.n) for level in analysis.levels])
    # Level means about the grand mean, in units of the standard deviation within, exact until here.
    means = np.array([_standardised(analysis, index) for index in range(analysis.k)])
    aims = targets * analysis.df_between

    def improved(rho: Floats, places: Places) -> Floats:
        weights = n / (1 + rho[:, None] * n)
        centres = np.sum(weights * means, axis=1) / np.sum(weights, axis=1)
        squares = (means - centres[:, None]) ** 2
        sums, falls = np.sum(weights * squares, axis=1), np.sum(weights**2 * squares, axis=1)
        # Newton's step on the reciprocal of the sum, which for equal n is a straight line in rho.
        step = sums / falls * (sums / aims[places] - 1)
        return np.asarray(np.clip(rho + step, rho * _LARGEST_STEP_DOWN, inf))

    n_mean = analysis.n_total / analysis.k
    return settled_points(improved, np.maximum((ratio / targets - 1) / n_mean, _SMALLEST))


def _standardised(analysis: OneWay, index: int) -> float:
    distance = analysis.levels[index].mean - analysis.grand_mean
    sign = (distance > 0) - (distance < 0)
    return to_double(Root(sign, distance**2 / analysis.ms_within))
