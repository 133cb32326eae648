"""What a report is made from, beside the findings: the facts of the run as plain values.

Everything here is read back from the folio when a report is rendered again.
"""

from dataclasses import dataclass
from typing import Literal

from assayfolio.findings import Findings
from assayfolio.observations.values import Observations
from assayfolio.report.people import PersonFacts, ReplacedFacts
from assayfolio.report.times import ClockFacts
from assayfolio.study.plan import Laboratory, StudyDefinition


@dataclass(frozen=True, slots=True)
class InputFacts:
    """One file that went into the run: what it is, its path in the workspace and in the folio, its digest."""

    role: Literal["study definition", "raw data", "exclusions", "laboratory settings", "people"]
    path: str
    folio_path: str
    size: int
    sha256: str


@dataclass(frozen=True, slots=True)
class PlanVersion:
    """A version of the plan, by the digests of the study definition and of the exclusions, if any.

    `definition` is None where the audit trail does not say which input was the definition.
    """

    definition: str | None
    exclusions: str | None = None


@dataclass(frozen=True, slots=True)
class ElsewhereFacts:
    """Another run that used these data: all of them, or only some."""

    study: str
    run: str
    all_data: bool


@dataclass(frozen=True, slots=True)
class ExecutionFacts:
    """How often the study was executed on exactly these data, as known when the run got its number.

    `number` counts this run; `plan` is its own plan version, `tried` those of the executions before it, in
    their order. `elsewhere` are earlier runs outside this count that used these data or a part of them.
    `void` names those of all these runs that are void, each with the reference of the investigation.
    """

    number: int
    plan: PlanVersion
    tried: tuple[PlanVersion, ...]
    elsewhere: tuple[ElsewhereFacts, ...]
    void: tuple[tuple[str, str], ...] = ()


@dataclass(frozen=True, slots=True)
class ProtocolVersion:
    """One registered plan of the study: its protocol, when and by whom, and what it amends.

    `differences` (key, earlier value, new value) and `reason` are those of an amendment. `after_data` says
    whether data of the study had been seen before.
    """

    name: str
    time: str
    actor: str
    plan_sha256: str
    seal: str
    amends: bool
    after_data: bool
    reason: str | None
    differences: tuple[tuple[str, str | None, str | None], ...]


@dataclass(frozen=True, slots=True)
class EarlierResult:
    """The result on the data of this run under an earlier plan; None with the reason where it has none."""

    protocol: str
    study: StudyDefinition
    findings: Findings | None
    reason: str


@dataclass(frozen=True, slots=True)
class RegistrationFacts:
    """How the plan in use stands to what was registered, when the run got its number.

    `in_use` is the protocol that the plan in use equals, None where none is registered. `data_first_seen` is
    when the first data file of this run was first seen, `study_data_first_seen` when any data of the study
    were. `earlier` holds the results under the plans that were amended after that, oldest first.
    """

    in_use: str | None
    data_first_seen: str | None
    study_data_first_seen: str | None
    protocols: tuple[ProtocolVersion, ...]
    earlier: tuple[EarlierResult, ...]

    @property
    def is_registered(self) -> bool:
        """Whether a plan was registered at all."""
        return self.in_use is not None

    @property
    def before_data(self) -> bool:
        """Whether a first plan was registered before any data of the study were seen."""
        return bool(self.protocols) and not self.protocols[0].after_data

    @property
    def amended_after_data(self) -> bool:
        """Whether a registered plan was amended after data of the study had been seen."""
        return any(one.amends and one.after_data for one in self.protocols)


UNREGISTERED = RegistrationFacts(None, None, None, (), ())
FIRST_EXECUTION = ExecutionFacts(1, PlanVersion(None), (), ())


@dataclass(frozen=True, slots=True)
class RunFacts:
    """The run itself. Times are RFC 3339: `started_utc` ends in Z, `started_local` carries its offset.

    `trail_seq` and `trail_sha256` are the trail head under which the report was made. `software` lists
    (name, version) of what computed and rendered; `native_libraries` the renderer's libraries
    (name, version or short digest). `self_check` says in one sentence what was checked before the run.
    """

    study: str
    number: int
    started_utc: str
    started_local: str
    actor: str
    host: str
    inputs: tuple[InputFacts, ...]
    findings_sha256: str
    trail_seq: int
    trail_sha256: str
    python: str
    platform: str
    software: tuple[tuple[str, str], ...]
    native_libraries: tuple[tuple[str, str], ...]
    self_check: str
    executions: ExecutionFacts = FIRST_EXECUTION
    person: PersonFacts | None = None
    replaces: ReplacedFacts | None = None
    registration: RegistrationFacts = UNREGISTERED
    clock: ClockFacts | None = None

    @property
    def label(self) -> str:
        """The run's name: `run-0001`."""
        return f"run-{self.number:04d}"

    @property
    def study_sha256(self) -> str:
        """The digest of the study definition."""
        return next(item.sha256 for item in self.inputs if item.role == "study definition")


@dataclass(frozen=True, slots=True)
class AttachedFile:
    """A file that travels inside the PDF; `relationship` as PDF 2.0 names it (Source, Data)."""

    name: str
    media_type: str
    description: str
    relationship: Literal["Source", "Data"]
    content: bytes


@dataclass(frozen=True, slots=True)
class ReportInput:
    """All a report is made from; `observations` holds one entry a response, in the order of the findings."""

    study: StudyDefinition
    laboratory: Laboratory
    observations: tuple[Observations, ...]
    findings: Findings
    run: RunFacts
    attachments: tuple[AttachedFile, ...]
