"""What the protocol of a study is made from: the plan, what follows from it, and how it was registered."""

from dataclasses import dataclass

from assayfolio.findings import NotReported, PowerFindings
from assayfolio.study.plan import Laboratory, StudyDefinition
from assayfolio.worksheet.rows import WorksheetRow


@dataclass(frozen=True, slots=True)
class ProtocolFacts:
    """The registration. Times are RFC 3339: `started_utc` ends in Z, `started_local` carries its offset.

    `amends`, `amends_time`, `reason` and `differences` (key, earlier value, new value) are those of an
    amendment. `data_first_seen` is None where no data of the study had been seen; `data_present` are the raw
    data files that lay in their place already. `trail_seq` and `trail_sha256` are the trail head under which
    the protocol was made.
    """

    number: int
    started_utc: str
    started_local: str
    actor: str
    host: str
    definition_path: str
    definition_sha256: str
    plan_sha256: str
    order_sha256: str | None
    trail_seq: int
    trail_sha256: str
    amends: str | None
    amends_time: str | None
    reason: str | None
    differences: tuple[tuple[str, str | None, str | None], ...]
    data_first_seen: str | None
    data_present: tuple[str, ...]

    @property
    def label(self) -> str:
        """The protocol's name: `protocol-0001`."""
        return f"protocol-{self.number:04d}"


@dataclass(frozen=True, slots=True)
class ProtocolInput:
    """All that a protocol is made from; `rows` are the worksheet's, in the measuring order, if it has one."""

    study: StudyDefinition
    laboratory: Laboratory
    power: PowerFindings | None
    power_gaps: tuple[NotReported, ...]
    definition: bytes
    rows: tuple[WorksheetRow, ...]
    facts: ProtocolFacts
