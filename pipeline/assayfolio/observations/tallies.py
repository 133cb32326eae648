"""Exact sums, extremes and steps of many integers, level by level.

Sums of doubles are sums of integers as long as none of the partial sums reaches 2^53. Each call of `add`
makes sure of that for its own rows and hands on Python's integers, so that nothing is ever rounded.
"""

from fractions import Fraction
from math import gcd
from typing import Any, Final

import numpy as np
import numpy.typing as npt

from assayfolio.exact import Decimal10, ExactSums
from assayfolio.observations.histograms import Histogram

Integers = npt.NDArray[np.int64]

MOST_ROWS: Final = 1 << 20
"""How many rows one call may bring; 2^20 products of 32 bits stay below 2^53."""

DISTINCT_VALUES: Final = 8
"""Fewer different values may have a common multiple by chance."""

_LIMB: Final = 16
_FIRST: Final = 1000
_EXACT: Final = 1 << 53


class UnitTally:
    """Numbers that count units of ten to the power `exponent`."""

    def __init__(self, exponent: int, origin: int) -> None:
        self.exponent = exponent
        self.origin = origin
        self.step = 0
        self.distinct: set[int] = set()
        self.histogram = Histogram()
        self._n: list[int] = []
        self._sums: list[int] = []
        self._squares: list[int] = []
        self._lowest: Integers = np.zeros(0, dtype=np.int64)
        self._highest: Integers = np.zeros(0, dtype=np.int64)

    def add(self, levels: Integers, numbers: Integers, level_count: int) -> None:
        """Take `numbers` of less than 19 digits, each of the level beside it, up to MOST_ROWS of them.

        `level_count` is more than any of the levels.
        """
        self._grow(level_count)
        shifted = numbers - self.origin
        counts = np.bincount(levels, minlength=level_count)
        largest = int(np.abs(shifted).max())
        sums = exact_sums(levels, shifted, level_count, largest)
        squares = exact_squares(levels, shifted, level_count, largest)
        for level in np.flatnonzero(counts):
            self._n[level] += int(counts[level])
            self._sums[level] += sums[level]
            self._squares[level] += squares[level]
        for extreme, beyond in ((self._lowest, np.less), (self._highest, np.greater)):
            rows = np.flatnonzero(beyond(shifted, extreme[levels]))
            if len(rows):
                (np.minimum if beyond is np.less else np.maximum).at(extreme, levels[rows], shifted[rows])
        self.histogram.add(levels, numbers, level_count)
        self._find_step(shifted)

    def totals(self, level: int) -> tuple[ExactSums, Fraction, Fraction] | None:
        """Exact sums, smallest and largest value of a level; None where it has none."""
        if level >= len(self._n) or not self._n[level]:
            return None
        n, origin = self._n[level], self.origin
        total = self._sums[level] + n * origin
        squares = self._squares[level] + 2 * origin * self._sums[level] + n * origin * origin
        lowest = Decimal10(int(self._lowest[level]) + origin, self.exponent).fraction
        highest = Decimal10(int(self._highest[level]) + origin, self.exponent).fraction
        return ExactSums(n, total, squares, self.exponent), lowest, highest

    def _grow(self, level_count: int) -> None:
        more = level_count - len(self._n)
        if more > 0:
            limits = np.iinfo(np.int64)
            for numbers in (self._n, self._sums, self._squares):
                numbers.extend([0] * more)
            self._lowest = np.append(self._lowest, np.full(more, limits.max, dtype=np.int64))
            self._highest = np.append(self._highest, np.full(more, limits.min, dtype=np.int64))

    def _find_step(self, shifted: Integers) -> None:
        """Keep the greatest common divisor of all differences from the origin, and a few distinct ones."""
        if len(self.distinct) < DISTINCT_VALUES:
            few = shifted[:_FIRST]
            if len(np.unique(few)) < DISTINCT_VALUES:
                few = shifted
            self.distinct.update(np.unique(few)[:DISTINCT_VALUES].tolist())
        if self.step == 1:
            return
        if not self.step:
            self.step = int(np.gcd.reduce(shifted[:_FIRST]))
        off = shifted % self.step != 0 if self.step else shifted != 0
        if off.any():
            self.step = gcd(self.step, int(np.gcd.reduce(shifted[off])))


def exact_sums(levels: Integers, numbers: Integers, level_count: int, largest: int) -> list[int]:
    """The sum of `numbers` of each level, exactly; none is larger in size than `largest`."""
    if len(numbers) > MOST_ROWS:
        raise ValueError(f"more than {MOST_ROWS} rows at once")
    if largest * len(numbers) < _EXACT:
        return _whole(np.bincount(levels, weights=numbers, minlength=level_count))
    low = numbers & 0xFFFFFFFF
    high = numbers >> 32  # the sign goes with the upper half
    lows = _whole(np.bincount(levels, weights=low, minlength=level_count))
    highs = _whole(np.bincount(levels, weights=high, minlength=level_count))
    return [(upper << 32) + lower for upper, lower in zip(highs, lows, strict=True)]


def exact_squares(levels: Integers, numbers: Integers, level_count: int, largest: int) -> list[int]:
    """The sum of the squares of `numbers` of each level, exactly; none is larger in size than `largest`."""
    if len(numbers) > MOST_ROWS:
        raise ValueError(f"more than {MOST_ROWS} rows at once")
    if largest * largest * len(numbers) < _EXACT:
        return _whole(np.bincount(levels, weights=numbers * numbers, minlength=level_count))
    sizes = np.abs(numbers)
    limbs = [(sizes >> shift) & 0xFFFF for shift in range(0, max(1, largest.bit_length()), _LIMB)]
    squares = [0] * level_count
    for one, limb in enumerate(limbs):
        for other in range(one, len(limbs)):
            shift = _LIMB * (one + other) + (one != other)
            part = _whole(np.bincount(levels, weights=limb * limbs[other], minlength=level_count))
            squares = [square + (more << shift) for square, more in zip(squares, part, strict=True)]
    return squares


def _whole(sums: npt.NDArray[Any]) -> list[int]:
    return [int(total) for total in sums.tolist()]
