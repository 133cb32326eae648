"""The points at which the tails of a ratio of mean squares take given values."""

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import Final

import numpy as np
from scipy.special import ndtri

from assayfolio.statistics.arguments import Floats, Places
from assayfolio.statistics.incomplete_beta import Ratios, ratio_tails
from assayfolio.statistics.roots import settled_points

_LONGEST_STEP: Final = 300.0
_LARGEST: Final = 1e308  # a point beyond it is given as infinite


@dataclass(frozen=True, slots=True)
class Scale:
    """The variable in which a point is sought: how it makes ratios, and which power of a ratio it is."""

    ratios: Callable[[Floats], Ratios]
    power: float


RATIO: Final = Scale(Ratios.of, 1.0)
ROOT_OF_RATIO: Final = Scale(Ratios.of_squares, 0.5)


def points_above(upper: Floats, q: float, p: float, scale: Scale) -> Floats:
    """The points, on `scale`, that F on 2 `q` and 2 `p` df exceeds with the probabilities `upper`.

    Below the median the point is sought from the lower tail, so that 1 - `upper` keeps its digits.
    """
    points = np.empty_like(upper)
    far = upper <= 0.5
    points[far] = _upper_points(upper[far], q, p, scale)
    points[~far] = points_below(1 - upper[~far], q, p, scale)
    return points


def points_below(lower: Floats, q: float, p: float, scale: Scale) -> Floats:
    """The points, on `scale`, that F on 2 `q` and 2 `p` df stays below with the probabilities `lower`."""
    points = np.empty_like(lower)
    far = lower <= 0.5
    points[far] = _lower_points(lower[far], q, p, scale)
    points[~far] = _upper_points(1 - lower[~far], q, p, scale)
    return points


def _upper_points(upper: Floats, q: float, p: float, scale: Scale) -> Floats:
    log_upper = np.log(upper)

    def improved(x: Floats, places: Places) -> Floats:
        ratios = scale.ratios(x)
        tails = ratio_tails(ratios, q, p)
        log_tail = tails.log_survival()
        hazard = np.exp(tails.log_density() - log_tail)
        excess = log_tail - log_upper[places]
        # In p log(1 + qF/p) the logarithm of the tail is nearly a straight line, which Newton's step wants.
        if math.isinf(p):
            growth = excess / hazard
        else:
            room = 1 + (p / q) / ratios.f
            growth = room * np.expm1(np.clip(excess / (hazard * room), -_LONGEST_STEP, _LONGEST_STEP))
        with np.errstate(over="ignore"):
            return np.minimum(x * np.maximum(1 + growth, 0.01) ** scale.power, _LARGEST)

    points = settled_points(improved, _start(-ndtri(upper), q, scale))
    return np.where(points < _LARGEST, points, np.inf)


def _lower_points(lower: Floats, q: float, p: float, scale: Scale) -> Floats:
    log_lower = np.log(lower)

    def improved(x: Floats, places: Places) -> Floats:
        tails = ratio_tails(scale.ratios(x), q, p)
        log_tail = tails.log_cumulative()
        slope = np.exp(tails.log_density() - log_tail)
        step = np.clip((log_lower[places] - log_tail) / slope, -_LONGEST_STEP, _LONGEST_STEP)
        return x * np.exp(step * scale.power)

    return settled_points(improved, _start(ndtri(lower), q, scale))


def _start(z: Floats, q: float, scale: Scale) -> Floats:
    # Wilson and Hilferty's cube, as if the denominator were known: good enough to begin with.
    spread = 1 / (9 * q)
    return np.maximum(1 - spread + z * math.sqrt(spread), 0.3) ** (3 * scale.power)
