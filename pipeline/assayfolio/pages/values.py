"""What the register's pages show, as plain values.

Texts are given as they are to be read; nothing here is markup. Times are UTC, as the audit trail has them.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from assayfolio.canonical import Json

UNCHANGED = "unchanged"
CHANGED = "changed"
MISSING = "missing"
NOT_READABLE = "not readable"
NOT_SEALED = "not sealed"
DISPOSED = "disposed of"
FOLIO_RESULTS = (UNCHANGED, CHANGED, MISSING, NOT_READABLE, NOT_SEALED, DISPOSED)

NO_RESULT = "no result"


@dataclass(frozen=True, slots=True)
class Head:
    """Number and SHA-256 of the entry of the audit trail up to which something is told."""

    seq: int
    sha256: str


@dataclass(frozen=True, slots=True)
class RunRow:
    """A run as the lists show it.

    `place` counts all runs of the workspace in the order of their allotment, from one. `state` is in words,
    `standing` what else is to be said of it; `overall` and `criteria` say how the overall questions and the
    criteria were answered. The run was execution `execution` of `executions` of its study on the same data;
    both are 0 where it read none. `folio` is one of FOLIO_RESULTS.
    """

    place: int
    study: str
    number: int
    name: str
    lot: str
    title: str
    time: str
    state: str
    standing: str
    overall: str
    criteria: str
    execution: int
    executions: int
    folio: str
    by: str

    @property
    def subject(self) -> str:
        """Study and run, as the audit trail names it."""
        return f"{self.study}/{self.name}"

    def as_json(self) -> dict[str, Json]:
        """The row for the register's memory."""
        return {name: getattr(self, name) for name in self.__slots__}


def row_from_json(value: Mapping[str, Any]) -> RunRow:
    """The row that `RunRow.as_json` gave."""
    return RunRow(**value)


@dataclass(frozen=True, slots=True)
class LevelSeries:
    """What one run says of a response for the small figures: the mean of each level, the residual SD."""

    unit: str
    levels: Mapping[str, float]
    residual_sd: float | None


@dataclass(frozen=True, slots=True)
class RunSeries:
    """The figures of one run by response; `run` is its folder name."""

    run: str
    responses: Mapping[str, LevelSeries]

    def as_json(self) -> dict[str, Json]:
        """The series for the register's memory."""
        return {
            "run": self.run,
            "responses": {
                name: {"unit": one.unit, "levels": dict(one.levels), "residual_sd": one.residual_sd}
                for name, one in self.responses.items()
            },
        }


def series_from_json(value: Mapping[str, Any]) -> RunSeries:
    """The series that `RunSeries.as_json` gave."""
    responses = {name: LevelSeries(**part) for name, part in value["responses"].items()}
    return RunSeries(value["run"], responses)


@dataclass(frozen=True, slots=True)
class Link:
    """A file of a folio: what it is, and its path below the folder that holds studies."""

    words: str
    path: str


@dataclass(frozen=True, slots=True)
class Event:
    """An entry of the audit trail in short."""

    seq: int
    time: str
    action: str
    by: str
    reason: str


@dataclass(frozen=True, slots=True)
class RunPage:
    """All that the page of one run shows beside its row.

    `findings` is the findings document, None where there is none to be relied on. `kin` are the other
    executions of the study on the same data, by folder name.
    """

    row: RunRow
    laboratory: str
    seal: str
    registered: str
    findings: Mapping[str, Any] | None
    folio_notes: tuple[str, ...]
    links: tuple[Link, ...]
    kin: tuple[str, ...]
    events: tuple[Event, ...]


@dataclass(frozen=True, slots=True)
class ProtocolRow:
    """A registered plan: the first pre-registers it, each further one amends."""

    name: str
    time: str
    by: str
    amends: str
    reason: str
    link: Link | None


@dataclass(frozen=True, slots=True)
class StudyRow:
    """A study as the list of studies shows it; `newest` is its newest run's name."""

    study: str
    title: str
    state: str
    runs: int
    newest: str
    time: str
    overall: str
    criteria: str

    def as_json(self) -> dict[str, Json]:
        """The row for the register's memory."""
        return {name: getattr(self, name) for name in self.__slots__}


def study_from_json(value: Mapping[str, Any]) -> StudyRow:
    """The row that `StudyRow.as_json` gave."""
    return StudyRow(**value)


@dataclass(frozen=True, slots=True)
class StudyPage:
    """All that the page of one study shows.

    `newest` are its newest runs, newest first; `series` those that stand, oldest first; `findings` is the
    document of the newest run that came to a result.
    """

    row: StudyRow
    laboratory: str
    protocols: tuple[ProtocolRow, ...]
    newest: tuple[RunRow, ...]
    series: tuple[RunSeries, ...]
    findings: Mapping[str, Any] | None
    links: tuple[Link, ...]


@dataclass(frozen=True, slots=True)
class LaboratoryRow:
    """One of the laboratory's own folios: its name, when it was sealed, what it is about."""

    name: str
    time: str
    about: str
    links: tuple[Link, ...]


@dataclass(frozen=True, slots=True)
class FrontPage:
    """All that the first page shows. `states` counts the runs by state; `faults` those of the trail."""

    laboratory: str
    head: Head
    faults: int
    total: int
    states: tuple[tuple[str, int], ...]
    studies: tuple[StudyRow, ...]
    newest: tuple[RunRow, ...]
    records: tuple[LaboratoryRow, ...]
