"""Tail probabilities and points of F, t, chi-square and the normal distribution.

Every function is vectorised over its first argument: a float gives a float, an array an array of its shape.
Degrees of freedom are single real numbers from 1 upwards, not necessarily whole; the denominator of F and
those of t may be infinite. `_sf` is the upper tail P(X > x) or P(X >= x), `_log10_sf` its base-10 logarithm,
which keeps its digits where the tail is too small for a double; `_isf` is the point with upper tail p.

Digits were measured against 50-digit arithmetic for df up to a million (tests/generate/measure_digits.py);
those of a logarithm are the digits of the tail that it stands for.
Method: continued fractions behind a saddle-point factor, see `incomplete_beta`; points by Newton's method.
All functions raise ValueError for NaN, for a negative F or chi-square, for degrees of freedom below 1, and
for a p that is not between 0 and 1.
"""

import math
from typing import Final

import numpy as np
from scipy.special import erfcx, log_ndtr, ndtri

from assayfolio.statistics.arguments import (
    Floats,
    Values,
    degrees_of_freedom,
    degrees_of_freedom_or_infinite,
    probabilities,
    real_values,
    shaped,
    statistic_values,
)
from assayfolio.statistics.incomplete_beta import Ratios, Tails, ratio_tails
from assayfolio.statistics.ratio_points import RATIO, ROOT_OF_RATIO, points_above, points_below

_LN10: Final = math.log(10)
_NUMERATOR: Final = "the numerator degrees of freedom"
_DENOMINATOR: Final = "the denominator degrees of freedom"


def f_sf(f: Values, dfn: float, dfd: float) -> Values:
    """P(F > `f`) for F on `dfn` and `dfd` degrees of freedom; `dfd` may be infinite.

    Measured: 13.5 digits down to 1e-30, 12.8 down to 1e-300.
    """
    return shaped(f, _f_tails(f, dfn, dfd).survival())


def f_log10_sf(f: Values, dfn: float, dfd: float) -> Values:
    """The base-10 logarithm of `f_sf`, finite also where that is below the smallest double.

    Measured: 12.6 digits of the tail down to 1e-300; beyond, 15 of the logarithm itself.
    """
    return shaped(f, _f_tails(f, dfn, dfd).log_survival() / _LN10)


def f_isf(p: Values, dfn: float, dfd: float) -> Values:
    """The point that F on `dfn` and `dfd` degrees of freedom exceeds with probability `p`.

    Infinite where it is beyond 1e308. Measured: 14 digits for p from 0.99 to 1e-14.
    """
    q, half = _f_halves(dfn, dfd)
    return shaped(p, points_above(probabilities(p), q, half, RATIO))


def t_sf(t: Values, df: float) -> Values:
    """P(T > `t`) for Student's t on `df` degrees of freedom, any sign of `t`; `df` may be infinite.

    Measured: 14.0 digits down to 1e-30, 13.0 down to 1e-300.
    """
    values = real_values(t, "t")
    beyond = 0.5 * _t_tails(np.abs(values), df).survival()
    return shaped(t, np.where(values >= 0, beyond, 1 - beyond))


def t_log10_sf(t: Values, df: float) -> Values:
    """The base-10 logarithm of `t_sf`, finite also where that is below the smallest double.

    Measured: 12.6 digits of the tail down to 1e-300; beyond, 15 of the logarithm itself.
    """
    values = real_values(t, "t")
    log_beyond = _t_tails(np.abs(values), df).log_survival() - math.log(2)
    return shaped(t, np.where(values >= 0, log_beyond, np.log1p(-np.exp(log_beyond))) / _LN10)


def t_two_sided(t: Values, df: float) -> Values:
    """P(|T| > |`t`|) for Student's t on `df` degrees of freedom; `df` may be infinite.

    Measured: 14.0 digits down to 1e-30, 13.0 down to 1e-300.
    """
    return shaped(t, _t_tails(np.abs(real_values(t, "t")), df).survival())


def t_two_sided_log10(t: Values, df: float) -> Values:
    """The base-10 logarithm of `t_two_sided`, finite also where that is below the smallest double.

    Measured: 12.6 digits of the tail down to 1e-300; beyond, 15 of the logarithm itself.
    """
    return shaped(t, _t_tails(np.abs(real_values(t, "t")), df).log_survival() / _LN10)


