"""The commands `rerun --all` and `verify --all`: one sweep, one summary, sealed."""

from collections.abc import Iterable, Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from pathlib import Path

from assayfolio.errors import AssayfolioError, InputError
from assayfolio.evidence.folio import read_seal
from assayfolio.evidence.inventory import Inventory, take_inventory
from assayfolio.evidence.verification import verify_workspace
from assayfolio.evidence.witnesses import Witness
from assayfolio.workflow.audit import named_witnesses
from assayfolio.workflow.laboratory_folio import SealedRecord, seal_in_folder, seal_in_workspace
from assayfolio.workflow.surroundings import look_around, utc_now
from assayfolio.workflow.sweep import Sample, Told, plan_sweep, rerun_sweep
from assayfolio.workflow.sweep_record import SweepRecord, as_record, checks_of_no_run, verified_rows
from assayfolio.workflow.workspace import Workspace, find_workspace


def sample_of(number: int | None, seed: int | None) -> Sample | None:
    """The sample that the options ask for. Raises InputError where one of the two is missing."""
    if number is None and seed is None:
        return None
    if number is None or seed is None:
        raise InputError("A sample needs both: --sample N and --seed S. Let whoever audits choose the seed.")
    if number < 1:
        raise InputError("A sample has at least one folio.")
    return Sample(number, seed)


def rerun_all(
    named_workspace: Path | None, output: Path | None, sample: Sample | None, jobs: int, told: Told
) -> tuple[SweepRecord, SealedRecord]:
    """Compute every folio of the workspace, or a sample, again; seal the summary.

    Raises InputError where there is no workspace or no folio, BusyError and MachineError as sealing does.
    """
    workspace = find_workspace(named_workspace, Path())
    around = look_around()
    plan = plan_sweep(workspace, sample)
    rows = rerun_sweep(plan, jobs, told)
    record = SweepRecord("rerun", plan, rows, (), around, utc_now())
    return record, _sealed(record, workspace, output)


@dataclass(frozen=True, slots=True)
class Sought:
    """What a sweep of verification takes: which folios, on how many threads, against which further witnesses.

    `restored` says which backup the workspace was brought back from, None where it was not.
    """

    sample: Sample | None
    jobs: int
    witnesses: tuple[Witness, ...] = ()
    restored: str | None = None


def verify_sweep(
    named_workspace: Path | None, output: Path | None, asked: Sought
) -> tuple[SweepRecord, SealedRecord]:
    """Verify every folio of the workspace, or a sample, and the whole trail; seal the summary.

    Raises as `rerun_all` does.
    """
    workspace = find_workspace(named_workspace, Path())
    around = look_around()
    plan = plan_sweep(workspace, asked.sample)

    def inventories(folders: Sequence[Path]) -> Iterable[tuple[Path, Inventory]]:
        # Threads, not processes: reading and hashing is done outside the interpreter's lock.
        with ThreadPoolExecutor(asked.jobs) as pool:
            yield from zip(folders, pool.map(take_inventory, folders), strict=True)

    named = None if asked.sample is None else tuple(plan.folders.values())
    verification = verify_workspace(
        workspace.runs, named, named_witnesses(workspace, asked.witnesses), inventories
    )
    seals = {subject: _seal_of(folder) for subject, folder in plan.folders.items()}
    rows = verified_rows(plan, verification, seals)
    others = checks_of_no_run(plan, verification)
    kind = "verify" if asked.restored is None else "restore"
    record = SweepRecord(kind, plan, rows, others, around, utc_now(), asked.restored)
    return record, _sealed(record, workspace, output)


def _seal_of(folder: Path) -> str:
    try:
        return read_seal(folder)
    except AssayfolioError:
        return ""


def _sealed(record: SweepRecord, workspace: Workspace, output: Path | None) -> SealedRecord:
    sealable = as_record(record)
    return (
        seal_in_workspace(workspace, sealable)
        if output is None
        else seal_in_folder(output.resolve(), sealable)
    )
