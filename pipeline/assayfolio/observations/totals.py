"""What is kept of a response whose values are too many to be kept one by one.

Sums, extremes and recorded steps are exact; the classes of a histogram are for plots alone.
"""

from dataclasses import dataclass
from fractions import Fraction

from assayfolio.exact import ExactSums


@dataclass(frozen=True, slots=True)
class LevelTotals:
    """The values of one level: their exact sums, the smallest and the largest of them."""

    level: str
    sums: ExactSums
    lowest: Fraction
    highest: Fraction


@dataclass(frozen=True, slots=True)
class Density:
    """How many values lie in classes of equal width, level by level.

    Class number i holds start + i * width <= value < start + (i + 1) * width; every level has as many counts
    as there are classes, and they add up to the number of its values. Where values were recorded with
    different numbers of decimal places, one that lies within a thousandth of the range of the border of its
    class may count in the next one.
    """

    start: Fraction
    width: Fraction
    counts: tuple[tuple[str, tuple[int, ...]], ...]

    def middles(self, level: str) -> list[tuple[Fraction, int]]:
        """The middle of each class that holds any value of `level`, and how many it holds."""
        half = self.width / 2
        counts = dict(self.counts)[level]
        return [(self.start + at * self.width + half, count) for at, count in enumerate(counts) if count]

    @property
    def edges(self) -> tuple[Fraction, ...]:
        """The borders of the classes, one more than there are classes."""
        classes = len(self.counts[0][1]) if self.counts else 0
        return tuple(self.start + at * self.width for at in range(classes + 1))


@dataclass(frozen=True, slots=True)
class Totals:
    """All values of one response.

    `levels` come in the order of the observations; one without any value has no totals. `places` is the
    largest number of decimal places recorded, `step` the unit that all recorded values are multiples of: one
    of the finest recorded place, or the largest common one where at least 8 different values have it.
    `density` has the values in fine classes, a few hundred to a few thousand.
    """

    levels: tuple[LevelTotals, ...]
    places: int
    step: Fraction
    density: Density

    @property
    def n(self) -> int:
        """The number of values."""
        return sum(level.sums.n for level in self.levels)
