"""Logarithms that cancel: the pieces of a density that keep their digits at a million degrees of freedom.

Method: C. Loader, "Fast and accurate computation of binomial probabilities", 2000 (from memory): a gamma or
beta density is its value at the mode, by Stirling's formula with a correction, times the exponential of a
deviance that is formed without subtracting large numbers.
"""

import math
from typing import Final

import numpy as np

from assayfolio.statistics.arguments import Floats

# 1/(2j+1) for atanh(r)/r in powers of r squared; sixteen terms reach 1e-17 for |r| <= 1/3.
_ATANH_TERMS: Final = tuple(1 / (2 * j + 1) for j in range(16, 0, -1))

# B(2j) / (2j (2j - 1)), the coefficients of Stirling's series (DLMF 5.11.1).
_STIRLING_TERMS: Final = (1 / 12, -1 / 360, 1 / 1260, -1 / 1680, 1 / 1188, -691 / 360360, 1 / 156)
_STIRLING_FROM: Final = 12.0


def excess(u: Floats, log_one_plus_u: Floats) -> Floats:
    """The excess u - log(1 + u), never negative, to a few units in the last place for all u > -1.

    `log_one_plus_u` is log(1 + u) as the caller can form it without loss for u near -1; it is used only where
    u is outside [-1/2, 1].
    """
    ratio = u / (2 + u)
    square = ratio * ratio
    series = np.full_like(u, _ATANH_TERMS[0])
    for coefficient in _ATANH_TERMS[1:]:
        series = series * square + coefficient
    near = ratio * (u - 2 * square * series)
    return np.where((u >= -0.5) & (u <= 1), near, u - log_one_plus_u)


def stirling_correction(z: float) -> float:
    """What log Gamma(z) has beyond Stirling's (z - 1/2) log z - z + log(2 pi)/2, for z >= 1/2.

    Zero for infinite z. Absolute error below 2e-15.
    Method: the asymptotic series (DLMF 5.11.1), reached by recursion.
    """
    if math.isinf(z):
        return 0.0
    climbed = 0.0
    while z < _STIRLING_FROM:
        climbed += (z + 0.5) * math.log1p(1 / z) - 1
        z += 1
    series = 0.0
    for coefficient in reversed(_STIRLING_TERMS):
        series = series / (z * z) + coefficient
    return series / z + climbed
