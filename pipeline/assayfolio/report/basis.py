"""What every part of a report looks at: the input, taken apart once, and the scales its figures share."""

from dataclasses import dataclass
from fractions import Fraction
from functools import cached_property

from assayfolio.errors import RenderingError
from assayfolio.exact import Exact
from assayfolio.findings import ComparisonFamily, ComparisonRow, LevelFindings, ResponseFindings
from assayfolio.report.facts import ReportInput
from assayfolio.report.notation import MINUS, Scale, percent


@dataclass(frozen=True)
class Basis:
    """The input of a report and what is read off it more than once."""

    content: ReportInput

    @cached_property
    def response(self) -> ResponseFindings:
        """The findings on the one response, checked to be about these observations.

        Raises RenderingError where the findings do not count the observations that are to be listed.
        """
        found = self.content.findings.responses
        if len(found) != 1:
            raise RenderingError(f"a report is about one response; the findings have {len(found)}")
        counted = {level.level: level.n for level in found[0].levels}
        listed = dict.fromkeys(counted, 0)
        for row in self.content.observations.rows:
            listed[row.level] = listed.get(row.level, 0) + 1
        if counted != listed:
            raise RenderingError("the findings and the observations do not count the same values")
        return found[0]

    @cached_property
    def levels(self) -> tuple[LevelFindings, ...]:
        """The findings on the levels, in the order of the plan."""
        return self.response.levels

    @cached_property
    def total(self) -> int:
        """N, the number of values analysed."""
        return sum(level.n for level in self.levels)

    @cached_property
    def factor(self) -> str:
        """The name of the factor."""
        return self.content.observations.factor

    @cached_property
    def last_digit(self) -> int:
        """The power of ten of the last digit that was recorded."""
        return min(row.value.exponent for row in self.content.observations.rows)

    @cached_property
    def scale(self) -> Scale:
        """How values and means are printed."""
        ends = [end for level in self.levels for end in (level.minimum, level.maximum)]
        return Scale.of(ends, self.last_digit, self.response.unit)

    @cached_property
    def difference_scale(self) -> Scale:
        """How differences, residuals and standard deviations are printed."""
        sizes: list[Exact | float] = list(self.residuals)
        sizes += [level.mean - self.levels[0].mean for level in self.levels]
        sizes += [row.estimate for family in self.response.comparisons for row in family.rows]
        return Scale.of(sizes, self.last_digit, self.response.unit)

    @cached_property
    def values(self) -> tuple[Fraction, ...]:
        """The values in the order of the file."""
        return tuple(row.value.fraction for row in self.content.observations.rows)

    @cached_property
    def values_by_level(self) -> dict[str, list[Fraction]]:
        """The values of each level in the order of the file."""
        grouped: dict[str, list[Fraction]] = {level.level: [] for level in self.levels}
        for value, row in zip(self.values, self.content.observations.rows, strict=True):
            grouped[row.level].append(value)
        return grouped

    @cached_property
    def residuals(self) -> tuple[Fraction, ...]:
        """Each value minus the exact mean of its level, in the order of the file."""
        means = {level.level: level.mean for level in self.levels}
        rows = self.content.observations.rows
        return tuple(value - means[row.level] for value, row in zip(self.values, rows, strict=True))

    @cached_property
    def confidence(self) -> str:
        """The level of the intervals, 1 - alpha, as per cent."""
        return percent(1 - self.response.alpha)

    @cached_property
    def _pairs(self) -> dict[str, tuple[str, str]]:
        names = [level.level for level in self.levels]
        return {f"{a} - {b}": (a, b) for a in names for b in names if a != b}

    def pair(self, row: ComparisonRow) -> tuple[str, str] | None:
        """The two levels that `row` compares, or None for a contrast."""
        return self._pairs.get(row.label)

    def label(self, row: ComparisonRow) -> str:
        """The label of a comparison as it is printed, with a true minus sign between two levels."""
        pair = self.pair(row)
        return row.label if pair is None else f"{pair[0]} {MINUS} {pair[1]}"


def is_single_step(family: ComparisonFamily) -> bool:
    """Whether the method of `family` comes with intervals."""
    return any(row.ci is not None for row in family.rows)
