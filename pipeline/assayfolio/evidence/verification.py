"""Verification of a workspace: the audit trail, what became of each run, every folio; numbered checks.

1.1  The audit trail can be read, and its last line has its end.
1.2  Every line is one entry in canonical form.
1.3  The entries are numbered from 1 without a gap.
1.4  Every entry carries the SHA-256 of the line before it.
1.5  The head file holds number and SHA-256 of the last line.
1.6  The times of the entries are such as a clock gives (one that was set is noted, it is no finding).
1.7  The trail agrees with the heads that are kept elsewhere, where there are any.
2.1  Each study's runs are numbered from 1 without a gap, each number given and sealed once.
2.2  For each run: sealed and there, or entered as interrupted; nothing ended without a word.
2.3  Nothing lies among the folios that the trail does not explain.
2.4  Torn lines that were set aside are kept as they were entered.
2.5  Every raw data file was entered once, by its digest, before any run read it.
2.6  The laboratory's settings are those in force by the trail, and every run was made under those.
2.7  The laboratory's own folios are numbered without a gap, and each is there as it was sealed.
2.8  Each study's protocols are numbered from 1 without a gap, each registered once, amending the one before.
2.9  For each protocol: registered and there, or entered as stopped.
3.1 to 3.12  Each folio (`checks`).
4.1 to 4.11  Each protocol's folio (`protocol_checks`).
5.1 to 5.4  What was signed (`sign_off_checks`); 2.10 is about the signers' certificates (`signer_checks`).

Every check is made whatever the others found. A trail cut back together with its head is whole by itself:
it shows where a folio's entries or seal are no longer in the trail, or against a head kept elsewhere (a
witness, an archived report), and check 1.7 says which of these it had.

Reading takes no lock. A finding that a writer at work could have caused is looked at again.
"""

import os
import time
from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path

from assayfolio.canonical import sha256_hex
from assayfolio.errors import InputError, MachineError
from assayfolio.evidence.checks import OUTSIDE, check_copy, check_folio
from assayfolio.evidence.data_checks import check_received
from assayfolio.evidence.entries import TORN_LINE_SET_ASIDE, TRAIL_FILE, TrailReading
from assayfolio.evidence.files import plain_reason, read_regular
from assayfolio.evidence.folio_reading import TrailIndex
from assayfolio.evidence.history import split_subject
from assayfolio.evidence.inventory import Inventory, take_inventory
from assayfolio.evidence.laboratory_folios import (
    check_laboratory_folio,
    check_laboratory_folios,
    is_laboratory_folio,
)
from assayfolio.evidence.locks import is_locked
from assayfolio.evidence.manifest import BAGIT_FILE, MANIFEST_FILE, TAG_MANIFEST_FILE
from assayfolio.evidence.memory import collector_paused
from assayfolio.evidence.outcomes import CheckOutcome, Tally, Verification
from assayfolio.evidence.protocol_checks import (
    check_named_protocol,
    check_protocol_folio,
    check_protocols,
    is_protocol,
)
from assayfolio.evidence.run_states import check_numbers, check_run, check_surroundings
from assayfolio.evidence.settings_checks import check_settings
from assayfolio.evidence.sign_off_checks import SignOffJudge, check_sign_off_of
from assayfolio.evidence.stamps import clock_remarks
from assayfolio.evidence.states import standing_words
from assayfolio.evidence.trail import WRITER, Witnesses, no_witnesses
from assayfolio.evidence.trail_reading import read_trail
from assayfolio.evidence.witness_checks import NUMBER as WITNESS_CHECK
from assayfolio.evidence.witness_checks import TITLE as WITNESS_TITLE
from assayfolio.evidence.witness_checks import check_witnesses

__all__ = ["CheckOutcome", "Verification", "verify_lone_folios", "verify_workspace"]

_LOOKS = 3
_SETTLING_SECONDS = 0.05


Inventories = Callable[[Sequence[Path]], Iterable[tuple[Path, Inventory]]]
"""Takes the inventories of many folios, in any order."""


def _one_by_one(folders: Sequence[Path]) -> Iterator[tuple[Path, Inventory]]:
    return ((folder, take_inventory(folder)) for folder in folders)


def verify_workspace(
    runs: Path,
    folios: Sequence[Path] | None,
    witnesses: Witnesses = no_witnesses,
    inventories: Inventories = _one_by_one,
    anchors: Sequence[bytes] = (),
) -> Verification:
    """Verify the trail in `runs` and all its folios, or the trail and the named `folios`.

    The trail is held against each of `witnesses` that can be reached. Signatures are believed by the
    certificates (DER) in `anchors`, or without any by those that the trail pins.
    A named folio outside `runs` is taken for a copy and held against the entries of the run that it names.
    Where all folios are verified `inventories` reads their files, which takes most of the time. Raises
    InputError where `runs` is no folder or a named path is neither a folio nor the place of a run that the
    trail knows.
    """
    if not runs.is_dir():
        raise InputError(f"{runs} is not a folder, so there is nothing to verify")
    if folios is not None:
        folios = [Path(os.path.abspath(folio)) for folio in folios]  # noqa: PTH100 - no link is followed
    for _ in range(_LOOKS):
        with collector_paused():
            reading, trouble = _settled_reading(runs)
            outcomes = tuple(_outcomes(runs, reading, trouble, folios, witnesses, inventories, anchors))
        if all(each.outcome != "failed" for each in outcomes) or not _has_moved(runs, reading):
            break
    return Verification(outcomes)


