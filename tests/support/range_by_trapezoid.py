"""The studentized range by a nested trapezoidal rule: slow, plain, and by another way than the package goes.

Both integrands are positive and analytic and fall off at both ends, so the rule converges faster than any
power of its step. Steps are fine and ends far enough for some fourteen digits of either tail.
"""

import math

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtr

Floats = NDArray[np.float64]

_STEP = 1 / 64
_Z = np.arange(-9.5, 30, _STEP)
_DENSITY = np.exp(-_Z * _Z / 2) / math.sqrt(2 * math.pi)


def studentized_range_tails(q: float, k: int, df: float) -> tuple[float, float]:
    """P(Q > q) and P(Q <= q), each to full relative accuracy."""
    if math.isinf(df):
        return _range_tails(q, k)
    reach = min(60.0, 30 / math.sqrt(df) + 60 / df)
    log_s = np.arange(-reach, min(reach, 4.0), 0.015 / math.sqrt(1 + df / 25))
    log_density = -df / 2 * (np.expm1(2 * log_s) - 2 * log_s)
    # W(r) is at most 1, and at most Bonferroni's bound over all pairs: so much for which s can count above;
    # below, the density alone says it.
    bound = np.minimum(0, math.log(k * (k - 1)) - (q * np.exp(log_s)) ** 2 / 4)
    counts = (log_density + bound > np.max(log_density + bound) - 42) | (log_density > -42)
    density = np.exp(log_density)
    pairs = [_range_tails(q * math.exp(one), k) for one in log_s[counts]]
    upper, lower = (math.fsum(density[counts] * np.array(side)) for side in zip(*pairs, strict=True))
    return upper / math.fsum(density), lower / math.fsum(density)


def _range_tails(r: float, k: int) -> tuple[float, float]:
    above, below = ndtr(_Z), ndtr(_Z - r)
    with np.errstate(divide="ignore"):
        lost = -np.expm1((k - 1) * np.log1p(-np.minimum(below / above, 1)))
    upper = k * np.sum(_DENSITY * above ** (k - 1) * lost)
    # The interval (z - r, z) from the nearer end of the scale, so that the difference does not cancel.
    inside = np.where(r / 2 < _Z, ndtr(r - _Z) - ndtr(-_Z), above - below)
    lower = k * np.sum(_DENSITY * inside ** (k - 1))
    return float(upper) * _STEP, float(lower) * _STEP
