"""From classes of several widths to one histogram a level, for plots."""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from math import floor
from typing import Final

import numpy as np
import numpy.typing as npt

from assayfolio.observations.totals import Density

MOST_CLASSES: Final = 2048


@dataclass(frozen=True, slots=True)
class Classes:
    """Counts a level (rows) and class (columns) of 2^`shift` units of size `unit`, from class `first` on."""

    unit: Fraction
    shift: int
    first: int
    counts: npt.NDArray[np.int64]

    @property
    def width(self) -> Fraction:
        """How wide each class is."""
        return self.unit * (1 << self.shift)

    def middle(self, column: int) -> Fraction:
        """The middle of the numbers that a class may hold."""
        units = 1 << self.shift
        return (Fraction((self.first + column) * units) + Fraction(units - 1, 2)) * self.unit


def density(sources: Sequence[Classes], levels: Sequence[tuple[str, int | None]]) -> Density:
    """The counts of all `sources` together; `levels` are names and rows of the counts, None for no row.

    One source keeps its classes. Of several, every class counts at its middle.
    """
    if not sources:
        return Density(Fraction(0), Fraction(1), tuple((level, ()) for level, _ in levels))
    start, width, counts = _together(sources)
    return Density(
        start,
        width,
        tuple(
            (
                level,
                tuple(counts[row].tolist())
                if row is not None and row < len(counts)
                else (0,) * counts.shape[1],
            )
            for level, row in levels
        ),
    )


def _together(sources: Sequence[Classes]) -> tuple[Fraction, Fraction, npt.NDArray[np.int64]]:
    if len(sources) == 1:
        only = sources[0]
        return only.first * only.width, only.width, only.counts
    lowest = min(source.first * source.width for source in sources)
    highest = max((source.first + source.counts.shape[1]) * source.width for source in sources)
    width = max(*(source.width for source in sources), (highest - lowest) / MOST_CLASSES)
    classes = floor((highest - lowest) / width) + 1
    counts = np.zeros((max(len(source.counts) for source in sources), classes), dtype=np.int64)
    for source in sources:
        for column in range(source.counts.shape[1]):
            at = floor((source.middle(column) - lowest) / width)
            counts[: len(source.counts), at] += source.counts[:, column]
    return lowest, width, counts
