"""Counts of integers in classes that widen as needed, level by level, in constant memory."""

from typing import Final

import numpy as np
import numpy.typing as npt

Integers = npt.NDArray[np.int64]

MOST_COUNTS: Final = 1 << 18
MOST_CLASSES: Final = 4096
FEWEST_CLASSES: Final = 16


class Histogram:
    """Classes of 2^`shift` units from class number `base` on; their width is the smallest that has room.

    It depends on the range of the numbers and how many levels there are, not on the order of the numbers.
    """

    def __init__(self) -> None:
        self.shift = 0
        self.base = 0
        self.counts: Integers = np.zeros((0, 0), dtype=np.int64)
        self._range: tuple[int, int] | None = None

    def add(self, levels: Integers, numbers: Integers, level_count: int) -> None:
        """Count `numbers`, each of the level beside it; `level_count` is one more than the largest level."""
        lowest, highest = int(numbers.min()), int(numbers.max())
        if self._range is not None:
            lowest, highest = min(lowest, self._range[0]), max(highest, self._range[1])
        level_count = max(level_count, len(self.counts))
        if (lowest, highest) != self._range or level_count > len(self.counts):
            self._make_room(lowest, highest, level_count)
        classes = self.counts.shape[1]
        flat = levels * classes + ((numbers >> self.shift) - self.base)
        self.counts += np.bincount(flat, minlength=self.counts.size).reshape(self.counts.shape)

    def _make_room(self, lowest: int, highest: int, level_count: int) -> None:
        classes = max(FEWEST_CLASSES, min(MOST_CLASSES, MOST_COUNTS // level_count))
        shift = 0
        while (highest >> shift) - (lowest >> shift) >= classes:
            shift += 1
        base = lowest >> shift
        needed = (highest >> shift) - base + 1
        counts = np.zeros((level_count, min(classes, 2 * needed)), dtype=np.int64)
        if self._range is not None:
            levels, old = np.nonzero(self.counts)
            moved = ((old + self.base) >> (shift - self.shift)) - base
            np.add.at(counts, (levels, moved), self.counts[levels, old])
        self.counts, self.shift, self.base, self._range = counts, shift, base, (lowest, highest)

    @property
    def filled(self) -> Integers:
        """The counts of the classes from the lowest to the highest number."""
        if self._range is None:
            return self.counts
        first = (self._range[0] >> self.shift) - self.base
        last = (self._range[1] >> self.shift) - self.base
        return self.counts[:, first : last + 1]

    @property
    def first(self) -> int:
        """The number of the class that `filled` begins with."""
        return 0 if self._range is None else self._range[0] >> self.shift
