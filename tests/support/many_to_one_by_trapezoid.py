"""The many-to-one distribution by a nested trapezoidal rule: slow, plain, by another way than the package.

Both integrands are positive and analytic and fall off at both ends, so the rule converges faster than any
power of its step. Steps are fine and ends far enough for some fourteen digits of the upper tail.
"""

import math
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtr

Floats = NDArray[np.float64]


def many_to_one_tail(d: float, n_control: float, n_others: Sequence[float], df: float, sides: int) -> float:
    """P(max |T_i| > d) for two `sides`, P(max T_i > d) for one."""
    b = np.sqrt(np.array(n_others) / (n_control + np.array(n_others)))
    if math.isinf(df):
        return _tail_with_known_sigma(d, b, sides)
    reach = min(120.0, 30 / math.sqrt(df) + 600 / df)
    log_s = _evenly(-reach, min(reach, 4.0), 0.025 / math.sqrt(1 + df / 25))
    log_density = -df / 2 * (np.expm1(2 * log_s) - 2 * log_s)
    # The tail with sigma known is at most 1, and at most Bonferroni's bound: so much for which s can count.
    bound = np.minimum(0, math.log(2 * b.size) - np.maximum(d * np.exp(log_s), 0) ** 2 / 2)
    counts = log_density + bound > np.max(log_density + bound) - 40
    density = np.exp(log_density)
    tails = [_tail_with_known_sigma(d * math.exp(one), b, sides) for one in log_s[counts]]
    return float(math.fsum(density[counts] * np.array(tails)) / math.fsum(density))


def _tail_with_known_sigma(r: float, b: Floats, sides: int) -> float:
    b, counts = np.unique(b, return_counts=True)
    c = np.sqrt((1 - b) * (1 + b))
    step = float(c.min()) / 6
    z = _evenly(-math.sqrt(max(0, r) ** 2 + 90), math.sqrt(max(0, r) ** 2 + 90), step)
    log_kept = np.zeros_like(z)
    with np.errstate(divide="ignore"):
        for one, own, count in zip(b, c, counts, strict=True):
            beyond = ndtr((one * z - r) / own)
            if sides == 2:
                beyond += ndtr((-one * z - r) / own)
            log_kept += count * np.log1p(-np.minimum(beyond, 1))
    density = np.exp(-z * z / 2) / math.sqrt(2 * math.pi)
    return float(np.sum(density * -np.expm1(log_kept))) * step


def _evenly(low: float, high: float, step: float) -> Floats:
    # numpy.arange rounds the step itself where the ends are large beside it.
    return low + step * np.arange(math.ceil((high - low) / step), dtype=np.float64)
