"""A sweep over many folios, computed again on all processors; one bad folio stops nothing.

A sweep that was interrupted is taken up where it stood, as long as it is the same: the same program, folios
and seals. What it had done stands in a file beside `configs/` until it ends, and the summary says from when
that part is.
"""

import json
import time
from collections.abc import Callable, Iterator, Mapping
from dataclasses import asdict, dataclass, replace
from pathlib import Path

from assayfolio.canonical import canonical_bytes, canonical_digest
from assayfolio.errors import AssayfolioError, InputError
from assayfolio.evidence.checks import check_folio
from assayfolio.evidence.environment import program_digest
from assayfolio.evidence.files import explained
from assayfolio.evidence.folio import read_seal
from assayfolio.evidence.folio_reading import TrailIndex
from assayfolio.evidence.trail import read_trail
from assayfolio.evidence.verification import run_folders
from assayfolio.study.plan import Laboratory
from assayfolio.workflow.archived import FailedRunError
from assayfolio.workflow.failure import failure_text
from assayfolio.workflow.parallel import in_parallel
from assayfolio.workflow.rerun import Installation, Rerun, rerun, this_installation
from assayfolio.workflow.sampling import sampled
from assayfolio.workflow.surroundings import utc_now
from assayfolio.workflow.workspace import Workspace

NOT_DONE = "not done"
FAILED_RUN = "failed run"
FINE = frozenset({"identical", "equal within the bound", FAILED_RUN, "passed"})


@dataclass(frozen=True, slots=True)
class Sample:
    """A sample that is to be drawn: how many folios, and the seed that decides which."""

    number: int
    seed: int


@dataclass(frozen=True, slots=True)
class SweepRow:
    """What became of one folio. `earlier` is when an interrupted sweep did it, None in this one."""

    subject: str
    seal: str
    outcome: str
    notes: tuple[str, ...]
    seconds: float
    earlier: str | None = None

    @property
    def is_fine(self) -> bool:
        """Whether there is nothing to look at."""
        return self.outcome in FINE


@dataclass(frozen=True, slots=True)
class SweepPlan:
    """The folios of a sweep: how many the workspace has, and the folders of those that are taken."""

    workspace: Workspace
    total: int
    sample: Sample | None
    folders: Mapping[str, Path]


Told = Callable[[int, int, SweepRow], None]
"""Told of every folio as it is done: how many are, of how many, and what became of it."""


def plan_sweep(workspace: Workspace, sample: Sample | None) -> SweepPlan:
    """Which folios a sweep of the workspace takes. Raises InputError where there are none."""
    folders = {f"{folder.parent.name}/{folder.name}": folder for folder in run_folders(workspace.runs)}
    if not folders:
        raise InputError(f"{workspace.runs} holds no folio of a run.")
    chosen = tuple(folders) if sample is None else sampled(folders, sample.number, sample.seed)
    return SweepPlan(workspace, len(folders), sample, {subject: folders[subject] for subject in chosen})


def rerun_sweep(plan: SweepPlan, jobs: int, told: Told) -> tuple[SweepRow, ...]:
    """Compute every folio of `plan` again on `jobs` processes; the rows in the order of their names.

    Raises MachineError where the trail cannot be read or what was done cannot be kept.
    """
    kept = _Kept(plan)
    done = kept.rows()
    for count, row in enumerate(done.values(), start=1):
        told(count, len(plan.folders), row)
    tasks = [(subject, folder) for subject, folder in plan.folders.items() if subject not in done]
    for task, made in in_parallel(_computed_again, tasks, jobs, _begin, (plan.workspace.runs,)):
        found = (
            made
            if made is not None
            else _row(task, NOT_DONE, ("the process at work on it ended without a word",), 0.0)
        )
        kept.add(found)
        done[found.subject] = found
        told(len(done), len(plan.folders), found)
    kept.forget()
    return tuple(done[subject] for subject in plan.folders)


class _Kept:
    """What an interrupted sweep of the same plan had done: a line a folio, in a file of its own."""

    def __init__(self, plan: SweepPlan) -> None:
        self._seals = {subject: _seal_of(folder) for subject, folder in plan.folders.items()}
        same = canonical_digest({"program": program_digest(), "seals": self._seals})
        self._path = plan.workspace.root / f".rerun-sweep-{same[:16]}.jsonl"

    def rows(self) -> dict[str, SweepRow]:
        found = {}
        with explained("read what an interrupted sweep had done", self._path):
            lines = self._path.read_bytes().split(b"\n") if self._path.exists() else []
        for line in lines[:-1]:  # a line without its end was being written
            row = SweepRow(**json.loads(line))
            if row.outcome != NOT_DONE:
                found[row.subject] = replace(row, notes=tuple(row.notes))
        return found

    def add(self, row: SweepRow) -> None:
        line = canonical_bytes(asdict(replace(row, earlier=utc_now())))
        with explained("keep what was done", self._path), self._path.open("ab") as file:
            file.write(line + b"\n")

    def forget(self) -> None:
        with explained("remove what was kept of the sweep", self._path):
            self._path.unlink(missing_ok=True)


class _Worker:
    """What a process of a sweep holds from folio to folio: the trail's index, and this installation."""

    def __init__(self, runs: Path) -> None:
        self.index = TrailIndex(read_trail(runs))
        self._installation: Installation | None = None

    def installation(self, laboratory: Laboratory) -> Installation:
        """The installation that runs, looked at once."""
        if self._installation is None:
            self._installation = this_installation(laboratory)
        return self._installation


_workers: list[_Worker] = []  # at most one: that of this process


def _begin(runs: Path) -> None:
    _workers[:] = [_Worker(runs)]


def _computed_again(task: tuple[str, Path]) -> SweepRow:
    """Verify and compute one folio again; whatever goes wrong becomes words."""
    worker, started = _workers[0], time.perf_counter()
    checks = check_folio(task[1], worker.index, "")
    try:
        found = rerun(task[1], checks, worker.installation)
        outcome, notes = str(found.outcome), tuple(_notes(found))
    except FailedRunError:
        outcome, notes = FAILED_RUN, ("no result to compute again",)
    except Exception as error:  # noqa: BLE001 - one folio stops no other
        outcome, notes = NOT_DONE, (failure_text(error)[0],)
    broken = tuple(f"{one.number} {note}" for one in checks if one.outcome == "failed" for note in one.notes)
    if broken and outcome in (NOT_DONE, FAILED_RUN):
        outcome, notes = "different", (*broken, *notes)
    return _row(task, outcome, notes, time.perf_counter() - started)


def _row(task: tuple[str, Path], outcome: str, notes: tuple[str, ...], seconds: float) -> SweepRow:
    return SweepRow(task[0], _seal_of(task[1]), outcome, notes, round(seconds, 3))


def _seal_of(folder: Path) -> str:
    try:
        return read_seal(folder)
    except AssayfolioError:
        return ""


def _notes(found: Rerun) -> Iterator[str]:
    """What is to be said of a re-run that was not identical: its parts, and the first fields that differ."""
    for part in found.parts:
        if part.outcome != "identical":
            yield f"{part.name} {part.outcome}: {'; '.join(part.notes)}".removesuffix(": ")
    for one in found.differences[:3]:
        yield f"{one.place}: {one.old} then, {one.new} now"
