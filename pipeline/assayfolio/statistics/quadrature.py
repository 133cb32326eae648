"""Gauss-Legendre quadrature and piecewise Chebyshev curves, from arithmetic alone.

Nothing here calls a linear-algebra library, so the digits do not depend on which one is installed or on how
many threads it uses. Sums run along the last axis of contiguous arrays: one row does not alter another.
"""

import math
from dataclasses import dataclass
from functools import lru_cache
from typing import Final

import numpy as np

from assayfolio.statistics.arguments import Floats, Places

_NEWTON_STEPS: Final = 8
_BLOCK: Final = 16_384


@lru_cache(maxsize=64)
def gauss_legendre(n: int) -> tuple[Floats, Floats]:
    """Nodes in (-1, 1), rising, and weights of the `n`-point Gauss-Legendre rule. The arrays are read-only.

    Method: Newton's iteration on the Legendre polynomial from Tricomi's estimate (DLMF 18.16, 3.5.19).
    """
    index = np.arange(1, n + 1)
    x = (1 - (n - 1) / (8 * n**3)) * np.cos(math.pi * (4 * index - 1) / (4 * n + 2))
    for _ in range(_NEWTON_STEPS):
        value, slope = _legendre(n, x)
        x = x - value / slope
    _, slope = _legendre(n, x)
    weights = 2 / ((1 - x) * (1 + x) * slope * slope)
    nodes = np.ascontiguousarray(x[::-1])
    weights = np.ascontiguousarray(weights[::-1])
    nodes.flags.writeable = weights.flags.writeable = False
    return nodes, weights


def _legendre(n: int, x: Floats) -> tuple[Floats, Floats]:
    before, value = np.ones_like(x), x
    for degree in range(2, n + 1):
        before, value = value, ((2 * degree - 1) * x * value - (degree - 1) * before) / degree
    return value, n * (before - x * value) / ((1 - x) * (1 + x))


def composite_rule(bounds: Floats, n: int) -> tuple[Floats, Floats]:
    """Nodes and weights of the `n`-point rule on each interval between successive `bounds`."""
    nodes, weights = gauss_legendre(n)
    half = np.diff(bounds)[:, None] / 2
    middle = (bounds[:-1] + bounds[1:])[:, None] / 2
    return (middle + half * nodes).reshape(-1), (half * weights).reshape(-1)


def chebyshev_points(bounds: Floats, n: int) -> Floats:
    """The `n` Chebyshev points of each interval between successive `bounds`; one row an interval."""
    angles = math.pi * (np.arange(n) + 0.5) / n
    half = np.diff(bounds)[:, None] / 2
    return (bounds[:-1] + bounds[1:])[:, None] / 2 - half * np.cos(angles)


@dataclass(frozen=True, slots=True)
class PiecewiseCurve:
    """A smooth function on [`start`, `start` + pieces times `width`], a Chebyshev series on each piece.

    `coefficients` has one row a degree and one column a piece.
    """

    start: float
    width: float
    coefficients: Floats

    @staticmethod
    def through(values: Floats, start: float, width: float) -> "PiecewiseCurve":
        """The curve through `values` at the `chebyshev_points` of pieces of equal `width`, a row a piece."""
        n = values.shape[1]
        angles = math.pi * (np.arange(n) + 0.5) / n
        degrees = np.arange(n)
        basis = np.cos(degrees[:, None] * (math.pi - angles))
        coefficients = 2 / n * np.sum(basis[:, None, :] * values[None, :, :], axis=-1)
        coefficients[0] /= 2
        return PiecewiseCurve(start, width, coefficients)

    def __call__(self, x: Floats) -> Floats:
        """The function at `x`; beyond either end, its value there."""
        flat = x.reshape(-1)
        out = np.empty_like(flat)
        for begin in range(0, flat.size, _BLOCK):
            out[begin : begin + _BLOCK] = self._on_block(flat[begin : begin + _BLOCK])
        return out.reshape(x.shape)

    def _on_block(self, x: Floats) -> Floats:
        pieces = self.coefficients.shape[1]
        place = np.clip((x - self.start) / self.width, 0, pieces)
        piece = np.minimum(place.astype(np.intp), pieces - 1)
        return chebyshev_sums(self.coefficients, piece, 2 * (place - piece) - 1)


def chebyshev_sums(coefficients: Floats, piece: Places, t: Floats) -> Floats:
    """The Chebyshev series in the columns `piece` of `coefficients`, at `t` from -1 to 1.

    Method: Clenshaw's recurrence.
    """
    twice = 2 * t
    later, latest = np.zeros_like(t), np.zeros_like(t)
    for row in coefficients[:0:-1]:
        later, latest = row[piece] + twice * later - latest, later
    values: Floats = coefficients[0][piece] + t * later - latest
    return values