def _settled_reading(runs: Path) -> tuple[TrailReading | None, str]:
    """The trail, not caught in the middle of an append; or why it cannot be read."""
    try:
        reading = read_trail(runs)
        for _ in range(100):
            if reading.is_orderly:
                break
            time.sleep(_SETTLING_SECONDS)
            before, reading = reading, read_trail(runs)
            if reading == before and not is_locked(runs, WRITER):
                break
    except MachineError as error:
        return None, str(error)
    return reading, ""


def _has_moved(runs: Path, reading: TrailReading | None) -> bool:
    """Whether a writer has added to the trail since it was read."""
    later, _ = _settled_reading(runs)
    return later is not None and reading is not None and later.last.seq > reading.last.seq


def _outcomes(
    runs: Path,
    reading: TrailReading | None,
    trouble: str,
    folios: Sequence[Path] | None,
    witnesses: Witnesses,
    inventories: Inventories,
    anchors: Sequence[bytes],
) -> Iterator[CheckOutcome]:
    if reading is None:
        yield from _without_trail(runs, trouble, folios)
        yield from _signed(SignOffJudge(None, trouble, None, anchors), folios or run_folders(runs))
        return
    index = TrailIndex(reading)
    judge = SignOffJudge(index, "", runs.parent, anchors, lambda: witnesses(reading.entries))
    for check in _TRAIL_CHECKS:
        tally = Tally()
        check.make(runs, reading, tally)
        yield tally.outcome(check.number, check.title, "audit trail")
    yield check_witnesses(runs, reading, witnesses(reading.entries))
    yield check_numbers(reading)
    if folios is None:
        for subject in index.histories:
            yield check_run(runs, index.histories[subject], standing_words(index.standings[subject]))
        yield check_surroundings(runs, index)
        yield _check_torn_lines(runs, reading)
        yield check_received(reading)
        yield check_settings(runs, reading)
        yield from check_laboratory_folios(runs, index)
        yield from check_protocols(runs, index)
        folders = run_folders(runs)
        found = {
            folder: check_folio(folder, index, "", inventory) for folder, inventory in inventories(folders)
        }
        for folder in folders:
            yield from found[folder]
        yield from judge.check_all(runs)
        return
    for folio in folios:
        yield from _named(runs, index, folio)
    yield from _signed(judge, folios)


def _signed(judge: SignOffJudge, folios: Sequence[Path]) -> Iterator[CheckOutcome]:
    for folio in folios:
        yield from check_sign_off_of(judge, folio, is_protocol=is_protocol(folio))


def _named(runs: Path, index: TrailIndex, folio: Path) -> Iterator[CheckOutcome]:
    history = None
    if _is_inside(runs, folio) and is_laboratory_folio(index, folio):
        yield from check_laboratory_folio(runs, index, folio.name)
        return
    if is_protocol(folio):
        yield from _named_protocol(runs, index, folio)
        return
    if _is_inside(runs, folio):
        history = index.histories.get(f"{folio.parent.name}/{folio.name}")
    if history is not None:
        yield check_run(runs, history, standing_words(index.standings[history.subject]))
        if not _is_folder(folio):
            return
    else:
        _require_folio(folio)
    if _is_inside(runs, folio):
        yield from check_folio(folio, index, "")
    else:
        yield from check_copy(folio, index)


def _named_protocol(runs: Path, index: TrailIndex, folio: Path) -> Iterator[CheckOutcome]:
    if not (_is_inside(runs, folio) and f"{folio.parent.name}/{folio.name}" in index.protocols):
        _require_folio(folio)
    if _is_inside(runs, folio):
        yield from check_named_protocol(runs, index, folio)
    else:
        yield from check_protocol_folio(folio, None, OUTSIDE)


def _without_trail(runs: Path, trouble: str, folios: Sequence[Path] | None) -> Iterator[CheckOutcome]:
    """What can still be said where the trail is there but cannot be read."""
    for number, title in ((check.number, check.title) for check in _TRAIL_CHECKS):
        yield CheckOutcome(number, title, "audit trail", "not checkable", (trouble,))
    yield CheckOutcome(WITNESS_CHECK, WITNESS_TITLE, "audit trail", "not checkable", (trouble,))
    for folio in folios if folios is not None else run_folders(runs):
        _require_folio(folio)
        check = check_protocol_folio if is_protocol(folio) else check_folio
        yield from check(folio, None, f"the audit trail cannot be read: {trouble}")


def _is_inside(runs: Path, folio: Path) -> bool:
    return folio.parent.parent.resolve() == runs.resolve()


def _is_folder(path: Path) -> bool:
    return path.is_dir() and not path.is_symlink()


