"""The root of a continuous function between two places where it differs in sign."""

from collections.abc import Callable
from typing import Final

_QUICK_STEPS: Final = 24
_MOST_STEPS: Final = 100


def root_between(function: Callable[[float], float], low: float, high: float, settled: float) -> float:
    """Where `function`, negative at `low` and positive at `high`, is zero, or within `settled` of it.

    Method: false position, the value at an end that is retained twice running halved (the Illinois rule);
    bisection where that is slow. Raises ValueError where the signs at the two ends are not as said.
    """
    at_low, at_high = function(low), function(high)
    for place, value in ((low, at_low), (high, at_high)):
        if abs(value) <= settled:
            return place
    if not at_low <= 0 <= at_high:
        raise ValueError("there is no change of sign between the two places")
    middle, moved = low, 0
    for step in range(_MOST_STEPS):
        middle = (low + high) / 2
        if step < _QUICK_STEPS and at_high > at_low:
            proposed = high - at_high * (high - low) / (at_high - at_low)
            middle = proposed if low < proposed < high else middle
        value = function(middle)
        if abs(value) <= settled or not low < middle < high:
            break
        if value > 0:
            high, at_high, at_low = middle, value, at_low / 2 if moved > 0 else at_low
        else:
            low, at_low, at_high = middle, value, at_high / 2 if moved < 0 else at_high
        moved = 1 if value > 0 else -1
    return middle
