"""Checks of a protocol's folio: by itself, and against the audit trail.

4.1 to 4.6   The folio as a BagIt folder, as checks 3.1 to 3.6 of a run's.
4.7   data/protocol.json can be read and agrees with the folder's name and place.
4.8   The digests in data/protocol.json are those of the definition, the plan and the protocol.
4.9   The lines of data/trail.jsonl stand in the audit trail, byte for byte and in order, none left out.
4.10  The seal is the one in the audit trail.
4.11  Plan, definition, amendment and reason in data/protocol.json are those that the audit trail holds.

Checks 4.1 to 4.8 need the folio alone; 4.9 to 4.11 need the workspace's trail and are "not checkable" without
one.
"""

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from assayfolio.canonical import sha256_hex
from assayfolio.evidence import package_checks
from assayfolio.evidence.entries import is_digest
from assayfolio.evidence.files import plain_reason, read_regular
from assayfolio.evidence.folio_reading import RUN_TRAIL_FILE, FolioReading, TrailIndex, content_of, read_folio
from assayfolio.evidence.inventory import shown
from assayfolio.evidence.manifest import TAG_MANIFEST_FILE
from assayfolio.evidence.outcomes import CheckOutcome, Tally
from assayfolio.evidence.protocol_states import check_protocol, check_protocol_numbers
from assayfolio.evidence.protocols import (
    ProtocolHistory,
    protocol_name,
    split_protocol,
    unallotted_protocols,
)
from assayfolio.evidence.strict_json import NotCanonicalError, parse_json

RECORD = "data/protocol.json"
_FILES = (("plan", "data/plan.json"), ("report_sha256", "data/protocol.pdf"))


@dataclass(frozen=True, slots=True)
class ProtocolReading:
    """A protocol's folio as read once: as any folio, and its record, or why that cannot be understood."""

    folio: FolioReading
    record: Mapping[str, Any] | None
    trouble: str
    history: ProtocolHistory | None


def is_protocol(folio: Path) -> bool:
    """Whether a folder is a protocol by its name, or else by what it holds."""
    if split_protocol(f"{folio.parent.name}/{folio.name}") is not None:
        return True
    return (folio / RECORD).is_file() and not (folio / "data/run.json").exists()


def check_protocols(runs: Path, index: TrailIndex) -> Iterator[CheckOutcome]:
    """Checks 2.8 and 2.9, and 4.1 to 4.11 of each protocol's folio; nothing where there are no protocols."""
    histories = index.protocols.values()
    if histories or unallotted_protocols(index.reading.entries):
        yield check_protocol_numbers(index.reading)
    for history in histories:
        yield check_protocol(runs, history)
        folder = runs / history.study / history.name
        if folder.is_dir() and not folder.is_symlink():
            yield from check_protocol_folio(folder, index, "")


def check_named_protocol(runs: Path, index: TrailIndex, folder: Path) -> Iterator[CheckOutcome]:
    """The checks of the one protocol whose place is `folder`."""
    subject = f"{folder.parent.name}/{folder.name}"
    history = index.protocols.get(subject)
    if history is not None:
        yield check_protocol(runs, history)
    if folder.is_dir() and not folder.is_symlink():
        yield from check_protocol_folio(folder, index, "")


def check_protocol_folio(folder: Path, trail: TrailIndex | None, no_trail: str) -> tuple[CheckOutcome, ...]:
    """Checks 4.1 to 4.11 of the protocol's folio at `folder`; `no_trail` says why there is no trail."""
    folio = read_folio(folder, trail, no_trail)
    record, trouble = _record_of(folder)
    history = trail.protocols.get(folio.subject) if trail is not None else None
    reading = ProtocolReading(folio, record, trouble, history)
    label = folio.subject if trail is not None else shown(str(folder))
    outcomes = []
    for number, title, make in _CHECKS:
        tally = Tally()
        make(reading, tally)
        outcomes.append(tally.outcome(number, title, label))
    return tuple(outcomes)


def _record_of(folder: Path) -> tuple[Mapping[str, Any] | None, str]:
    try:
        value: Any = parse_json(read_regular(folder / RECORD))
    except FileNotFoundError:
        return None, f"missing: {RECORD}"
    except (OSError, NotCanonicalError) as error:
        why = plain_reason(error) if isinstance(error, OSError) else str(error)
        return None, f"{RECORD} cannot be understood: {why}"
    return (value, "") if isinstance(value, dict) else (None, f"{RECORD} is not an object")


def _check_place(reading: ProtocolReading, tally: Tally) -> None:
    record, folio = reading.record, reading.folio
    if record is None:
        tally.failed.append(reading.trouble)
        return
    study, number, name = record.get("study"), record.get("number"), record.get("protocol")
    if not isinstance(study, str) or not isinstance(number, int) or isinstance(number, bool):
        tally.failed.append(f'{RECORD}: "study" is not a text or "number" not a whole number')
        return
    if name != protocol_name(number):
        tally.failed.append(f'{RECORD}: "protocol" is {name!r}, where {number} makes {protocol_name(number)}')
    if folio.trail is None and split_protocol(f"{study}/{folio.name}") is None:
        found = f"the folder is called {shown(folio.name)}, which is not the name of a protocol"
        tally.unchecked.append(found)
    elif folio.name != protocol_name(number):
        found = f"the folder is called {shown(folio.name)}, {RECORD} says {protocol_name(number)}"
        tally.failed.append(found)
    if folio.trail is not None and folio.study_folder != study:
        tally.failed.append(
            f"the folder lies in {shown(folio.study_folder)}, {RECORD} says study {shown(study)}"
        )


