"""The numbered checks of one folio. Each is made whatever the others found, and has three outcomes.

3.1   bagit.txt declares BagIt 1.0 in UTF-8.
3.2   The tag manifest is well formed, lists the tag files, and these are there unchanged.
3.3   The manifest is well formed and lists files inside data/ only.
3.4   Every file that the manifest lists is there unchanged.
3.5   Nothing else is in the folder: no further file, empty folder, link or special file.
3.6   bag-info.txt states the number and bytes of the payload's files.
3.7   data/run.json can be read and agrees with the folder's name and place.
3.8   The digests in data/run.json are those of the inputs, the findings and the report.
3.9   The lines of data/trail.jsonl stand in the audit trail, byte for byte and in order, none left out.
3.10  The seal is the one in the audit trail.
3.11  The trail head that data/run.json was made under stands in the audit trail.
3.12  Outcome and digests in data/run.json are those that the audit trail holds.

Checks 3.1 to 3.8 need the folio alone; 3.9 to 3.12 need the workspace's trail and are "not checkable"
without one. What the trail itself is worth is for checks 1 and 2 (`verification`).
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from assayfolio.evidence.entries import NO_LINE, TrailEntry, TrailReading, parse_entry
from assayfolio.evidence.files import plain_reason, read_regular
from assayfolio.evidence.history import (
    COMPUTED,
    RENDERED,
    SEALED,
    STAGED,
    RunHistory,
    run_histories,
    run_name,
    split_subject,
)
from assayfolio.evidence.inventory import FoundFile, Inventory, shown, take_inventory
from assayfolio.evidence.manifest import (
    BAG_INFO_FILE,
    BAGIT_FILE,
    BAGIT_TEXT,
    MANIFEST_FILE,
    PAYLOAD_FOLDER,
    TAG_FILES,
    TAG_MANIFEST_FILE,
    ManifestReading,
    parse_manifest,
    parse_oxum,
)
from assayfolio.evidence.outcomes import CheckOutcome, Tally
from assayfolio.evidence.strict_json import NotCanonicalError, parse_json

RUN_FILE = "data/run.json"
RUN_TRAIL_FILE = "data/trail.jsonl"
STUDY_FILE = "data/study.yaml"
INPUTS_FOLDER = "data/inputs/"
RESULTS = (("findings_sha256", "data/findings.json"), ("report_sha256", "data/report.pdf"))

_KNOWN_AT_TOP = frozenset({*TAG_FILES, TAG_MANIFEST_FILE})


class TrailIndex:
    """A trail reading with what the checks of many folios look up in it."""

    def __init__(self, reading: TrailReading) -> None:
        self.reading = reading
        self.histories: Mapping[str, RunHistory] = {run.subject: run for run in run_histories(reading.entries)}
        self.known_lines = frozenset(reading.lines)
        self._places: dict[str, list[int]] = {}
        for place, entry in enumerate(reading.parsed):
            if entry is not None and entry.subject in self.histories:
                self._places.setdefault(entry.subject, []).append(place)

    def lines_to_staged(self, subject: str) -> list[tuple[TrailEntry, bytes]]:
        """The run's entries and their very lines, from allotment to "staged"."""
        found: list[tuple[TrailEntry, bytes]] = []
        for place in self._places.get(subject, []):
            entry = self.reading.parsed[place]
            if entry is None:
                continue
            found.append((entry, self.reading.lines[place]))
            if entry.action == STAGED:
                break
        return found


@dataclass(frozen=True, slots=True)
class _Folio:
    """Everything that was read of one folio, once."""

    name: str
    study_folder: str
    inventory: Inventory
    contents: Mapping[str, bytes]
    troubles: Mapping[str, str]
    payload: ManifestReading | None
    run: Mapping[str, Any] | None
    run_trouble: str
    trail: TrailIndex | None
    no_trail: str

    @property
    def subject(self) -> str:
        return f"{self.study_folder}/{self.name}"

    @property
    def history(self) -> RunHistory | None:
        return self.trail.histories.get(self.subject) if self.trail else None

    def file(self, path: str) -> FoundFile | None:
        return self.inventory.files.get(path)


