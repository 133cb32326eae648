"""A folio and a trail as verification reads them: once, whole, without judging."""

import os
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property
from pathlib import Path
from typing import Any

from assayfolio.evidence.entries import TrailEntry, TrailReading
from assayfolio.evidence.files import plain_reason, read_regular
from assayfolio.evidence.history import RunHistory, run_histories, up_to_staged
from assayfolio.evidence.inventory import FoundFile, Inventory, take_inventory
from assayfolio.evidence.manifest import (
    MANIFEST_FILE,
    TAG_FILES,
    TAG_MANIFEST_FILE,
    ManifestReading,
    parse_manifest,
)
from assayfolio.evidence.outcomes import Tally
from assayfolio.evidence.protocols import (
    ProtocolHistory,
    RegisteredPlan,
    protocol_histories,
    registered_plans,
)
from assayfolio.evidence.register import Register, read_register
from assayfolio.evidence.states import RunStanding, run_standings
from assayfolio.evidence.strict_json import NotCanonicalError, parse_json

RUN_FILE = "data/run.json"
RUN_TRAIL_FILE = "data/trail.jsonl"


class TrailIndex:
    """A trail reading with what the checks of many folios look up in it."""

    def __init__(self, reading: TrailReading) -> None:
        self.reading = reading
        self.histories: Mapping[str, RunHistory] = {
            run.subject: run for run in run_histories(reading.entries)
        }
        self.known_lines = frozenset(reading.lines)
        self._places: dict[str, list[int]] = {}
        for place, entry in enumerate(reading.parsed):
            if entry is not None:
                self._places.setdefault(entry.subject, []).append(place)

    @cached_property
    def register(self) -> Register:
        """The intake register that the entries amount to."""
        return read_register(self.reading.entries)

    @cached_property
    def standings(self) -> Mapping[str, RunStanding]:
        """How every run stands, by its subject."""
        return run_standings(self.reading.entries)

    @cached_property
    def protocols(self) -> Mapping[str, ProtocolHistory]:
        """What the trail says of each protocol, by its subject."""
        return {one.subject: one for one in protocol_histories(self.reading.entries)}

    @cached_property
    def registered(self) -> Mapping[str, tuple[RegisteredPlan, ...]]:
        """The registered plans of each study."""
        studies = {one.study for one in self.protocols.values()}
        entries = [entry for one in self.protocols.values() for entry in one.entries]
        entries.sort(key=lambda entry: entry.seq)
        return {study: registered_plans(entries, study) for study in studies}

    def lines_to_staged(self, subject: str) -> list[tuple[TrailEntry, bytes]]:
        """The run's entries and their very lines, from allotment to the last "staged"."""
        pairs = [
            (self.reading.parsed[place], self.reading.lines[place]) for place in self._places.get(subject, [])
        ]
        entries = [entry for entry, _ in pairs if entry is not None]
        count = len(up_to_staged(entries))
        return list(zip(entries[:count], (line for _, line in pairs), strict=False))


@dataclass(frozen=True, slots=True)
class FolioReading:
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
        """The run that the folder claims to be, by its place."""
        return f"{self.study_folder}/{self.name}"

    @property
    def history(self) -> RunHistory | None:
        """What the trail says of that run."""
        return self.trail.histories.get(self.subject) if self.trail else None

    def file(self, path: str) -> FoundFile | None:
        """The regular file at this path."""
        return self.inventory.files.get(path)


def read_folio(
    folder: Path, trail: TrailIndex | None, no_trail: str, inventory: Inventory | None = None
) -> FolioReading:
    """Read the folio at `folder`; `no_trail` says why there is no trail, where there is none.

    `inventory` is what lies in the folder, where it was taken already.
    """
    place = Path(os.path.abspath(folder))  # noqa: PTH100 - no link is followed
    inventory = take_inventory(folder) if inventory is None else inventory
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
    return FolioReading(
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


def content_of(folio: FolioReading, path: str, tally: Tally) -> bytes | None:
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
