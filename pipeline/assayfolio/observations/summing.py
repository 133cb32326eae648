"""All values of one response, summed as they come: the numbers of long texts, whose rows are not kept."""

from collections.abc import Mapping, Sequence
from fractions import Fraction
from math import gcd, lcm

import numpy as np
import numpy.typing as npt

from assayfolio.exact import Decimal10, ExactSums
from assayfolio.observations.densities import Classes, density
from assayfolio.observations.histograms import Histogram
from assayfolio.observations.tallies import DISTINCT_VALUES, MOST_ROWS, UnitTally
from assayfolio.observations.totals import LevelTotals, Totals

Integers = npt.NDArray[np.int64]
Summed = tuple[ExactSums, Fraction, Fraction]

_LARGEST = 10**18
_KEPT_DIGITS = 17


class Summing:
    """Sums, extremes, steps and classes of the values of one response; levels are numbers from zero on."""

    def __init__(self) -> None:
        self._tallies: dict[int, UnitTally] = {}
        self._wide = _WideValues()

    def add(self, exponent: int, levels: Integers, mantissas: Integers, level_count: int) -> None:
        """Take values of one power of ten with less than 19 digits, each of the level beside it."""
        for start in range(0, len(mantissas), MOST_ROWS):
            part = slice(start, start + MOST_ROWS)
            tally = self._tallies.setdefault(exponent, UnitTally(exponent, int(mantissas[start])))
            tally.add(levels[part], mantissas[part], level_count)

    def add_values(self, levels: Sequence[int], values: Sequence[Decimal10], level_count: int) -> None:
        """Take values of any size."""
        by_exponent: dict[int, tuple[list[int], list[int]]] = {}
        for level, value in zip(levels, values, strict=True):
            if abs(value.mantissa) >= _LARGEST:
                self._wide.add(level, value, level_count)
                continue
            own = by_exponent.setdefault(value.exponent, ([], []))
            own[0].append(level)
            own[1].append(value.mantissa)
        for exponent, (at, mantissas) in by_exponent.items():
            self.add(exponent, np.array(at, np.int64), np.array(mantissas, np.int64), level_count)

    def totals(self, levels: Sequence[str], numbers: Mapping[str, int]) -> Totals:
        """The totals of `levels`, whose numbers are `numbers`; a level without a number has no value."""
        summed = [
            LevelTotals(level, *found)
            for level in levels
            if level in numbers and (found := self._of_level(numbers[level])) is not None
        ]
        finest = min((*self._tallies, *self._wide.exponents), default=0)
        return Totals(
            levels=tuple(summed),
            places=max(0, -finest),
            step=self._step(finest),
            density=density(self._classes(), [(level, numbers.get(level)) for level in levels]),
        )

    def _of_level(self, level: int) -> Summed | None:
        parts = [tally.totals(level) for tally in self._tallies.values()] + [self._wide.totals(level)]
        found = [part for part in parts if part is not None]
        if not found:
            return None
        sums, lowest, highest = found[0]
        for more, low, high in found[1:]:
            sums, lowest, highest = sums.merged(more), min(lowest, low), max(highest, high)
        return sums, lowest, highest

    def _step(self, finest: int) -> Fraction:
        """One unit of the finest place, or the largest step that all of enough different values have."""
        unit = Fraction(10) ** finest
        distinct = set(self._wide.distinct)
        steps, origins = [self._wide.step], list(self._wide.origins)
        for exponent, tally in self._tallies.items():
            own = Fraction(10) ** exponent
            distinct.update((tally.origin + shifted) * own for shifted in tally.distinct)
            steps.append(tally.step * own)
            origins.append(tally.origin * own)
        if len(distinct) < DISTINCT_VALUES:
            return unit
        steps.extend(abs(origin - origins[0]) for origin in origins[1:])
        step = Fraction(0)
        for more in steps:
            step = common_step(step, more)
        return step

    def _classes(self) -> list[Classes]:
        fine = [(tally.exponent, tally.histogram) for tally in self._tallies.values()]
        return [
            Classes(Fraction(10) ** exponent, histogram.shift, histogram.first, histogram.filled)
            for exponent, histogram in [*fine, *self._wide.histograms.items()]
        ]


class _WideValues:
    """Values that do not fit into 64 bits, in Python's integers."""

    def __init__(self) -> None:
        self.exponents: set[int] = set()
        self.distinct: set[Fraction] = set()
        self.step = Fraction(0)
        self.origins: list[Fraction] = []
        self.histograms: dict[int, Histogram] = {}
        self._summed: dict[int, Summed] = {}

    def add(self, level: int, value: Decimal10, level_count: int) -> None:
        number = value.fraction
        sums = ExactSums.of([value])
        known = self._summed.get(level)
        if known is None:
            self._summed[level] = (sums, number, number)
        else:
            self._summed[level] = (known[0].merged(sums), min(known[1], number), max(known[2], number))
        self.exponents.add(value.exponent)
        if len(self.distinct) < DISTINCT_VALUES:
            self.distinct.add(number)
        if not self.origins:
            self.origins.append(number)
        self.step = common_step(self.step, abs(number - self.origins[0]))
        dropped = len(str(abs(value.mantissa))) - _KEPT_DIGITS
        histogram = self.histograms.setdefault(value.exponent + dropped, Histogram())
        leading = value.mantissa // 10**dropped
        histogram.add(np.array([level], np.int64), np.array([leading], np.int64), level_count)

    def totals(self, level: int) -> Summed | None:
        return self._summed.get(level)


def common_step(one: Fraction, other: Fraction) -> Fraction:
    """The largest number that both are whole multiples of; neither is negative, zero is a multiple of all."""
    under = lcm(one.denominator, other.denominator)
    return Fraction(gcd(int(one * under), int(other * under)), under)
