"""The laboratory's own folios, `runs/_laboratory/<kind>-<NNNN>/`: what the trail says of each, and checks.

An entry `folio-allotted` gives the number; the entry that carries the folio's path and seal in its details is
entered before the folio gets its name. One that was killed in between is entered as `interrupted` by the next
writer and keeps its number. The trail is held from allotment to rename, so that one that is not sealed was
killed, unless a writer is at work.
"""

import os
import re
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path

from assayfolio.canonical import sha256_hex
from assayfolio.errors import MachineError
from assayfolio.evidence import package_checks
from assayfolio.evidence.entries import TrailEntry, is_digest
from assayfolio.evidence.folio import UNSEALED, leftover_record, reopen_staged
from assayfolio.evidence.folio_reading import FolioReading, TrailIndex, content_of, read_folio
from assayfolio.evidence.history import INTERRUPTED, trail_extract
from assayfolio.evidence.inventory import shown
from assayfolio.evidence.locks import is_locked
from assayfolio.evidence.manifest import TAG_MANIFEST_FILE
from assayfolio.evidence.outcomes import CheckOutcome, Tally
from assayfolio.evidence.states import VOIDED
from assayfolio.evidence.trail import WRITER

FOLDER = "_laboratory"
FOLIO_ALLOTTED = "folio-allotted"
TRAIL_FILE = "data/trail.jsonl"
_SUBJECT = re.compile(r"_laboratory/([a-z]+(?:-[a-z]+)*)-([0-9]{4,})", re.ASCII)


def folio_name(kind: str, number: int) -> str:
    """The folder name: "void-0001"."""
    return f"{kind}-{number:04d}"


def folio_subject(kind: str, number: int) -> str:
    """What the entries of the folio are about: "_laboratory/void-0001"."""
    return f"{FOLDER}/{folio_name(kind, number)}"


def split_folio(subject: str) -> tuple[str, int] | None:
    """Kind and number of a subject; None for any other subject or spelling of the number."""
    if not subject.startswith(FOLDER):
        return None
    matched = _SUBJECT.fullmatch(subject)
    if not matched or folio_subject(matched[1], int(matched[2])) != subject:
        return None
    return matched[1], int(matched[2])


@dataclass(frozen=True, slots=True)
class LaboratoryFolio:
    """One of the laboratory's own folios as the trail has it: how it was allotted, and how it ended."""

    kind: str
    number: int
    allotted: TrailEntry
    sealed: TrailEntry | None
    interrupted: TrailEntry | None

    @property
    def name(self) -> str:
        """The folder name."""
        return folio_name(self.kind, self.number)

    @property
    def subject(self) -> str:
        """What its entries are about."""
        return folio_subject(self.kind, self.number)


def laboratory_folios(entries: Iterable[TrailEntry]) -> tuple[LaboratoryFolio, ...]:
    """Every folio of the laboratory that was allotted, sorted by kind and number."""
    allotted: dict[tuple[str, int], TrailEntry] = {}
    sealed: dict[str, TrailEntry] = {}
    interrupted: dict[str, TrailEntry] = {}
    for entry in entries:
        folio = entry.details.get("folio")
        if entry.action == FOLIO_ALLOTTED and (found := split_folio(entry.subject)) is not None:
            allotted.setdefault(found, entry)
        elif entry.action == INTERRUPTED and split_folio(entry.subject) is not None:
            interrupted.setdefault(entry.subject, entry)
        elif isinstance(folio, str) and is_digest(entry.details.get("seal")):
            sealed.setdefault(folio, entry)
    return tuple(
        LaboratoryFolio(
            *key, allotted[key], sealed.get(folio_subject(*key)), interrupted.get(folio_subject(*key))
        )
        for key in sorted(allotted)
    )


def next_folio_number(entries: Iterable[TrailEntry], kind: str) -> int:
    """The number that the next folio of `kind` gets: one more than the highest allotted."""
    found = (split_folio(entry.subject) for entry in entries if entry.action == FOLIO_ALLOTTED)
    return 1 + max((one[1] for one in found if one is not None and one[0] == kind), default=0)


def check_laboratory_folios(runs: Path, index: TrailIndex) -> Iterator[CheckOutcome]:
    """Check 2.7: numbers without a gap, and each folio there as sealed; then checks 3.1 to 3.6, 3.9, 3.10."""
    folios = laboratory_folios(index.reading.entries)
    if folios or any(entry.action == VOIDED for entry in index.reading.entries):
        yield _check_numbers(folios, index)
    for folio in folios:
        yield from _check(runs, index, folio)


def is_laboratory_folio(index: TrailIndex, folio: Path) -> bool:
    """Whether `folio` is the place of one of the laboratory's own folios that the trail knows."""
    if folio.parent.name != FOLDER:
        return False
    return any(each.name == folio.name for each in laboratory_folios(index.reading.entries))


