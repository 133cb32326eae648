"""Showing the audit trail: lines for people, a document for programs, a table for spreadsheets."""

import csv
import io
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from itertools import groupby
from pathlib import Path

from assayfolio.canonical import Json, canonical_bytes, sha256_hex
from assayfolio.errors import Fault, InputError, Place
from assayfolio.evidence.entries import TrailEntry, TrailReading
from assayfolio.evidence.files import write_new
from assayfolio.evidence.register import RECEIVED
from assayfolio.evidence.stamps import is_synchronised, local_time_of, own_details, person_of, roles_of
from assayfolio.evidence.trail import read_trail
from assayfolio.evidence.trail_exceptions import TrailException, trail_exceptions
from assayfolio.evidence.trail_filters import TrailFilter
from assayfolio.observations.guard import guarded
from assayfolio.workflow.workspace import Workspace, find_workspace, shown_path

_MOST_CHARACTERS = 90
COLUMNS = (
    "seq",
    "time",
    "local time",
    "clock kept",
    "account",
    "person",
    "roles",
    "action",
    "subject",
    "reason",
    "changes",
    "details",
    "previous",
    "sha256",
)


@dataclass(frozen=True, slots=True)
class TrailView:
    """The trail as it stands, the entries that were asked for, and the exceptions among them."""

    workspace: Workspace
    reading: TrailReading
    entries: tuple[TrailEntry, ...]
    exceptions: tuple[TrailException, ...]


def trail_view(named_workspace: Path | None, wanted: TrailFilter) -> TrailView:
    """Read the trail of the workspace and choose from it.

    What is an exception is judged on the whole trail. Raises InputError where there is no workspace,
    MachineError where the trail cannot be read.
    """
    workspace = find_workspace(named_workspace, Path())
    reading = read_trail(workspace.runs)
    entries = wanted.chosen(reading.entries)
    chosen = {entry.seq for entry in entries}
    exceptions = tuple(each for each in trail_exceptions(reading.entries) if each.entry.seq in chosen)
    return TrailView(workspace, reading, entries, exceptions)


def trail_lines(view: TrailView) -> list[str]:
    """The entries for people: a line each, below it reason, changes and digests; the head last."""
    if not view.reading.lines:
        return ["The audit trail is empty."]
    return [*_entries_lines(view.entries), *_end_lines(view)]


def exception_lines(view: TrailView) -> list[str]:
    """What a reviewer should see first, by kind; then every other entry."""
    if not view.reading.lines:
        return ["The audit trail is empty."]
    lines = []
    for kind, group in groupby(view.exceptions, key=lambda each: each.kind):
        found = list(group)
        lines.append(f"{kind[0].upper()}{kind[1:]}: {len(found)}")
        lines.extend(f"  {_head_line(each.entry)}\n{_INDENT}{each.words}" for each in found)
    if not view.exceptions:
        lines.append("No exceptions among these entries.")
    exceptional = {each.entry.seq for each in view.exceptions}
    rest = [entry for entry in view.entries if entry.seq not in exceptional]
    lines.append(f"All other entries: {len(rest)}")
    lines.extend(_entries_lines(rest))
    return [*lines, *_end_lines(view)]


def _end_lines(view: TrailView) -> list[str]:
    last, count = view.reading.last, len(view.entries)
    shown = (
        []
        if count == len(view.reading.entries)
        else [f"Shown: {count} of {len(view.reading.entries)} entries"]
    )
    return [*shown, f"Head: entry {last.seq}, {last.sha256}"]


_INDENT = " " * 33


def _entries_lines(entries: Sequence[TrailEntry]) -> list[str]:
    lines = []
    for entry in entries:
        lines.append(_head_line(entry))
        lines.extend(f"{_INDENT}{text}" for text in _further(entry))
    return lines


def _head_line(entry: TrailEntry) -> str:
    moment = f"{entry.time[:10]} {entry.time[11:19]} UTC"
    person = person_of(entry)
    who = entry.actor if person is None else f"{person} ({entry.actor})"
    return f"{entry.seq:>6}  {moment}  {who}  {entry.action}  {entry.subject}"


