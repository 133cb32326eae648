"""What every part of a report looks at: the input, taken apart once, and the scales its figures share."""

from dataclasses import dataclass
from fractions import Fraction
from functools import cached_property
from typing import Protocol

from assayfolio.errors import RenderingError
from assayfolio.exact import Exact, Root, magnitude, to_double
from assayfolio.findings import ComparisonFamily, LevelFindings, ResponseFindings
from assayfolio.findings_intake import FlowFindings
from assayfolio.observations.totals import Totals
from assayfolio.observations.values import Observations
from assayfolio.report.facts import ReportInput
from assayfolio.report.notation import MINUS, Scale, percent
from assayfolio.report.numbering import Outline, Part, SectionPlace
from assayfolio.study.plan import Criterion, EquivalencePlan, StudyDefinition


class Labelled(Protocol):
    """A row with the label of a comparison."""

    @property
    def label(self) -> str:
        """The label as in the findings."""


@dataclass(frozen=True)
class Basis:
    """The input of a report as seen from one response, and what is read off it more than once."""

    content: ReportInput
    index: int = 0

    @staticmethod
    def of_each(content: ReportInput) -> "tuple[Basis, ...]":
        """A basis for each response, in the order of the findings.

        Raises RenderingError where there is no response, or not one set of observations for each.
        """
        count = len(content.findings.responses)
        if not count or count != len(content.observations):
            raise RenderingError(
                f"the findings are on {count} responses, the observations on {len(content.observations)}"
            )
        return tuple(Basis(content, index) for index in range(count))

    @cached_property
    def response(self) -> ResponseFindings:
        """The findings on the response, checked to be about these observations.

        Raises RenderingError where the findings do not count the observations that are to be listed.
        """
        found = self.content.findings.responses[self.index]
        if found.response != self.observations.response:
            raise RenderingError("the findings and the observations are not about the same response")
        counted = {level.level: level.n for level in found.levels}
        listed = dict.fromkeys(counted, 0)
        for row in self.observations.rows:
            listed[row.level] = listed.get(row.level, 0) + 1
        if self.totals is not None:
            listed = {level.level: level.sums.n for level in self.totals.levels}
        if counted != listed:
            raise RenderingError("the findings and the observations do not count the same values")
        return found

    @cached_property
    def flow(self) -> tuple[FlowFindings, ...]:
        """The counts of each level from received to analysed.

        Raises RenderingError where they are not there, do not add up, or end in other numbers of values than
        the levels have.
        """
        for counts in self.response.flow:
            left_out = counts.missing + counts.below_limit + counts.above_limit + counts.excluded
            if counts.received - left_out - counts.merged != counts.analysed:
                raise RenderingError(f"the counts of {counts.level} do not add up")
        if [(counts.level, counts.analysed) for counts in self.response.flow] != [
            (level.level, level.n) for level in self.levels
        ]:
            raise RenderingError("the counts of values are not those of the levels")
        return self.response.flow

    def spot(self, file: int, line: int) -> str:
        """Where a value stands: its line, behind the number of its file where there are several."""
        return f"{file + 1}:{line}" if len(self.observations.files) > 1 else str(line)

    @cached_property
    def line_word(self) -> str:
        """What the place of a value is called: a row in spreadsheets, else a line."""
        return "row" if all(raw.form == "spreadsheet" for raw in self.observations.files) else "line"

    @cached_property
    def observations(self) -> Observations:
        """The observations of the response."""
        return self.content.observations[self.index]

    @property
    def totals(self) -> Totals | None:
        """What is known of the values where they are too many to be kept one by one."""
        return self.observations.totals

    @cached_property
    def study(self) -> StudyDefinition:
        """The study definition."""
        return self.content.study

    @cached_property
    def several(self) -> bool:
        """Whether the study has several responses."""
        return len(self.content.findings.responses) > 1

    @cached_property
    def outline(self) -> Outline:
        """The sections of the report."""
        return Outline(self.content)

    def place(self, part: Part) -> SectionPlace:
        """The place of a section on this response, or of one that all responses share."""
        return self.outline.place(part, self.index)

    def anchor(self, name: str) -> str:
        """An anchor of this response's own."""
        return f"{name}-of-{self.index + 1}" if self.index else name

    def file(self, name: str) -> str:
        """The name of a figure's file; with several responses it says which one the figure is on."""
        return f"response-{self.index + 1}-{name}" if self.several else name

    def title(self, words: str) -> str:
        """The title of a section; with several responses it names the one it is on."""
        return f"{words}: {self.response.response}" if self.several else words

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
        return self.observations.factor

    @cached_property
    def is_random(self) -> bool:
        """Whether the levels are a sample of those that could have been chosen."""
        return self.study.design.effects == "random"

    @cached_property
    def is_separate(self) -> bool:
        """Whether each level has an error variance of its own."""
        return self.study.design.variances == "separate"

    @cached_property
    def equivalence_plans(self) -> tuple[EquivalencePlan, ...]:
        """The planned equivalence families on this response."""
        about = (None, self.response.response)
        return tuple(plan for plan in self.study.equivalence if plan.response in about)

    @cached_property
    def criteria_plans(self) -> tuple[Criterion, ...]:
        """The planned acceptance criteria on this response."""
        about = (None, self.response.response)
        return tuple(plan for plan in self.study.criteria if plan.response in about)

    @cached_property
    def last_digit(self) -> int:
        """The power of ten of the last digit that was recorded."""
        if self.totals is not None:
            return min(level.sums.exponent for level in self.totals.levels)
        return min(row.value.exponent for row in self.observations.rows)

    @cached_property
    def scale(self) -> Scale:
        """How values and means are printed."""
        ends = [end for level in self.levels for end in (level.minimum, level.maximum)]
        return Scale.of(ends, self.last_digit, self.response.unit).no_finer_than(self.finest_error)

    @cached_property
    def finest_error(self) -> Root:
        """The smallest standard error of a level's mean, of those that are not zero; zero where none is."""
        within = self.response.anova.within.ms or Fraction(0)
        squares = [
            (level.sd.square if level.sd else Fraction(0)) / level.n if self.is_separate else within / level.n
            for level in self.levels
        ]
        return Root.of(min((square for square in squares if square), default=Fraction(0)))

    @cached_property
    def difference_scale(self) -> Scale:
        """How differences, residuals and standard deviations are printed."""
        sizes: list[Exact | float] = list(self.residuals)
        if self.totals is not None:
            sizes = [end - level.mean for level in self.levels for end in (level.minimum, level.maximum)]
        sizes += [level.mean - self.levels[0].mean for level in self.levels]
        sizes += [row.estimate for family in self.response.comparisons for row in family.rows]
        scale = Scale.of(sizes, self.last_digit, self.response.unit)
        return scale.no_finer_than(self.finest_error)

    @cached_property
    def percent_scale(self) -> Scale:
        """How differences in percent of a mean are printed: as fine as those in units, within reason."""
        largest = max(abs(level.mean) for level in self.levels)
        last = magnitude(100 * Fraction(10) ** self.last_digit / largest) if largest else 0
        scale = Scale.of([Fraction(100)], max(-3, min(0, last)), "%")
        if not largest:
            return scale
        return scale.no_finer_than(Root.of(10_000 * self.finest_error.square / largest**2))

    @cached_property
    def values(self) -> tuple[Fraction, ...]:
        """The values in the order of the file."""
        return tuple(row.value.fraction for row in self.observations.rows)

    @cached_property
    def measuring_order(self) -> tuple[int, ...] | None:
        """The place of each value in the measuring order, counted from one; None where it is not known."""
        numbers = [row.order for row in self.observations.rows]
        known = [number for number in numbers if number is not None]
        if len(known) < len(numbers):
            return None
        place = {number: rank for rank, number in enumerate(sorted(known), start=1)}
        return tuple(place[number] for number in known)

    @cached_property
    def values_by_level(self) -> dict[str, list[Fraction]]:
        """The values of each level in the order of the file."""
        grouped: dict[str, list[Fraction]] = {level.level: [] for level in self.levels}
        for value, row in zip(self.values, self.observations.rows, strict=True):
            grouped[row.level].append(value)
        return grouped

    def weighted_values(self, level: str) -> list[tuple[Fraction, int]]:
        """Where the values of a level lie, and how many in each place; classes where they are not kept."""
        if self.totals is None:
            return [(value, 1) for value in self.values_by_level[level]]
        return self.totals.density.middles(level)

    @cached_property
    def residuals(self) -> tuple[Fraction, ...]:
        """Each value minus the exact mean of its level, in the order of the file."""
        means = {level.level: level.mean for level in self.levels}
        rows = self.observations.rows
        return tuple(value - means[row.level] for value, row in zip(self.values, rows, strict=True))

    @cached_property
    def scaled_residuals(self) -> tuple[Fraction, ...]:
        """Each residual over the standard deviation of its own level, to double precision.

        Levels without a standard deviation, or with one of zero, have none.
        """
        sds = {level.level: to_double(level.sd) for level in self.levels if level.sd and level.sd.sign}
        rows = self.observations.rows
        return tuple(
            Fraction(to_double(residual) / sds[row.level])
            for residual, row in zip(self.residuals, rows, strict=True)
            if row.level in sds
        )

    @cached_property
    def confidence(self) -> str:
        """The level of the intervals, 1 - alpha, as per cent."""
        return percent(1 - self.response.alpha)

    @cached_property
    def _pairs(self) -> dict[str, tuple[str, str]]:
        names = [level.level for level in self.levels]
        return {f"{a} - {b}": (a, b) for a in names for b in names if a != b}

    def pair(self, row: Labelled) -> tuple[str, str] | None:
        """The two levels that `row` compares, or None for a contrast."""
        return self._pairs.get(row.label)

    def label(self, row: Labelled) -> str:
        """The label of a comparison as it is printed, with a true minus sign between two levels."""
        pair = self.pair(row)
        return row.label if pair is None else f"{pair[0]} {MINUS} {pair[1]}"


def is_single_step(family: ComparisonFamily) -> bool:
    """Whether the method of `family` comes with intervals."""
    return any(row.ci is not None for row in family.rows)