def _require_folio(folio: Path) -> None:
    if folio.is_symlink():
        raise InputError(f"{folio} is a symbolic link; name the folio itself")
    if not folio.is_dir():
        what = "a file, not a folio's folder" if folio.exists() else "not there"
        raise InputError(f"{folio} is {what}")
    if not any((folio / name).exists() for name in (BAGIT_FILE, MANIFEST_FILE, TAG_MANIFEST_FILE)):
        raise InputError(
            f"{folio} is not a folio: it has neither {BAGIT_FILE} nor {MANIFEST_FILE} nor {TAG_MANIFEST_FILE}"
        )


def run_folders(runs: Path) -> list[Path]:
    """Folders that stand where runs stand, sorted by study and number."""
    found = []
    for folder in runs.glob("*/run-*"):
        run = split_subject(f"{folder.parent.name}/{folder.name}")
        if run is not None and _is_folder(folder) and not folder.parent.is_symlink():
            found.append((run, folder))
    return [folder for _, folder in sorted(found)]


def _check_whole(runs: Path, reading: TrailReading, tally: Tally) -> None:
    if not reading.lines:
        if run_folders(runs) or reading.faults:
            tally.failed.append(f"missing: {TRAIL_FILE} is gone or empty, although runs were made here")
        elif not reading.torn:
            tally.remarks.append(f"{TRAIL_FILE} has no entry yet: nothing was ever run here")
    if reading.torn:
        tally.failed.append(
            f"{TRAIL_FILE}: {len(reading.torn)} bytes after the last whole line {len(reading.lines)} have no "
            "line end: an append was interrupted, or the end of the file was changed. "
            "If it was an interrupted append, the next command that writes sets them aside and enters that."
        )


def _fault_check(kind: str) -> Callable[[Path, TrailReading, Tally], None]:
    def check(_runs: Path, reading: TrailReading, tally: Tally) -> None:
        tally.failed.extend(str(fault) for fault in reading.faults if fault.kind == kind)

    return check


def _check_head(_runs: Path, reading: TrailReading, tally: Tally) -> None:
    tally.failed.extend(str(fault) for fault in reading.faults if fault.kind == "head")
    if not tally.failed and reading.head_lag:
        stands = f"stands at entry {reading.head.seq}" if reading.head else "is missing"
        tally.failed.append(
            f"audit-trail.head {stands}, the last entry of {TRAIL_FILE} is {reading.last.seq}: either an "
            "append was interrupted before the head moved, or the line was added by hand. The next command "
            "that writes enters that it found this."
        )


def _check_times(_runs: Path, reading: TrailReading, tally: Tally) -> None:
    for remark in clock_remarks(reading.entries):
        (tally.failed if remark.impossible else tally.remarks).append(remark.words)


@dataclass(frozen=True, slots=True)
class _TrailCheck:
    number: str
    title: str
    make: Callable[[Path, TrailReading, Tally], None]


_TRAIL_CHECKS = (
    _TrailCheck("1.1", "the audit trail is whole lines", _check_whole),
    _TrailCheck("1.2", "every line is an entry in canonical form", _fault_check("form")),
    _TrailCheck("1.3", "entries numbered without a gap", _fault_check("sequence")),
    _TrailCheck("1.4", "every entry carries the digest of the one before", _fault_check("chain")),
    _TrailCheck("1.5", "the head is the last entry", _check_head),
    _TrailCheck("1.6", "times as a clock gives them", _check_times),
)


def _check_torn_lines(runs: Path, reading: TrailReading) -> CheckOutcome:
    tally = Tally()
    for entry in reading.entries:
        if entry.action != TORN_LINE_SET_ASIDE:
            continue
        name = entry.details.get("file")
        if not isinstance(name, str) or "/" in name:
            tally.failed.append(f"entry {entry.seq} names no file for the torn line")
            continue
        try:
            digest = sha256_hex(read_regular(runs / name))
        except FileNotFoundError:
            tally.failed.append(f"missing: {name}, set aside by entry {entry.seq}")
        except OSError as error:
            tally.unchecked.append(f"{name} could not be read: {plain_reason(error)}")
        else:
            if digest != entry.details.get("sha256"):
                tally.failed.append(f"changed: {name}, set aside by entry {entry.seq}")
            else:
                tally.remarks.append(f"{name}: an append was interrupted here; entry {entry.seq} tells of it")
    return tally.outcome("2.4", "torn lines kept as entered", "audit trail")


def verify_lone_folios(folios: Sequence[Path], anchors: Sequence[bytes] = ()) -> Verification:
    """Verify `folios` that lie in no workspace: each by itself, since there is no trail to hold it against.

    Signatures are believed by `anchors` alone. Raises InputError where a path is not a folio.
    """
    outcomes: list[CheckOutcome] = []
    judge = SignOffJudge(None, OUTSIDE, None, anchors)
    for folio in folios:
        absolute = Path(os.path.abspath(folio))  # noqa: PTH100 - no link is followed
        _require_folio(absolute)
        check = check_protocol_folio if is_protocol(absolute) else check_folio
        outcomes.extend(check(absolute, None, OUTSIDE))
        outcomes.extend(check_sign_off_of(judge, absolute, is_protocol=is_protocol(absolute)))
    return Verification(tuple(outcomes))