def check_laboratory_folio(runs: Path, index: TrailIndex, name: str) -> Iterator[CheckOutcome]:
    """The same checks of the one folio `name`."""
    for folio in laboratory_folios(index.reading.entries):
        if folio.name == name:
            yield from _check(runs, index, folio)


def _check(runs: Path, index: TrailIndex, folio: LaboratoryFolio) -> Iterator[CheckOutcome]:
    yield _check_folio(runs, folio)
    place = runs / FOLDER / folio.name
    if folio.sealed is not None and place.is_dir() and not place.is_symlink():
        yield from _package_checks(read_folio(place, index, ""), folio)


def explained_names(entries: Iterable[TrailEntry]) -> frozenset[str]:
    """The names that the trail explains in the laboratory's folder, staging folders among them."""
    folios = laboratory_folios(entries)
    staged = (f"{folio.name}{UNSEALED}" for folio in folios)
    return frozenset((*(folio.name for folio in folios), *staged))


def _check_numbers(folios: Sequence[LaboratoryFolio], index: TrailIndex) -> CheckOutcome:
    tally = Tally()
    known = {folio.subject for folio in folios}
    for entry in index.reading.entries:
        if entry.action == VOIDED and entry.details.get("folio") not in known:
            tally.failed.append(
                f"entry {entry.seq} declares {shown(entry.subject)} void in a folio that no entry allots"
            )
    last: dict[str, int] = {}
    for folio in folios:
        expected = last.get(folio.kind, 0) + 1
        if folio.number != expected:
            tally.failed.append(
                f"{folio.subject} is allotted where {folio_name(folio.kind, expected)} comes next"
            )
        last[folio.kind] = folio.number
    return tally.outcome("2.7", "the laboratory's folios numbered without a gap", "audit trail")


def _check_folio(runs: Path, folio: LaboratoryFolio) -> CheckOutcome:
    tally = Tally()
    folder = runs / FOLDER
    there = os.path.lexists(folder / folio.name)
    try:
        if folio.sealed is not None:
            if not there:
                _explain_absence(folder, folio, folio.sealed, tally)
        elif there:
            tally.failed.append(f"{folio.subject} is there, but the audit trail has no seal of it")
        elif folio.interrupted is not None:
            found = leftover_record(folder, folio.name)
            tally.remarks.append(f"interrupted; entry {folio.interrupted.seq} tells of it")
            if {key: folio.interrupted.details.get(key) for key in found} != found:
                tally.failed.append(f"changed: what entry {folio.interrupted.seq} found of {folio.subject}")
        elif is_locked(runs, WRITER):
            tally.unchecked.append("being made now")
        else:
            tally.failed.append(
                "interrupted; not yet entered in the audit trail (the next such command does)"
            )
    except MachineError as error:
        tally.unchecked.append(str(error))
    return tally.outcome("2.7", "what became of the folio", folio.subject)


def _explain_absence(folder: Path, folio: LaboratoryFolio, sealed: TrailEntry, tally: Tally) -> None:
    staged = reopen_staged(folder, folio.name)
    if staged is not None and staged.seal == sealed.details.get("seal"):
        tally.failed.append(
            f"the rename was interrupted: {folio.subject}{UNSEALED} carries the seal of the audit trail; the "
            "next such command completes it"
        )
    else:
        tally.failed.append(
            f"missing: {folio.subject} was sealed by entry {sealed.seq}, and is gone: deleted or moved away"
        )


_PACKAGE = (
    ("3.1", "bagit.txt declares BagIt 1.0", package_checks.check_declaration),
    ("3.2", "tag files unchanged", package_checks.check_tag_manifest),
    ("3.3", "manifest well formed", package_checks.check_manifest),
    ("3.4", "payload files there and unchanged", package_checks.check_payload),
    ("3.5", "nothing else in the folder", package_checks.check_extras),
    ("3.6", "payload size as stated", package_checks.check_oxum),
)


def _package_checks(reading: FolioReading, folio: LaboratoryFolio) -> Iterator[CheckOutcome]:
    for number, title, make in _PACKAGE:
        tally = Tally()
        make(reading, tally)
        yield tally.outcome(number, title, folio.subject)
    tally = Tally()
    content = content_of(reading, TRAIL_FILE, tally)
    if content is not None and content != trail_extract([folio.allotted]):
        tally.failed.append(f"{TRAIL_FILE} does not hold entry {folio.allotted.seq} of the audit trail")
    yield tally.outcome("3.9", "the folio's entries stand in the audit trail", folio.subject)
    tally = Tally()
    content = content_of(reading, TAG_MANIFEST_FILE, tally)
    entered = None if folio.sealed is None else folio.sealed.details.get("seal")
    if content is not None and sha256_hex(content) != entered:
        tally.failed.append(
            f"changed: {TAG_MANIFEST_FILE} has SHA-256 {sha256_hex(content)}, the audit trail's seal is "
            f"{entered}: the folio was rewritten after sealing"
        )
    yield tally.outcome("3.10", "seal as in the audit trail", folio.subject)
