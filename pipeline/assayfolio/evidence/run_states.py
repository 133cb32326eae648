"""Checks 2.1 to 2.3: what the trail says of the runs, against what lies in the workspace."""

import os
from collections.abc import Iterator, Sequence
from pathlib import Path

from assayfolio.errors import MachineError
from assayfolio.evidence.entries import HEAD_FILE, TRAIL_FILE, TrailReading, set_aside_files
from assayfolio.evidence.files import plain_reason, replacement_name
from assayfolio.evidence.folio import UNSEALED, leftover_record, reopen_staged
from assayfolio.evidence.folio_reading import TrailIndex
from assayfolio.evidence.history import (
    ALLOTTED,
    DISPOSED,
    SEALED,
    RunHistory,
    run_histories,
    split_subject,
    unallotted,
)
from assayfolio.evidence.inventory import shown
from assayfolio.evidence.laboratory_folios import FOLDER as LABORATORY_FOLDER
from assayfolio.evidence.laboratory_folios import explained_names
from assayfolio.evidence.locks import is_locked, lock_path
from assayfolio.evidence.outcomes import CheckOutcome, Tally
from assayfolio.evidence.program_store import FOLDER as PROGRAMS_FOLDER
from assayfolio.evidence.program_store import program_faults
from assayfolio.evidence.protocol_states import explained_protocols
from assayfolio.evidence.register_pages import INDEX_FILE, REGISTER_FOLDER, register_remarks
from assayfolio.evidence.time_stamps import STAMPS_FILE
from assayfolio.evidence.trail import TORN_PREFIX, WRITER


def check_numbers(reading: TrailReading) -> CheckOutcome:
    """Check 2.1: numbers gapless for each study; each run allotted and sealed once, under its own number."""
    tally = Tally()
    numbers: dict[str, int] = {}
    for entry in reading.entries:
        run = split_subject(entry.subject)
        if entry.action != ALLOTTED:
            continue
        if run is None:
            tally.failed.append(
                f"entry {entry.seq} allots {shown(entry.subject)}, which is not the name of a run"
            )
            continue
        study, number = run
        expected = numbers.get(study, 0) + 1
        if number != expected:
            tally.failed.append(f"entry {entry.seq} allots {entry.subject} where {expected} comes next")
        if entry.details.get("number") != number:
            tally.failed.append(
                f"entry {entry.seq} allots {entry.subject}, but its details name another number"
            )
        numbers[study] = max(numbers.get(study, 0), number)
    for entry in unallotted(reading.entries):
        tally.failed.append(f"entry {entry.seq} is about {entry.subject}, which was never allotted")
    for history in run_histories(reading.entries):
        seals = [entry.seq for entry in history.entries if entry.action == SEALED]
        if len(seals) > 1:
            tally.failed.append(f"{history.subject} is sealed more than once: entries {seals}")
    return tally.outcome("2.1", "runs numbered without a gap", "audit trail")


def check_run(runs: Path, history: RunHistory, standing: Sequence[str] = ()) -> CheckOutcome:
    """Check 2.2: whether one run ended as the trail says, and its folio or leftover is there.

    `standing` is what else is to be said of the run: void, superseded.
    """
    tally = Tally(remarks=[shown(words) for words in standing])
    try:
        _check_run(runs, history, tally)
    except MachineError as error:
        tally.unchecked.append(str(error))
    return tally.outcome("2.2", "what became of the run", history.subject)


def _check_run(runs: Path, history: RunHistory, tally: Tally) -> None:
    folder = runs / history.study
    target = folder / history.name
    there = os.path.lexists(target)
    locked = is_locked(folder, history.name)
    if history.sealed is not None:
        if there and not target.is_symlink() and target.is_dir():
            _note_failure(history, tally)
        elif there:
            tally.failed.append(f"{history.subject} is not a folder: something else stands in its place")
        elif (disposed := history.entry(DISPOSED)) is not None:
            tally.remarks.append(
                f"disposed of after its retention: entry {disposed.seq}, {disposed.details.get('folio')}"
            )
        elif locked:
            tally.unchecked.append("running now: sealed, about to get its name")
        else:
            _explain_absence(folder, history, tally)
    elif there:
        tally.failed.append(
            f"{history.subject} is there, but the audit trail has no seal of it: "
            "it was put there by other means"
        )
    elif history.interrupted is not None:
        _check_leftover(folder, history, tally)
    elif locked:
        tally.unchecked.append("running now")
    else:
        failure = f" after it had failed ({shown(history.failure.reason or '')})" if history.failure else ""
        last = history.entries[-1]
        tally.failed.append(
            f"interrupted{failure}; not yet entered in the audit trail (the next run enters it). "
            f'Its last entry is {last.seq}, "{shown(last.action)}"'
        )


def _note_failure(history: RunHistory, tally: Tally) -> None:
    if history.failure is not None:
        tally.remarks.append(f"the run failed: {shown(history.failure.reason or 'no reason given')}")


def _explain_absence(folder: Path, history: RunHistory, tally: Tally) -> None:
    """A sealed run without its folio: the rename was interrupted, or the folio is gone."""
    staged = reopen_staged(folder, history.name)
    seal = history.sealed.details.get("seal") if history.sealed else None
    if staged is not None and staged.seal == seal:
        tally.failed.append(
            f"the rename was interrupted: {history.subject}{UNSEALED} is complete and carries the seal of "
            "the audit trail; the next run completes the rename"
        )
        return
    tally.failed.append(
        f"missing: {history.subject} was sealed, and its folio is gone: deleted or moved away"
    )
    if os.path.lexists(folder / f"{history.name}{UNSEALED}"):
        tally.failed.append(f"{history.subject}{UNSEALED} is there, but it is not what was sealed")


