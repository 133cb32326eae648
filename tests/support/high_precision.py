"""Tails of F, chi-square, t and the normal distribution in 50-digit arithmetic.

By mpmath's hypergeometric series, or by finite sums of positive terms where half the degrees of freedom are
whole: neither shares a formula with the continued fractions of the package. Arguments count as the exact
binary numbers they are.
"""

import math

import mpmath as mp

DIGITS = 50


def f_tail(f: float, dfn: float, dfd: float) -> mp.mpf:
    """P(F > f)."""
    with mp.workdps(DIGITS):
        q, p = mp.mpf(dfn) / 2, mp.mpf(dfd) / 2
        x, y = p / (p + q * mp.mpf(f)), q * mp.mpf(f) / (p + q * mp.mpf(f))
        if 100 <= dfn <= 20_000 and dfn % 2 == 0:
            return x**p * _negative_binomial_sum(p, y, int(dfn) // 2)
        return mp.betainc(p, q, 0, x, regularized=True)


def _negative_binomial_sum(p: mp.mpf, y: mp.mpf, terms: int) -> mp.mpf:
    # The incomplete beta function with a whole second parameter; all terms are positive (DLMF 8.17.24).
    term = total = mp.mpf(1)
    for j in range(1, terms):
        term *= (p + j - 1) / j * y
        total += term
    return total


def t_tail(t: float, df: float) -> mp.mpf:
    """P(T > t)."""
    if t < 0:
        with mp.workdps(DIGITS):
            return 1 - t_tail(-t, df)
    if math.isinf(df):
        return normal_tail(t)
    with mp.workdps(DIGITS):
        half = mp.mpf(df) / 2
        x = mp.mpf(df) / (mp.mpf(df) + mp.mpf(t) ** 2)
        return mp.betainc(half, mp.mpf(1) / 2, 0, x, regularized=True) / 2


def chi2_tail(x: float, df: float) -> mp.mpf:
    """P(X > x) for chi-square."""
    with mp.workdps(DIGITS):
        return mp.gammainc(mp.mpf(df) / 2, mp.mpf(x) / 2, mp.inf, regularized=True)


def chi2_below(x: float, df: float) -> mp.mpf:
    """P(X <= x) for chi-square."""
    with mp.workdps(DIGITS):
        return mp.gammainc(mp.mpf(df) / 2, 0, mp.mpf(x) / 2, regularized=True)


def normal_tail(z: float) -> mp.mpf:
    """P(Z > z)."""
    with mp.workdps(DIGITS):
        return mp.erfc(mp.mpf(z) / mp.sqrt(2)) / 2


def distance(computed: float, truth: mp.mpf) -> float:
    """The relative difference of `computed` from `truth`."""
    with mp.workdps(DIGITS):
        return float(abs(mp.mpf(float(computed)) / truth - 1))


def distance_by_log10(computed: float, truth: mp.mpf) -> float:
    """The relative difference from `truth` of the number whose base-10 logarithm was computed."""
    with mp.workdps(DIGITS):
        return float(abs(mp.mpf(10) ** (mp.mpf(float(computed)) - mp.log10(truth)) - 1))