def t_isf(p: Values, df: float) -> Values:
    """The point that Student's t on `df` degrees of freedom exceeds with probability `p`.

    For a two-sided level alpha pass alpha/2. Negative for p > 1/2, and exactly 0 for p = 1/2.
    Measured: 14.8 digits for p from 0.99 to 1e-14.
    """
    upper = probabilities(p)
    half = _half_of_t(df)
    points = np.zeros_like(upper)
    sided = upper != 0.5
    both = 2 * np.minimum(upper[sided], 1 - upper[sided])
    points[sided] = points_above(both, 0.5, half, ROOT_OF_RATIO)
    return shaped(p, np.where(upper > 0.5, -points, points))


def chi2_sf(x: Values, df: float) -> Values:
    """P(X > `x`) for chi-square on `df` degrees of freedom.

    Measured: 13.7 digits down to 1e-30, 12.9 down to 1e-300.
    """
    return shaped(x, _chi2_tails(x, df).survival())


def chi2_log10_sf(x: Values, df: float) -> Values:
    """The base-10 logarithm of `chi2_sf`, finite also where that is below the smallest double.

    Measured: 12.6 digits of the tail down to 1e-300; beyond, 15 of the logarithm itself.
    """
    return shaped(x, _chi2_tails(x, df).log_survival() / _LN10)


def chi2_isf(p: Values, df: float) -> Values:
    """The point that chi-square on `df` degrees of freedom exceeds with probability `p`.

    Measured: 14 digits for p from 0.99 to 1e-14.
    """
    df = degrees_of_freedom(df)
    return shaped(p, df * points_above(probabilities(p), df / 2, math.inf, RATIO))


def chi2_ppf(p: Values, df: float) -> Values:
    """The point that chi-square on `df` degrees of freedom stays below with probability `p`.

    As `chi2_isf` of 1 - p, without the digits that 1 - p loses where `p` is small.
    Measured: 14 digits for p from 0.99 to 1e-14.
    """
    df = degrees_of_freedom(df)
    return shaped(p, df * points_below(probabilities(p), df / 2, math.inf, RATIO))


def normal_sf(z: Values) -> Values:
    """P(Z > `z`) for the standard normal distribution.

    Measured: 15 digits down to 1e-300. Method: the scaled complementary error function times
    exp(-z squared / 2), with z split in two so that the square is exact.
    """
    values = real_values(z, "z")
    beyond = _normal_beyond(np.abs(values))
    return shaped(z, np.where(values >= 0, beyond, 1 - beyond))


def normal_log10_sf(z: Values) -> Values:
    """The base-10 logarithm of `normal_sf`, finite also where that is below the smallest double.

    By scipy's log_ndtr. Measured: 12 digits of the tail down to 1e-300.
    """
    return shaped(z, log_ndtr(-real_values(z, "z")) / _LN10)


def normal_isf(p: Values) -> Values:
    """The point that a standard normal variable exceeds with probability `p`.

    By scipy's ndtri. Measured: 15 digits for p from 0.99 to 1e-299.
    """
    return shaped(p, -ndtri(probabilities(p)))


def _f_halves(dfn: float, dfd: float) -> tuple[float, float]:
    numerator = degrees_of_freedom(dfn, _NUMERATOR)
    return numerator / 2, degrees_of_freedom_or_infinite(dfd, _DENOMINATOR) / 2


def _f_tails(f: float | Floats, dfn: float, dfd: float) -> Tails:
    return ratio_tails(Ratios.of(statistic_values(f, "F")), *_f_halves(dfn, dfd))


def _half_of_t(df: float) -> float:
    return degrees_of_freedom_or_infinite(df) / 2


def _t_tails(size: Floats, df: float) -> Tails:
    return ratio_tails(Ratios.of_squares(size), 0.5, _half_of_t(df))


def _chi2_tails(x: float | Floats, df: float) -> Tails:
    df = degrees_of_freedom(df)
    values = statistic_values(x, "chi-square")
    return ratio_tails(Ratios.of_multiples(values, df), df / 2, math.inf)


def _normal_beyond(size: Floats) -> Floats:
    size = np.minimum(size, 1e4)
    whole = np.round(size * 16) / 16
    rest = (size - whole) * (size + whole)
    return 0.5 * erfcx(size * math.sqrt(0.5)) * np.exp(-0.5 * whole * whole) * np.exp(-0.5 * rest)
