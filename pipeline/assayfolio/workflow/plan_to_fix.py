"""A plan that is to be registered, read and found in order, with what follows from it alone."""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

from assayfolio.errors import MachineError
from assayfolio.evidence.entries import TrailEntry
from assayfolio.evidence.files import digest_regular
from assayfolio.evidence.register import ReceivedFile
from assayfolio.findings import NotReported, PowerFindings
from assayfolio.planning.plan_power import plan_power
from assayfolio.study.plan import Laboratory, StudyDefinition
from assayfolio.workflow.intake import AnyInput, SeenFiles, read_plan
from assayfolio.workflow.raw_files import named_raw_files
from assayfolio.workflow.registration import data_first_seen
from assayfolio.workflow.worksheet import worksheet_contents
from assayfolio.workflow.workspace import Workspace
from assayfolio.worksheet.rows import order_digest, planned_rows


@dataclass(frozen=True, slots=True)
class PlanToFix:
    """A plan that was read and found in order, and what follows from it alone.

    `worksheet` holds its files by the end of their names, `order_sha256` is the digest of its order; empty
    and None where the study has none. `data_present` are the raw data files that lie there already.
    """

    workspace: Workspace
    study: StudyDefinition
    laboratory: Laboratory
    files: tuple[AnyInput, ...]
    power: PowerFindings | None
    power_gaps: tuple[NotReported, ...]
    worksheet: Mapping[str, bytes]
    order_sha256: str | None
    data_present: tuple[tuple[str, str], ...]

    @property
    def definition_sha256(self) -> str:
        """The digest of the study definition's bytes."""
        return next(file.sha256 for file in self.files if file.role == "study definition")

    def first_seen(self, entries: Sequence[TrailEntry]) -> ReceivedFile | None:
        """The entry by which data of the study were first seen; None where none were."""
        paths = [path for path, _ in self.data_present]
        return data_first_seen(entries, self.study.study, [digest for _, digest in self.data_present], paths)


def plan_to_fix(workspace: Workspace, study_path: Path) -> PlanToFix:
    """Read the plan in `study_path` and make what follows from it.

    Raises InputError with all faults of the plan.
    """
    seen = SeenFiles()
    study, laboratory = read_plan(workspace, study_path, seen)
    definition = next(file.sha256 for file in seen.files if file.role == "study definition")
    power, gaps = plan_power(study)
    worksheet: dict[str, bytes] = {}
    order = None
    if study.worksheet is not None:
        rows = planned_rows(study)
        order = order_digest(study, rows)
        worksheet = worksheet_contents(study, laboratory, definition, rows, order)
    present = tuple(_present(workspace, study_path, study))
    return PlanToFix(workspace, study, laboratory, tuple(seen.files), power, gaps, worksheet, order, present)


def _present(workspace: Workspace, study_path: Path, study: StudyDefinition) -> Iterator[tuple[str, str]]:
    for path in named_raw_files(workspace, study_path, study.data):
        real = path.resolve()
        if real.is_file() and real.is_relative_to(workspace.root):
            try:
                yield workspace.name_of(real), digest_regular(real)
            except OSError as error:
                raise MachineError(f"{path}: the data file cannot be read: {error.strerror}.") from error