OUTSIDE = "the folio lies outside any workspace, so there is no audit trail to compare it with"


def verify_folio(folio: Path, reading: TrailReading | None) -> tuple[CheckOutcome, ...]:
    """Make checks 3.1 to 3.12 on the folder `folio`, against the trail of its workspace where there is one.

    The folder's name and its parent's name are taken for run and study. Never raises for what is found.
    """
    return check_folio(folio, TrailIndex(reading) if reading is not None else None, OUTSIDE)


def check_folio(folio: Path, trail: TrailIndex | None, no_trail: str) -> tuple[CheckOutcome, ...]:
    """The same with a ready index; `no_trail` says why there is none."""
    subject = _read_folio(folio, trail, no_trail)
    label = subject.subject if trail is not None else shown(str(folio))
    return tuple(_make(check, subject, label) for check in FOLIO_CHECKS)


def _make(check: "FolioCheck", folio: _Folio, label: str) -> CheckOutcome:
    tally = Tally()
    check.make(folio, tally)
    return tally.outcome(check.number, check.title, label)


def _read_folio(folder: Path, trail: TrailIndex | None, no_trail: str) -> _Folio:
    place = folder.absolute()
    inventory = take_inventory(folder)
    contents: dict[str, bytes] = {}
    troubles: dict[str, str] = {}
    for path in (*TAG_FILES, TAG_MANIFEST_FILE, RUN_FILE, RUN_TRAIL_FILE):
        if path in inventory.files:
            try:
                contents[path] = read_regular(folder / path)
            except OSError as error:
                troubles[path] = plain_reason(error)
    payload = parse_manifest(contents[MANIFEST_FILE]) if MANIFEST_FILE in contents else None
    run, run_trouble = _parse_run(contents.get(RUN_FILE))
    return _Folio(
        name=place.name,
        study_folder=place.parent.name,
        inventory=inventory,
        contents=contents,
        troubles=troubles,
        payload=payload,
        run=run,
        run_trouble=run_trouble,
        trail=trail,
        no_trail=no_trail,
    )


def _parse_run(content: bytes | None) -> tuple[Mapping[str, Any] | None, str]:
    if content is None:
        return None, ""
    try:
        value: Any = parse_json(content)
    except NotCanonicalError as error:
        return None, str(error)
    return (value, "") if isinstance(value, dict) else (None, "it is not an object")


def _content(folio: _Folio, path: str, tally: Tally) -> bytes | None:
    """A file's bytes; where there are none the tally says why."""
    if path in folio.contents:
        return folio.contents[path]
    if path in folio.troubles:
        tally.unchecked.append(f"{path} could not be read: {folio.troubles[path]}")
    elif path in folio.inventory.oddities:
        tally.failed.append(f"{path} is not a file: {folio.inventory.oddities[path]}")
    elif folio.inventory.unlisted:
        tally.unchecked.append(f"{path} could not be looked for: {'; '.join(folio.inventory.unreadable)}")
    else:
        tally.failed.append(f"missing: {path}")
    return None


def _check_declaration(folio: _Folio, tally: Tally) -> None:
    content = _content(folio, BAGIT_FILE, tally)
    if content is not None and content != BAGIT_TEXT:
        tally.failed.append(f"changed: {BAGIT_FILE} does not declare BagIt 1.0 in UTF-8 as written here")


def _compare(folio: _Folio, path: str, digest: str, listing: str, tally: Tally) -> None:
    """Whether the file at `path` has the digest that `listing` gives it."""
    file = folio.file(path)
    if file is None:
        _content(folio, path, tally)
    elif file.sha256 is None:
        tally.unchecked.append(f"{path} could not be read: {file.trouble}")
    elif file.sha256 != digest:
        tally.failed.append(f"changed: {path} has SHA-256 {file.sha256}, {listing} says {digest}")