def _check_digests(reading: ProtocolReading, tally: Tally) -> None:
    record = reading.record
    if record is None:
        tally.failed.append(reading.trouble)
        return
    stated = [(record.get(key), path) for key, path in _FILES]
    inputs = record.get("inputs")
    stated += [
        (each.get("sha256"), str(each.get("folio_path")))
        for each in (inputs if isinstance(inputs, list) else ())
        if isinstance(each, dict)
    ]
    if not isinstance(inputs, list) or len(stated) == len(_FILES):
        tally.failed.append(f'{RECORD}: "inputs" names no file')
    for digest, path in stated:
        file = reading.folio.file(path)
        if not is_digest(digest):
            tally.failed.append(f"{RECORD} has no digest of {shown(path)}")
        elif file is None:
            tally.failed.append(f"missing: {shown(path)}, which {RECORD} names")
        elif file.sha256 is None:
            tally.unchecked.append(f"{shown(path)} could not be read: {file.trouble}")
        elif file.sha256 != digest:
            tally.failed.append(f"changed: {shown(path)} has SHA-256 {file.sha256}, {RECORD} says {digest}")


def _history(reading: ProtocolReading, tally: Tally) -> ProtocolHistory | None:
    if reading.folio.trail is None:
        tally.unchecked.append(reading.folio.no_trail)
    elif reading.history is None:
        tally.failed.append(f"the audit trail knows no protocol {shown(reading.folio.subject)}")
    return reading.history


def _check_entries(reading: ProtocolReading, tally: Tally) -> None:
    content = content_of(reading.folio, RUN_TRAIL_FILE, tally)
    history = _history(reading, tally)
    if content is None or history is None:
        return
    if content == b"".join(entry.line + b"\n" for entry in history.to_be_staged):
        return
    known = reading.folio.trail.known_lines if reading.folio.trail else frozenset()
    for number, line in enumerate(content.removesuffix(b"\n").split(b"\n"), start=1):
        if line not in known:
            tally.failed.append(
                f"{RUN_TRAIL_FILE} line {number} does not stand in the audit trail: it was changed here, or "
                "changed or cut off there"
            )
    if not tally.failed:
        found = f"{RUN_TRAIL_FILE} does not hold just the entries of {history.subject} in their order"
        tally.failed.append(found)


def _check_seal(reading: ProtocolReading, tally: Tally) -> None:
    history = _history(reading, tally)
    content = content_of(reading.folio, TAG_MANIFEST_FILE, tally)
    if history is None or content is None:
        return
    if history.registered is None:
        tally.failed.append(f"the audit trail has no seal of {history.subject}, yet the folio is there")
        return
    seal, entered = sha256_hex(content), history.registered.details.get("seal")
    if seal != entered:
        tally.failed.append(
            f"changed: {TAG_MANIFEST_FILE} has SHA-256 {seal}, the seal in entry {history.registered.seq} is "
            f"{entered}: this file, or the folio with its manifests, was rewritten or replaced after sealing"
        )


def _check_against_trail(reading: ProtocolReading, tally: Tally) -> None:
    record, history = reading.record, _history(reading, tally)
    if record is None:
        tally.failed.append(reading.trouble)
    if record is None or history is None:
        return
    for entry in (history.allotted, *([history.registered] if history.registered else [])):
        for key in ("plan", "study_definition", "amends", "timing"):
            if entry.details.get(key) != record.get(key):
                tally.failed.append(
                    f'"{key}" in {RECORD} is not that of entry {entry.seq} of the audit trail'
                )
        if entry.reason != record.get("reason"):
            tally.failed.append(f"the reason in {RECORD} is not that of entry {entry.seq} of the audit trail")


def _of_folio(make: Callable[[FolioReading, Tally], None]) -> Callable[[ProtocolReading, Tally], None]:
    return lambda reading, tally: make(reading.folio, tally)


_CHECKS: tuple[tuple[str, str, Callable[[ProtocolReading, Tally], None]], ...] = (
    ("4.1", "bagit.txt declares BagIt 1.0", _of_folio(package_checks.check_declaration)),
    ("4.2", "tag files unchanged", _of_folio(package_checks.check_tag_manifest)),
    ("4.3", "manifest well formed", _of_folio(package_checks.check_manifest)),
    ("4.4", "payload files there and unchanged", _of_folio(package_checks.check_payload)),
    ("4.5", "nothing else in the folder", _of_folio(package_checks.check_extras)),
    ("4.6", "payload size as stated", _of_folio(package_checks.check_oxum)),
    ("4.7", "protocol record agrees with the folder's place", _check_place),
    ("4.8", "protocol record agrees with the files", _check_digests),
    ("4.9", "the protocol's entries stand in the audit trail", _check_entries),
    ("4.10", "seal as in the audit trail", _check_seal),
    ("4.11", "protocol record agrees with the audit trail", _check_against_trail),
)
