"""Comparisons with a reference by closed testing in full: every set of levels is tested, none is left out.

The set's test refers its largest statistic to the maximum over the set. Probabilities are plain nested
trapezoidal sums over the reference mean and the logarithm of the spread; neither the shortcut of stepping
down nor the quadrature of the package is used. Good to about twelve decimal places of p.
"""

import math
from collections.abc import Sequence
from itertools import combinations

import numpy as np
from scipy.special import ndtr

_STEP = 1 / 16
_Z = np.arange(-9, 9 + _STEP, _STEP)
_DENSITY = np.exp(-_Z * _Z / 2) * _STEP / math.sqrt(2 * math.pi)


def maximum_exceeds(d: float, n_reference: int, sizes: Sequence[int], df: int, two_sided: bool) -> float:
    """P(max |T_i| > d), or P(max T_i > d), for levels of `sizes` against a reference."""
    reach = 12 / math.sqrt(df) + 12 / df
    log_s = np.linspace(-reach, min(reach, 3.0), 400)
    spread = np.exp(-df / 2 * (np.expm1(2 * log_s) - 2 * log_s))
    spread /= spread.sum()
    cut = d * np.exp(log_s)[:, None]
    within = np.ones((log_s.size, _Z.size))
    for n in sizes:
        share = math.sqrt(n / (n_reference + n))
        rest = math.sqrt(1 - share * share)
        below = ndtr((share * _Z + cut) / rest)
        within *= below - ndtr((share * _Z - cut) / rest) if two_sided else below
    return 1 - float((spread * (within * _DENSITY).sum(axis=1)).sum())


def closed_p_values(
    statistics: Sequence[float], n_reference: int, sizes: Sequence[int], df: int, two_sided: bool
) -> list[float]:
    """The adjusted p of each level: the largest p of the sets that hold it."""
    adjusted = [0.0] * len(sizes)
    for count in range(1, len(sizes) + 1):
        for members in combinations(range(len(sizes)), count):
            largest = max(statistics[at] for at in members)
            p = maximum_exceeds(largest, n_reference, [sizes[at] for at in members], df, two_sided)
            for at in members:
                adjusted[at] = max(adjusted[at], p)
    return adjusted
