"""The command `rerun`: verify the folio, compute it again, and leave a record of it."""

from dataclasses import dataclass
from pathlib import Path

from assayfolio.errors import ChangedError, ExitCode, InputError
from assayfolio.evidence.outcomes import Verification
from assayfolio.evidence.trail import read_trail
from assayfolio.evidence.verification import verify_lone_folios, verify_workspace
from assayfolio.report.pdf import Look
from assayfolio.report.record_page import PLAIN
from assayfolio.workflow.archived_environment import ArchivedEnvironmentOptions, rerun_archived
from assayfolio.workflow.laboratory_folio import SealedRecord, seal_in_folder, seal_in_workspace
from assayfolio.workflow.rerun import Rerun, rerun
from assayfolio.workflow.rerun_record import RerunRecord, as_record
from assayfolio.workflow.surroundings import look_around
from assayfolio.workflow.workspace import Workspace, find_workspace, shown_path


@dataclass(frozen=True, slots=True)
class Destination:
    """Where a record goes: into a workspace, or into a folder of somebody who has none."""

    workspace: Workspace | None
    folder: Path | None


def destination(folio: Path, named_workspace: Path | None, output: Path | None) -> Destination:
    """Where the record of a re-run of `folio` goes, and with it which trail it is verified against.

    Raises InputError where there is no workspace and no output, or the output lies in the folio.
    """
    workspace = None
    try:
        workspace = find_workspace(named_workspace, folio)
    except InputError:
        if named_workspace is not None:
            raise
        if output is None:
            raise InputError(
                f"{shown_path(folio)} lies in no workspace, so say where the record of the re-run goes: "
                "--output DIR. To compare with the laboratory's audit trail, too: --workspace DIR."
            ) from None
    if output is not None:
        resolved = output.resolve()
        if resolved.is_relative_to(folio.resolve()):
            raise InputError(f"{shown_path(output)} lies in the folio, which is not to be touched.")
        if resolved.exists() and not resolved.is_dir():
            raise InputError(f"{shown_path(output)} is a file, not a folder for records.")
    return Destination(workspace, output)


def verified(folio: Path, workspace: Workspace | None) -> Verification:
    """The checks of `folio`, against the trail of `workspace` where there is one."""
    return verify_lone_folios([folio]) if workspace is None else verify_workspace(workspace.runs, [folio])


def rerun_folio(
    folio: Path, to: Destination, archived: ArchivedEnvironmentOptions | None = None
) -> tuple[RerunRecord, SealedRecord]:
    """Re-run `folio` here, with `archived` also in the environment it was made with, and seal the record.

    Raises InputError where it is not the folio of a completed run, ChangedError where it was changed so that
    it can no longer be read as one, BusyError and MachineError as sealing does, and what `rerun_archived`
    raises.
    """
    verification = verified(folio, to.workspace)
    found = _rerun(folio, verification)
    there = None if archived is None else rerun_archived(folio, to.workspace, verification, archived)
    record = RerunRecord(found, look_around(), _head(to.workspace), there)
    return record, seal(record, to)


def _rerun(folio: Path, verification: Verification) -> Rerun:
    try:
        return rerun(folio, verification.outcomes)
    except InputError as error:
        failed = verification.with_outcome("failed")
        if not failed:
            raise
        lines = [f"  {one.number} {one.title}: {'; '.join(one.notes)}" for one in failed]
        raise ChangedError("\n".join([str(error), "It is not as it was sealed:", *lines])) from error


def _head(workspace: Workspace | None) -> tuple[int, str] | None:
    if workspace is None:
        return None
    last = read_trail(workspace.runs).last
    return (last.seq, last.sha256) if last.seq else None


def seal(record: RerunRecord, to: Destination) -> SealedRecord:
    """Seal the record of a re-run: in the folder where one is named, else in the workspace."""
    laboratory = record.rerun.laboratory
    look = PLAIN if laboratory is None else Look(laboratory.paper, laboratory.accent)
    sealable = as_record(record, "" if laboratory is None else laboratory.name, look)
    if to.folder is not None:
        return seal_in_folder(to.folder.resolve(), sealable)
    assert to.workspace is not None, "a destination is a workspace or a folder"
    return seal_in_workspace(to.workspace, sealable)


def exit_code(record: RerunRecord) -> ExitCode:
    """What the command answers with: a difference here, or in the archived environment where that ran."""
    if record.archived is not None and record.archived.outcome == "different":
        return ExitCode.FINDING
    return record.rerun.exit_code
