"""Tails of noncentral F and t in 50-digit arithmetic, by formulas that the package does not use.

Noncentral F is the Poisson mixture of central tails, each by mpmath's incomplete beta function or, where half
the denominator's degrees of freedom are whole, by a finite sum. Noncentral t is a trapezoidal sum over log S.
Arguments count as the exact binary numbers they are.
"""

import mpmath as mp

DIGITS = 50


def noncentral_f_tails(f: float, df1: float, df2: float, noncentrality: float) -> tuple[mp.mpf, mp.mpf]:
    """P(F > f) and P(F <= f)."""
    with mp.workdps(DIGITS):
        f, df1, df2, mean = mp.mpf(f), mp.mpf(df1), mp.mpf(df2), mp.mpf(noncentrality) / 2
        b, y = df2 / 2, df1 * f / (df1 * f + df2)
        first = max(0, int(mean - 14 * mp.sqrt(mean)))
        last = int(mean + 14 * mp.sqrt(mean) + 60)
        a = df1 / 2 + last
        lower = _lower_beta(a, b, y)
        step = mp.exp(
            a * mp.log(y) + b * mp.log1p(-y) + mp.loggamma(a + b) - mp.loggamma(a + 1) - mp.loggamma(b)
        )
        weight = mp.exp(last * mp.log(mean) - mean - mp.loggamma(last + 1))
        below = above = mp.mpf(0)
        for j in range(last, first - 1, -1):
            below += weight * lower
            above += weight * (1 - lower)
            if j > first:
                step *= (df1 / 2 + j) / (y * (df1 / 2 + j - 1 + b))
                lower += step
                weight *= j / mean
        return above, below


def _lower_beta(a: mp.mpf, b: mp.mpf, y: mp.mpf) -> mp.mpf:
    if b > 2000 or b != mp.floor(b):
        return mp.betainc(a, b, 0, y, regularized=True)
    term = total = mp.mpf(1)  # all terms are positive (DLMF 8.17.24)
    for n in range(1, int(b)):
        term *= (a + n - 1) / n * (1 - y)
        total += term
    return y**a * total


def noncentral_t_tails(t: float, df: float, delta: float) -> tuple[mp.mpf, mp.mpf]:
    """P(T > t) and P(T <= t)."""
    with mp.workdps(DIGITS // 2):
        t, df, delta = mp.mpf(t), mp.mpf(df), mp.mpf(delta)
        at_one = mp.log(2) + df / 2 * mp.log(df / 2) - mp.loggamma(df / 2)
        deviation = 1 / mp.sqrt(2 * df)
        step = min(deviation, 1 / (1 + abs(delta))) / 9
        low, high = -14 * deviation - 60 / df, min(14 * deviation, mp.mpf(3))
        above = below = mp.mpf(0)
        for i in range(int((high - low) / step) + 1):
            u = low + i * step
            s = mp.exp(u)
            density = mp.exp(at_one + df * u - df * s * s / 2)
            deviate = (t * s - delta) / mp.sqrt(2)
            above += density * mp.erfc(deviate) / 2
            below += density * mp.erfc(-deviate) / 2
        return step * above, step * below