def _check_tag_manifest(folio: _Folio, tally: Tally) -> None:
    content = _content(folio, TAG_MANIFEST_FILE, tally)
    if content is None:
        return
    tags = parse_manifest(content)
    tally.failed.extend(f"{TAG_MANIFEST_FILE}: {fault}" for fault in tags.faults)
    for path in sorted({*tags.digests, *TAG_FILES}):
        if path not in TAG_FILES:
            tally.failed.append(f"{TAG_MANIFEST_FILE} lists {path}, which is no tag file of a folio")
        elif path not in tags.digests:
            tally.failed.append(f"{TAG_MANIFEST_FILE} does not list {path}")
        else:
            _compare(folio, path, tags.digests[path], TAG_MANIFEST_FILE, tally)


def _check_manifest(folio: _Folio, tally: Tally) -> None:
    _content(folio, MANIFEST_FILE, tally)
    if folio.payload is None:
        return
    tally.failed.extend(f"{MANIFEST_FILE}: {fault}" for fault in folio.payload.faults)
    for path in folio.payload.digests:
        if not path.startswith(f"{PAYLOAD_FOLDER}/"):
            tally.failed.append(f"{MANIFEST_FILE} lists {path}, which is outside {PAYLOAD_FOLDER}/")


def _check_payload(folio: _Folio, tally: Tally) -> None:
    if folio.payload is None:
        tally.unchecked.append(f"without {MANIFEST_FILE} nothing says what the files should be")
        return
    for path, digest in folio.payload.digests.items():
        if path.startswith(f"{PAYLOAD_FOLDER}/"):
            _compare(folio, path, digest, MANIFEST_FILE, tally)


def _check_extras(folio: _Folio, tally: Tally) -> None:
    listed = folio.payload.digests if folio.payload else {}
    for path in folio.inventory.files:
        inside = path.startswith(f"{PAYLOAD_FOLDER}/")
        if (inside and (path in listed or folio.payload is None)) or path in _KNOWN_AT_TOP:
            continue
        tally.failed.append(f"extra file: {shown(path)}{_explain_extra(path)}")
    for path, kind in folio.inventory.oddities.items():
        tally.failed.append(f"{kind}: {shown(path)}")
    for path, why in folio.inventory.unlisted.items():
        tally.unchecked.append(f"{shown(path) or 'the folder'} could not be listed: {why}")
    if folio.payload is None:
        tally.unchecked.append(f"without {MANIFEST_FILE} nothing says which files belong in {PAYLOAD_FOLDER}/")


def _explain_extra(path: str) -> str:
    if path.startswith(("manifest-", "tagmanifest-")):
        return ": a manifest of an algorithm that folios do not use"
    if path == "fetch.txt":
        return ": a folio holds all its files, none is to be fetched"
    if path.startswith(f"{PAYLOAD_FOLDER}/"):
        return f": {MANIFEST_FILE} does not list it"
    return ""


def _check_oxum(folio: _Folio, tally: Tally) -> None:
    content = _content(folio, BAG_INFO_FILE, tally)
    if content is None:
        return
    try:
        stated = parse_oxum(content)
    except ValueError as error:
        tally.failed.append(f"{BAG_INFO_FILE}: {error}")
        return
    payload = [file for path, file in folio.inventory.files.items() if path.startswith(f"{PAYLOAD_FOLDER}/")]
    if folio.inventory.unreadable:
        tally.unchecked.append(f"could not be read: {'; '.join(folio.inventory.unreadable)}")
        return
    found = sum(file.size for file in payload), len(payload)
    if stated != found:
        tally.failed.append(
            f"{BAG_INFO_FILE} states {stated[0]} bytes in {stated[1]} files, "
            f"{PAYLOAD_FOLDER}/ has {found[0]} bytes in {found[1]} files"
        )


@dataclass(frozen=True, slots=True)
class FolioCheck:
    """A check's number, what it states, and how it is made."""

    number: str
    title: str
    make: Callable[[_Folio, Tally], None]
