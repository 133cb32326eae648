"""Tails of noncentral F and noncentral t, and the noncentrality at which a tail takes a given value.

Noncentral F is the ratio of two mean squares where the numerator's means differ: with level means mu_i,
lambda = sum(n_i (mu_i - weighted mean)^2) / sigma^2. Noncentral t is (Z + delta)/S, a mean difference over
its estimated standard error, delta being the true difference over the true one. Both tails are formed from
positive terms, each on its own, so that either keeps its digits where it is small.

Digits were measured against 50-digit arithmetic (tests/statistics/test_noncentral.py). Of what scipy.special
1.17 has, the lower tail ncfdtr agrees to 12 digits, but there is no upper one, and the inverse in the
noncentrality has three to six; nctdtr gives no number in places, and four digits where t and delta differ in
sign. So the tails are formed here.
"""

import math
from typing import Final

import numpy as np
from scipy.special import ndtri

from assayfolio.statistics.arguments import (
    Floats,
    Places,
    Values,
    degrees_of_freedom,
    degrees_of_freedom_or_infinite,
    probabilities,
    real_values,
    shaped,
    statistic_values,
)
from assayfolio.statistics.poisson_mixture import MixtureTails, mixture_tails
from assayfolio.statistics.roots import settled_points
from assayfolio.statistics.spread_rule import spread_rule
from assayfolio.statistics.tails import normal_sf

_REACH: Final = 12.5  # P(Z > 12.5) is 4e-36
_SMALLEST: Final = 1e-300
_LARGEST_F: Final = 1e100


def noncentral_f_sf(f: Values, df1: float, df2: float, noncentrality: float) -> Values:
    """P(F > `f`) for noncentral F on `df1` and `df2` degrees of freedom.

    `f` may be an array; degrees of freedom are real numbers from 1 upwards. Measured: see `noncentral_f_cdf`.
    Raises ValueError for NaN and for a negative `f` or `noncentrality`.
    """
    return shaped(f, np.array([tails.upper for tails in _f_tails(f, df1, df2, noncentrality)]))


def noncentral_f_cdf(f: Values, df1: float, df2: float, noncentrality: float) -> Values:
    """P(F <= `f`) for noncentral F on `df1` and `df2` degrees of freedom; limits as for `noncentral_f_sf`.

    Measured: 12 digits of either tail wherever it exceeds 1e-14, with df to 1e6 and noncentrality to 1e5.
    """
    return shaped(f, np.array([tails.lower for tails in _f_tails(f, df1, df2, noncentrality)]))


def noncentral_f_noncentrality(f: float, df1: float, df2: float, p: float) -> float:
    """The noncentrality with which P(F <= `f`) is `p`; 0 where even without any it is no more than `p`.

    P(F <= f) falls as the noncentrality rises, so the answer is unique. 0 < `p` < 1.
    Measured: 12 digits. Raises ValueError for an `f` above 1e100.
    Method: Newton's steps on the normal deviate of the smaller tail, which is nearly a straight line in the
    square root of the noncentrality.
    """
    lower = float(probabilities(p)[0])
    if f > _LARGEST_F:
        raise ValueError("F is too large for a noncentrality to be found")
    (central,) = _f_tails(f, df1, df2, 0.0)
    if central.lower <= lower:
        return 0.0
    target = float(ndtri(lower))
    point = float(f)

    def improved(root: Floats, _: Places) -> Floats:
        at = float(root[0])
        tails = mixture_tails(point, df1, df2, at * at)
        small = max(min(tails.upper, tails.lower), _SMALLEST)
        deviate = float(ndtri(small)) * (1 if tails.lower < tails.upper else -1)
        density = math.exp(-deviate * deviate / 2) / math.sqrt(2 * math.pi)
        slope = 2 * at * tails.slope / density  # how fast the deviate falls with the root
        step = (deviate - target) / slope if slope > 0 else math.copysign(math.inf, deviate - target)
        return np.array([min(max(at + step, at / 4), 4 * at)])

    start = np.array([math.sqrt(max(df1 * point - df1, 1.0))])
    return float(settled_points(improved, start)[0]) ** 2


def noncentral_t_sf(t: Values, df: float, delta: float) -> Values:
    """P(T > `t`) for T = (Z + `delta`)/S, noncentral t on `df` degrees of freedom, which may be infinite.

    `t` may be an array, of any sign, as may be `delta`. Measured: 12 digits wherever the tail exceeds 1e-14,
    with df to 1e6 and delta to 300. Method: the average of a normal tail over S.
    Raises ValueError for NaN.
    """
    return shaped(t, np.array([_t_upper(value, df, delta) for value in _t_values(t, df, delta)]))


def noncentral_t_cdf(t: Values, df: float, delta: float) -> Values:
    """P(T <= `t`) for noncentral t; limits and digits as for `noncentral_t_sf`."""
    return shaped(t, np.array([_t_lower(value, df, delta) for value in _t_values(t, df, delta)]))


def _f_tails(f: float | Floats, df1: float, df2: float, noncentrality: float) -> list[MixtureTails]:
    numerator = degrees_of_freedom(df1, "the numerator degrees of freedom")
    denominator = degrees_of_freedom(df2, "the denominator degrees of freedom")
    if not 0 <= noncentrality < math.inf:
        raise ValueError(f"the noncentrality must be a number from 0 upwards, not {noncentrality!r}")
    out = []
    for value in statistic_values(f, "F"):
        if value == 0:
            out.append(MixtureTails(1.0, 0.0, 0.0))
        elif math.isinf(value):
            out.append(MixtureTails(0.0, 1.0, 0.0))
        else:
            out.append(mixture_tails(float(value), numerator, denominator, float(noncentrality)))
    return out


def _t_values(t: float | Floats, df: float, delta: float) -> list[float]:
    degrees_of_freedom_or_infinite(df)
    if not math.isfinite(delta):
        raise ValueError(f"the noncentrality of t must be a number, not {delta!r}")
    return [float(value) for value in real_values(t, "t")]


def _t_upper(t: float, df: float, delta: float) -> float:
    if t < 0:
        return _t_lower(-t, df, -delta)
    return _average(t, df, delta, 1)


def _t_lower(t: float, df: float, delta: float) -> float:
    if t < 0:
        return _t_upper(-t, df, -delta)
    return _average(t, df, delta, -1)


def _average(t: float, df: float, delta: float, side: int) -> float:
    # P(Z > tS - delta) for side 1, P(Z < tS - delta) for side -1, over S; t >= 0.
    if t == 0 or math.isinf(df):
        return float(normal_sf(side * (t - delta)))
    if math.isinf(t):
        return 0.0 if side > 0 else 1.0
    s, weights = spread_rule(df, t, (delta - _REACH, delta + _REACH))
    return min(1.0, float(np.sum(weights * normal_sf(side * (t * s - delta)))))
