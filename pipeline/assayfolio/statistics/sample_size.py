"""Planning from a power: the smallest number of values, the smallest difference, the width of an interval.

The power is a function that the caller gives, of the number of values a level or of the true difference; it
rises with either.
"""

import math
from collections.abc import Callable
from typing import Final

from assayfolio.statistics.false_position import root_between
from assayfolio.statistics.power import Number, positive

MOST_VALUES: Final = 10_000
_SETTLED: Final = 1e-12
_FARTHEST: Final = 40 * math.log(2)


def smallest_n(power_at: Callable[[int], float], target: float) -> int | None:
    """The smallest n from 2 to 10,000 with `power_at(n)` at least `target`; None where 10,000 fall short.

    `power_at` is taken to rise with n; at the n that is given it reaches `target`, and at n - 1 it does not.
    Raises ValueError unless `target` is between 0 and 1.
    """
    _between_zero_and_one(target)
    short, enough = 1, 2
    while power_at(enough) < target:
        if enough == MOST_VALUES:
            return None
        short, enough = enough, min(2 * enough, MOST_VALUES)
    while enough - short > 1:
        middle = (short + enough) // 2
        if power_at(middle) < target:
            short = middle
        else:
            enough = middle
    return enough


def control_size(n: int, k: int) -> int:
    """How many values the reference gets beside `n` at each of k - 1 other levels: sqrt(k - 1) n, rounded up.

    With this share the variances of the differences from the reference are smallest for a given total
    (Dunnett 1955, J. Am. Stat. Assoc. 50, 1096; from memory).
    """
    return 1 + math.isqrt((k - 1) * n * n - 1)


def detectable_difference(power_at: Callable[[float], float], target: float, sigma: float) -> float | None:
    """The smallest true difference with which `power_at` reaches `target`.

    `sigma` sets where the search starts. None where `target` is reached with next to no difference, or with
    none up to 2^40 sigma.
    Raises ValueError unless `target` is between 0 and 1 and `sigma` is positive.
    Method: false position on the logarithm of the difference, until the power is within 1e-12 of its target.
    """
    _between_zero_and_one(target)
    start = positive("sigma", sigma)

    def excess(log_difference: float) -> float:
        return power_at(math.exp(log_difference)) - target

    high = low = math.log(start)
    while excess(high) < 0:
        if high > math.log(start) + _FARTHEST:
            return None
        low, high = high, high + math.log(2)
    while low == high or excess(low) >= 0:
        if low < math.log(start) - _FARTHEST:
            return None
        low, high = low - math.log(2), low
    return math.exp(root_between(excess, low, high, _SETTLED))


def half_width(critical: float, variance_factor: Number, sigma: float) -> float:
    """The half width of an interval, critical * sigma * sqrt(sum(c_i^2/n_i)), at s = `sigma`.

    The width that is found varies with s; this is what it is where s happens to equal the planning value.
    `variance_factor` is sum(c_i^2/n_i): for a difference of two means 1/n_a + 1/n_b. `critical` is the point
    of t, of the studentized range over sqrt(2), or of the many-to-one distribution.
    Raises ValueError unless `sigma` is positive.
    """
    return critical * positive("sigma", sigma) * math.sqrt(variance_factor)


def _between_zero_and_one(target: float) -> None:
    if not 0 < target < 1:
        raise ValueError(f"the power that is aimed at lies between 0 and 1, not {target!r}")
