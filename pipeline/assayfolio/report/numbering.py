"""Running numbers of tables and figures, and the sections that a report has with their numbers."""

from collections.abc import Iterable
from dataclasses import dataclass
from enum import StrEnum

from assayfolio.findings import ResponseFindings
from assayfolio.report.facts import ReportInput
from assayfolio.study.plan import StudyDefinition


class Part(StrEnum):
    """A part of a report; the value is the anchor of its section."""

    PLAN = "plan"
    REGISTRATION = "registration"
    DEVIATIONS = "deviations"
    DATA = "data"
    EXCLUSIONS = "exclusions"
    LIMITS = "beyond-limits"
    CHECKS = "checks"
    OUTLIERS = "outliers"
    ANOVA = "analysis"
    COMPARISONS = "comparisons"
    EQUIVALENCE = "equivalence"
    SPREAD = "spread"
    PRECISION = "precision"
    CRITERIA = "criteria"
    NOT_REPORTED = "not-reported"
    METHOD = "method"
    PROVENANCE = "provenance"
    LISTING = "listing"


@dataclass(frozen=True, slots=True)
class SectionPlace:
    """Where a section stands: its number and its anchor."""

    number: int
    anchor: str


class Outline:
    """The sections of one report, numbered consecutively: only those that apply.

    Those on a response come once for each response, one response after the other.
    """

    def __init__(self, content: ReportInput) -> None:
        responses = content.findings.responses
        self._places: dict[tuple[Part, int | None], SectionPlace] = {}
        self._add((Part.PLAN,), None)
        if content.run.registration.is_registered:
            self._add((Part.REGISTRATION,), None)
        if content.findings.deviations:
            self._add((Part.DEVIATIONS,), None)
        for index, found in enumerate(responses):
            self._add(_parts_of(content.study, found), index)
        self._add((Part.NOT_REPORTED, Part.METHOD, Part.PROVENANCE, Part.LISTING), None)

    def _add(self, parts: Iterable[Part], response: int | None) -> None:
        suffix = f"-of-{response + 1}" if response else ""
        for part in parts:
            place = SectionPlace(len(self._places) + 1, part.value + suffix)
            self._places[part, response] = place

    def place(self, part: Part, response: int = 0) -> SectionPlace:
        """The place of a part of the report, or of its section on one response.

        Raises KeyError where the report has no such section.
        """
        return self._places.get((part, None)) or self._places[part, response]

    def has(self, part: Part, response: int = 0) -> bool:
        """Whether the report has such a section."""
        return (part, None) in self._places or (part, response) in self._places


def _parts_of(study: StudyDefinition, found: ResponseFindings) -> list[Part]:
    about = (None, found.response)
    applies = {
        Part.DATA: True,
        Part.EXCLUSIONS: found.without_exclusions is not None,
        Part.LIMITS: found.censoring is not None,
        Part.CHECKS: True,
        Part.OUTLIERS: study.outliers is not None,
        Part.ANOVA: True,
        Part.COMPARISONS: bool(study.comparisons),
        Part.EQUIVALENCE: any(plan.response in about for plan in study.equivalence),
        Part.SPREAD: study.spread is not None,
        Part.PRECISION: study.precision is not None and study.precision.estimate,
        Part.CRITERIA: any(plan.response in about for plan in study.criteria),
    }
    return [part for part, is_planned in applies.items() if is_planned]


class Numbering:
    """Hands out "Table 1", "Table 2" ... and "Figure 1" ... in the order in which they are asked for."""

    def __init__(self) -> None:
        self._tables = 0
        self._figures = 0

    def table(self) -> str:
        """The label of the next table."""
        self._tables += 1
        return f"Table {self._tables}"

    def figure(self) -> str:
        """The label of the next figure."""
        self._figures += 1
        return f"Figure {self._figures}"