def _further(entry: TrailEntry) -> list[str]:
    """Reason, outcome, changes, file and seal of one entry."""
    details = entry.details
    found = [entry.reason] if entry.reason else []
    outcome = details.get("outcome")
    if entry.action == "trail-reviewed" and isinstance(outcome, str):
        found.append(f"entries up to {details.get('through_seq')}: {outcome}")
    found.extend(changes_of(entry))
    if entry.action == RECEIVED:
        found.append(f"{details.get('path')}, SHA-256 {details.get('sha256')}")
    seal = details.get("seal")
    if isinstance(seal, str):
        found.append(f"seal {seal}")
    return found


def changes_of(entry: TrailEntry) -> list[str]:
    """What the entry changed, key by key: old and new."""
    changes = entry.details.get("differences")
    if not isinstance(changes, list):
        return []
    return [
        f"{each.get('key')}: {_short(each.get('old'))} -> {_short(each.get('new'))}"
        for each in changes
        if isinstance(each, dict)
    ]


def _short(value: Json) -> str:
    text = (
        "nothing" if value is None else value if isinstance(value, str) else canonical_bytes(value).decode()
    )
    return text if len(text) <= _MOST_CHARACTERS else f"{text[:_MOST_CHARACTERS]} ..."


def trail_document(view: TrailView) -> Mapping[str, Json]:
    """The entries for programs, as they stand; head, faults of the trail, and how many there are in all."""
    head = view.reading.head
    return {
        "head": None if head is None else {"seq": head.seq, "sha256": head.sha256},
        "faults": [str(fault) for fault in view.reading.faults],
        "of": len(view.reading.entries),
        "entries": [entry_document(entry) for entry in view.entries],
    }


def exception_document(view: TrailView) -> Mapping[str, Json]:
    """The same, with the exceptions before the entries: kind, number of the entry, words."""
    found: list[Json] = [
        {"kind": each.kind, "seq": each.entry.seq, "words": each.words} for each in view.exceptions
    ]
    return {"exceptions": found, **trail_document(view)}


def entry_document(entry: TrailEntry) -> Mapping[str, Json]:
    """One entry with the keys of its line."""
    return {
        "seq": entry.seq,
        "time": entry.time,
        "actor": entry.actor,
        "action": entry.action,
        "subject": entry.subject,
        "reason": entry.reason,
        "details": entry.details,
        "previous": entry.previous,
    }


def trail_csv(entries: Iterable[TrailEntry]) -> bytes:
    """The entries as a table in UTF-8 (RFC 4180): a row each, under `COLUMNS`.

    A text that a spreadsheet program would take for a formula begins with an apostrophe. `details` is
    canonical JSON; `sha256` that of the entry's line.
    """
    text = io.StringIO(newline="")
    writer = csv.writer(text)
    writer.writerow(COLUMNS)
    for entry in entries:
        writer.writerow(_row(entry))
    return text.getvalue().encode("utf-8")


def _row(entry: TrailEntry) -> list[str]:
    kept = {True: "yes", False: "no", None: "not known"}[is_synchronised(entry)]
    texts = (
        entry.actor,
        person_of(entry) or "",
        " ".join(roles_of(entry)),
        entry.action,
        entry.subject,
        entry.reason or "",
        "; ".join(changes_of(entry)),
        canonical_bytes(own_details(entry)).decode("utf-8"),
    )
    line = sha256_hex(entry.line)
    return [
        str(entry.seq),
        entry.time,
        local_time_of(entry) or "",
        kept,
        *map(guarded, texts),
        entry.previous,
        line,
    ]


def write_csv(view: TrailView, path: Path) -> str:
    """Write the table to a new file; return what was written, in words.

    Raises InputError where something is there already, MachineError where the disk refuses.
    """
    if path.exists() or path.is_symlink():
        fault = Fault(Place(shown_path(path)), "is there already", "name a file that is not")
        raise InputError("The table was not written.", (fault,))
    content = trail_csv(view.entries)
    write_new(path, content)
    last = view.reading.last
    return (
        f"{shown_path(path)}: {len(view.entries)} of {len(view.reading.entries)} entries, "
        f"SHA-256 {sha256_hex(content)}; made under trail head {last.seq}, {last.sha256}"
    )