def _check_leftover(folder: Path, history: RunHistory, tally: Tally) -> None:
    """An interrupted run: what it left behind is as it was entered."""
    entry = history.interrupted
    if entry is None:
        return
    found = leftover_record(folder, history.name)
    entered = {key: entry.details.get(key) for key in found}
    tally.remarks.append(
        f"interrupted; entry {entry.seq} tells of it: {shown(entry.reason or 'no reason given')}"
    )
    if entry.details.get("found") == "staging folder" and found["found"] == "nothing":
        tally.failed.append(f"missing: {history.subject}{UNSEALED}, which entry {entry.seq} found")
    elif entered != found:
        tally.failed.append(f"changed: {history.subject}{UNSEALED} is not as entry {entry.seq} found it")


def check_surroundings(runs: Path, index: TrailIndex) -> CheckOutcome:
    """Check 2.3: folders, staging folders and torn lines that the trail does not explain.

    Loose files are noted, they are no evidence; a link or special file where a folio or study would stand
    is a finding, and so is any folder that the trail does not know.
    """
    tally = Tally()
    protocols = explained_protocols(index)
    studies = {history.study for history in index.histories.values()} | set(protocols)
    entered = set_aside_files(index.reading.entries)
    locks = {lock_path(runs, WRITER).name, replacement_name(runs / HEAD_FILE).name}
    known = {TRAIL_FILE, HEAD_FILE, STAMPS_FILE, *locks}
    for item in _items(runs, tally):
        name = shown(item.name)
        if item.is_dir(follow_symlinks=False) and item.name == LABORATORY_FOLDER:
            _check_laboratory_folder(runs / item.name, index, tally)
        elif item.is_dir(follow_symlinks=False) and item.name == PROGRAMS_FOLDER:
            tally.failed.extend(program_faults(runs))
        elif item.is_dir(follow_symlinks=False) and item.name == REGISTER_FOLDER:
            tally.remarks.extend(register_remarks(runs, index.reading))
        elif item.is_dir(follow_symlinks=False):
            if item.name not in studies and _holds_more_than_locks(runs / item.name):
                tally.failed.append(f"extra folder: {name}: the audit trail knows no study of this name")
            _check_study(runs / item.name, index, protocols.get(item.name, frozenset()), tally)
        elif item.is_symlink():
            tally.failed.append(f"symbolic link: {name}")
        elif item.name.startswith(TORN_PREFIX) and item.name not in entered:
            tally.failed.append(
                f"extra file: {name}: a torn line set aside and not yet entered in the audit trail (the next "
                "command that writes enters it), or a file made by other means"
            )
        elif item.name not in known | entered and item.name not in _CUSTOMARY:
            tally.remarks.append(f"{name} lies there too; it is no evidence")
    return tally.outcome("2.3", "nothing unexplained among the folios", "workspace")


_CUSTOMARY = frozenset(
    {"README.md", ".gitignore", ".gitkeep", INDEX_FILE, replacement_name(Path(INDEX_FILE)).name}
)


def _items(folder: Path, tally: Tally) -> Iterator[os.DirEntry[str]]:
    try:
        with os.scandir(folder) as listing:
            found = sorted(listing, key=lambda item: item.name)
    except OSError as error:
        tally.unchecked.append(f"{folder} could not be listed: {plain_reason(error)}")
        return
    yield from found


def _check_laboratory_folder(folder: Path, index: TrailIndex, tally: Tally) -> None:
    explained = explained_names(index.reading.entries)
    for item in _items(folder, tally):
        path = f"{shown(folder.name)}/{shown(item.name)}"
        if item.is_symlink():
            tally.failed.append(f"symbolic link: {path}")
        elif not item.is_dir(follow_symlinks=False):
            tally.remarks.append(f"{path} lies there too; it is no evidence")
        elif item.name not in explained:
            tally.failed.append(f"extra folder: {path}: the audit trail knows nothing of it")


def _is_run_lock(name: str) -> bool:
    return name.startswith((".run-", ".protocol-")) and name.endswith(".lock")


def _holds_more_than_locks(folder: Path) -> bool:
    # A run that was killed before its number was entered leaves its lock file and nothing else.
    try:
        return any(not _is_run_lock(item.name) for item in folder.iterdir())
    except OSError:
        return False


def _check_study(folder: Path, index: TrailIndex, protocols: frozenset[str], tally: Tally) -> None:
    for item in _items(folder, tally):
        path = f"{shown(folder.name)}/{shown(item.name)}"
        name = item.name.removesuffix(UNSEALED)
        history = index.histories.get(f"{folder.name}/{name}")
        if item.is_symlink():
            tally.failed.append(f"symbolic link: {path}")
        elif not item.is_dir(follow_symlinks=False):
            if not _is_run_lock(item.name):
                tally.remarks.append(f"{path} lies there too; it is no evidence")
        elif history is None and item.name in protocols:
            continue  # check 2.9 speaks of it
        elif history is None:
            tally.failed.append(f"extra folder: {path}: the audit trail knows nothing of it")
        elif item.name != name and not _is_explained(folder, history):
            tally.failed.append(f"extra folder: {path}: the audit trail does not explain it")


def _is_explained(folder: Path, history: RunHistory) -> bool:
    """Whether a staging folder is one that check 2.2 speaks about, or a run is at work in it."""
    return history.sealed is None or not os.path.lexists(folder / history.name)
