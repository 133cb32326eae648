"""Points of a distribution from its tail: Newton's method, kept inside a bracket."""

from collections.abc import Callable
from typing import Final

import numpy as np

from assayfolio.statistics.arguments import Floats, Places

Improvement = Callable[[Floats, Places], Floats]
"""Of points x > 0, and of which places in the answer they are for: better points, by a step of Newton's."""

_LAST_CHANGE: Final = 1e-10
_MOST_STEPS: Final = 300


def settled_points(improved: Improvement, start: Floats) -> Floats:
    """The points x > 0 that `improved` leaves where they are, from `start`.

    The step tells on which side the point lies, so a step that leaves the interval known so far is replaced
    by that interval's geometric middle. Steps converge quadratically: the one after which a point is accepted
    (a relative change below 1e-10) leaves no error but that of the curve. Each point is found on its own; its
    digits do not depend on which others are asked for with it.
    Raises ArithmeticError should a point not settle.
    """
    points = start.copy()
    low, high = np.zeros_like(points), np.full_like(points, np.inf)
    waiting = np.arange(points.size)
    for _ in range(_MOST_STEPS):
        if waiting.size == 0:
            return points
        x = points[waiting]
        proposed = improved(x, waiting)
        low[waiting] = np.where(proposed > x, x, low[waiting])
        high[waiting] = np.where(proposed < x, x, high[waiting])
        going = np.abs(proposed - x) > _LAST_CHANGE * x
        points[waiting] = np.where(going, _inside(proposed, low[waiting], high[waiting]), proposed)
        waiting = waiting[going]
    raise ArithmeticError("a point of a distribution did not settle")


def _inside(proposed: Floats, low: Floats, high: Floats) -> Floats:
    outside = ((proposed <= low) | (proposed >= high)) & (low > 0) & np.isfinite(high)
    middle = np.sqrt(low[outside]) * np.sqrt(high[outside])
    kept = proposed.copy()
    kept[outside] = middle
    return kept
