"""What can be signed: the sealed report of a run or of a protocol, and the fields that its plan provides."""

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Literal

from assayfolio.canonical import sha256_hex
from assayfolio.errors import Fault, InputError, Place
from assayfolio.evidence.entries import TrailEntry
from assayfolio.evidence.files import plain_reason, read_regular
from assayfolio.evidence.history import split_subject
from assayfolio.evidence.manifest import TAG_MANIFEST_FILE
from assayfolio.evidence.moves import Move, Rules, why_not
from assayfolio.evidence.protocols import split_protocol
from assayfolio.evidence.sign_moves import protocol_standing, why_not_sign_protocol
from assayfolio.evidence.sign_offs import FOLDER, REPORT, REPORTS
from assayfolio.evidence.states import study_standing
from assayfolio.study.plan import StudyDefinition
from assayfolio.study.reading import read_study
from assayfolio.workflow.workspace import Workspace, shown_path

STUDY_FILE = "data/study.yaml"


@dataclass(frozen=True, slots=True)
class Signable:
    """A folio whose report can be signed. `subject` is "STUDY/run-0001" or "STUDY/protocol-0001"."""

    subject: str
    study: str
    kind: Literal["run", "protocol"]
    folio: Path

    def read(self, path: str) -> bytes:
        """The bytes of one of its files. Raises InputError where it cannot be read."""
        try:
            return read_regular(self.folio / path)
        except OSError as error:
            raise InputError(f"{self.subject}/{path} cannot be read: {plain_reason(error)}.") from error

    @property
    def unsigned(self) -> bytes:
        """The sealed report."""
        return self.read(REPORTS[self.kind])

    @property
    def newest(self) -> bytes:
        """The report with the signatures that it has."""
        if (self.folio / FOLDER / REPORT).exists():
            return self.read(f"{FOLDER}/{REPORT}")
        return self.unsigned

    @property
    def seal(self) -> str:
        """The folio's seal."""
        return sha256_hex(self.read(TAG_MANIFEST_FILE))

    @property
    def definition(self) -> StudyDefinition:
        """The plan as it was sealed."""
        return read_study(self.read(STUDY_FILE), f"{self.subject}/{STUDY_FILE}")

    def why_not(self, entries: Sequence[TrailEntry], account: str, role: str, rules: Rules) -> str | None:
        """Why `account` cannot sign it in `role` now, by the trail; None where he can."""
        move = Move("sign", account, role)
        if self.kind == "protocol":
            return why_not_sign_protocol(move, protocol_standing(entries, self.subject), rules)
        study = study_standing(entries, self.study)
        return why_not(move, study, study.run(self.subject), rules)


@dataclass(frozen=True, slots=True)
class Field:
    """A signature field of the report: its name, the role, and the meaning that the plan fixed."""

    name: str
    role: str
    meaning: str


def fields_of(definition: StudyDefinition) -> tuple[Field, ...]:
    """The fields in the order of the plan; a role's second one has a number after its name."""
    seen: dict[str, int] = {}
    found = []
    for item in definition.sign_off:
        seen[item.role] = seen.get(item.role, 0) + 1
        name = item.role if seen[item.role] == 1 else f"{item.role}-{seen[item.role]}"
        found.append(Field(name, item.role, item.meaning))
    return tuple(found)


def signable(workspace: Workspace, named: Path) -> Signable:
    """The run or protocol whose folio is `named`, as a path or as STUDY/run-0001.

    Raises InputError where it is not the place of one in this workspace.
    """
    place = named.resolve()
    inside = place.relative_to(workspace.runs) if place.is_relative_to(workspace.runs) else named
    subject = inside.as_posix()
    run, protocol = split_subject(subject), split_protocol(subject)
    found = run or protocol
    if found is None or not (workspace.runs / subject).is_dir():
        advice = "name one, such as runs/LOT-7/run-0001 or runs/LOT-7/protocol-0001"
        fault = Fault(Place(shown_path(named)), "is not the folio of a run or a protocol", advice)
        raise InputError("There is nothing to sign.", (fault,))
    return Signable(subject, found[0], "protocol" if run is None else "run", workspace.runs / subject)
