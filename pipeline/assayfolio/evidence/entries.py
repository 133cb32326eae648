"""The audit trail as it stands on the disk: entries, the head beside them, and everything that is wrong.

`runs/audit-trail.jsonl` holds one entry a line in canonical JSON (RFC 8785). An entry carries the SHA-256 of
the line before it (without the line's end), the first one 64 zeros. `runs/audit-trail.head` holds the
number and the SHA-256 of the newest line, so that a changed or lost last line shows as well.

This module reads and judges; it never writes.
"""

import re
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Literal

from assayfolio.canonical import Json, canonical_bytes, sha256_hex
from assayfolio.errors import MachineError
from assayfolio.evidence.files import explained, read_regular
from assayfolio.evidence.strict_json import NotCanonicalError, parse_canonical, parse_canonical_lines

TRAIL_FILE = "audit-trail.jsonl"
HEAD_FILE = "audit-trail.head"
NO_LINE = "0" * 64

HEAD_RESTORED = "head-restored"
TORN_LINE_SET_ASIDE = "torn-line-set-aside"
RECOVERIES = frozenset({HEAD_RESTORED, TORN_LINE_SET_ASIDE})

_KEYS = frozenset(("action", "actor", "details", "previous", "reason", "seq", "subject", "time"))
_TIME = re.compile(r"\d{4}-[01]\d-[0-3]\dT[0-2]\d:[0-5]\d:[0-6]\d\.\d{6}Z", re.ASCII)
_DIGEST = re.compile(r"[0-9a-f]{64}", re.ASCII)


class TrailBrokenError(MachineError):
    """The audit trail is not as this program left it, so nothing is added to it."""


def is_trail_time(text: str) -> bool:
    """Whether `text` is a time as entries carry it: RFC 3339 in UTC, as 2026-01-31T09:15:00.000000Z."""
    return _TIME.fullmatch(text) is not None


def is_digest(value: object) -> bool:
    """Whether `value` is a SHA-256 in 64 lower-case hexadecimal digits."""
    return isinstance(value, str) and _DIGEST.fullmatch(value) is not None


@dataclass(frozen=True, slots=True)
class TrailEntry:
    """One event. `subject` is what it is about, `details` what a program would read of it."""

    seq: int
    time: str
    actor: str
    action: str
    subject: str
    reason: str | None
    details: Mapping[str, Json]
    previous: str

    @property
    def line(self) -> bytes:
        """The entry in canonical JSON, without the line's end."""
        return canonical_bytes(
            {
                "seq": self.seq,
                "time": self.time,
                "actor": self.actor,
                "action": self.action,
                "subject": self.subject,
                "reason": self.reason,
                "details": self.details,
                "previous": self.previous,
            }
        )

    @property
    def sha256(self) -> str:
        """The SHA-256 of the line."""
        return sha256_hex(self.line)


@dataclass(frozen=True, slots=True)
class TrailHead:
    """Number and SHA-256 of the newest line; 0 and 64 zeros before the first."""

    seq: int
    sha256: str

    @property
    def content(self) -> bytes:
        """The head file's bytes."""
        return canonical_bytes({"seq": self.seq, "sha256": self.sha256}) + b"\n"


def set_aside_files(entries: Iterable[TrailEntry]) -> frozenset[str]:
    """The names of the files that hold torn lines, as the trail tells of them."""
    named = (entry.details.get("file") for entry in entries if entry.action == TORN_LINE_SET_ASIDE)
    return frozenset(name for name in named if isinstance(name, str))


EMPTY_HEAD = TrailHead(0, NO_LINE)


@dataclass(frozen=True, slots=True)
class TrailFault:
    """Something in the trail that an orderly writer, even a killed one, does not leave behind.

    `kind`: "form" (a line is not an entry in canonical form), "sequence" (numbers), "chain" (an entry does
    not carry the digest of the line before), "head" (the head fits no explanation).
    """

    kind: Literal["form", "sequence", "chain", "head"]
    file: str
    line: int | None
    found: str

    def __str__(self) -> str:
        """File, line, what was found."""
        where = self.file if self.line is None else f"{self.file} line {self.line}"
        return f"{where}: {self.found}"


@dataclass(frozen=True, slots=True)
class TrailReading:
    """The trail as one reading found it.

    `lines` are the whole lines without their ends; `parsed` stands beside them, None where a line is no
    entry; `entries` are those that are. `digests` are the SHA-256 of the lines. `torn` holds the bytes after
    the last line's end. `head` is None where the file is missing or unreadable as a head. `head_lag` says
    how many lines the head stands behind the last whole line: 0 as it should be, 1 when an append was
    interrupted before the head moved (or a line was added by hand), None where it fits no line.
    """

    entries: tuple[TrailEntry, ...]
    lines: tuple[bytes, ...]
    head: TrailHead | None
    torn: bytes
    faults: tuple[TrailFault, ...]
    parsed: tuple[TrailEntry | None, ...]
    digests: tuple[str, ...]
    head_lag: int | None
    exists: bool

    @property
    def last(self) -> TrailHead:
        """Number and digest of the last whole line, whatever the head file says."""
        return TrailHead(len(self.lines), self.digests[-1]) if self.lines else EMPTY_HEAD

    @property
    def is_orderly(self) -> bool:
        """Whether nothing is wrong and nothing is left to recover."""
        return not self.faults and not self.torn and self.head_lag == 0


def read_trail(runs: Path) -> TrailReading:
    """Read the trail and its head in the folder `runs`; judge both; change nothing.

    Raises MachineError where a file is there but cannot be read.
    """
    # The head first: a writer that works meanwhile can then only make the trail look longer.
    head_bytes = _read_if_there(runs / HEAD_FILE)
    content = _read_if_there(runs / TRAIL_FILE)
    exists = content is not None
    *lines, torn = (content or b"").split(b"\n")
    digests = tuple(sha256_hex(line) for line in lines)
    parsed, faults = _parse_lines(lines)
    faults.extend(_sequence_faults(parsed))
    faults.extend(_chain_faults(parsed, digests))
    head, head_lag, head_faults = _judge_head(head_bytes, parsed, digests, bool(torn))
    faults.extend(head_faults)
    return TrailReading(
        entries=tuple(entry for entry in parsed if entry is not None),
        lines=tuple(lines),
        head=head,
        torn=torn,
        faults=tuple(faults),
        parsed=tuple(parsed),
        digests=digests,
        head_lag=head_lag,
        exists=exists,
    )


def _read_if_there(path: Path) -> bytes | None:
    with explained("read the file", path):
        try:
            return read_regular(path)
        except FileNotFoundError:
            return None


def _parse_lines(lines: list[bytes]) -> tuple[list[TrailEntry | None], list[TrailFault]]:
    parsed: list[TrailEntry | None] = []
    faults: list[TrailFault] = []
    for number, value in enumerate(parse_canonical_lines(lines), start=1):
        entry: TrailEntry | None = None
        if isinstance(value, NotCanonicalError):
            found = str(value) if lines[number - 1] else "the line is empty"
        else:
            entry, found = _entry_of(value)
        parsed.append(entry)
        if entry is None:
            faults.append(TrailFault("form", TRAIL_FILE, number, found))
    return parsed, faults


def parse_entry(line: bytes) -> TrailEntry:
    """The entry whose line (without its end) is exactly `line`. Raises NotCanonicalError with the reason."""
    entry, found = _entry_of(parse_canonical(line))
    if entry is None:
        raise NotCanonicalError(found)
    return entry


def _entry_of(value: Json) -> tuple[TrailEntry | None, str]:
    if not isinstance(value, dict):
        return None, "it is not an object"
    if value.keys() != _KEYS:
        odd = sorted(_KEYS.symmetric_difference(value))
        return None, f"keys missing or unknown: {', '.join(odd)}"
    seq, reason, details = value["seq"], value["reason"], value["details"]
    time, actor, action = value["time"], value["actor"], value["action"]
    subject, previous = value["subject"], value["previous"]
    if not (isinstance(seq, int) and not isinstance(seq, bool) and seq >= 1):
        return None, '"seq" is not a whole number from 1'
    if not (isinstance(time, str) and is_trail_time(time)):
        return None, '"time" is not a UTC time with microseconds'
    if not (isinstance(actor, str) and isinstance(action, str) and isinstance(subject, str)):
        return None, '"actor", "action" or "subject" is not a text'
    if not (reason is None or isinstance(reason, str)):
        return None, '"reason" is neither a text nor null'
    if not isinstance(details, dict):
        return None, '"details" is not an object'
    if not isinstance(previous, str):
        return None, '"previous" is not a text'
    return TrailEntry(seq, time, actor, action, subject, reason, details, previous), ""


def _sequence_faults(parsed: list[TrailEntry | None]) -> Iterator[TrailFault]:
    """Each number that does not follow from the one before; a shift is told once, where it begins."""
    expected: int | None = 1
    for number, entry in enumerate(parsed, start=1):
        if entry is None:
            expected = None if expected is None else expected + 1
            continue
        if expected is not None and entry.seq != expected:
            found = f"it has the number {entry.seq} where {expected} should stand"
            yield TrailFault("sequence", TRAIL_FILE, number, found)
        expected = entry.seq + 1


def _chain_faults(parsed: list[TrailEntry | None], digests: tuple[str, ...]) -> Iterator[TrailFault]:
    before = NO_LINE
    for number, (entry, digest) in enumerate(zip(parsed, digests, strict=True), start=1):
        if entry is not None and entry.previous != before:
            if number == 1:
                found = 'the first entry\'s "previous" is not 64 zeros: lines before it are missing'
            else:
                found = (
                    f"it does not carry the SHA-256 of line {number - 1}: line {number - 1} was changed, "
                    f"a line was taken out or put in between, or this line was changed"
                )
            yield TrailFault("chain", TRAIL_FILE, number, found)
        before = digest


def _judge_head(
    content: bytes | None, parsed: list[TrailEntry | None], digests: tuple[str, ...], torn: bool
) -> tuple[TrailHead | None, int | None, list[TrailFault]]:
    """The head, how far it stands behind the last whole line, and what cannot be explained about it."""
    if content is None:
        head, stands = None, EMPTY_HEAD
    else:
        try:
            head = stands = _head_of(content)
        except NotCanonicalError as error:
            return (
                None,
                None,
                [TrailFault("head", HEAD_FILE, None, f"it is not a head as written here: {error}")],
            )
    count = len(digests)
    if content is not None and stands.seq > count:
        end = "; the last line has no line end" if torn else ""
        found = (
            f"it stands at entry {stands.seq}, but {TRAIL_FILE} has {count} whole lines{end}: lines were lost"
        )
        return head, None, [TrailFault("head", HEAD_FILE, None, found)]
    if stands.seq > 0 and digests[stands.seq - 1] != stands.sha256:
        found = (
            f"it does not carry the SHA-256 of line {stands.seq} of {TRAIL_FILE}: "
            f"that line or the head was changed"
        )
        return head, None, [TrailFault("head", HEAD_FILE, None, found)]
    lag = count - stands.seq
    unexplained = [
        entry for entry in parsed[stands.seq + 1 :] if entry is None or entry.action not in RECOVERIES
    ]
    if unexplained:
        where = "it is missing" if content is None else f"it stands at entry {stands.seq}"
        found = (
            f"{where}, but {TRAIL_FILE} has {count} lines: lines were added without it, or it was put back"
        )
        return head, lag, [TrailFault("head", HEAD_FILE, None, found)]
    return head, lag, []


def _head_of(content: bytes) -> TrailHead:
    if not content.endswith(b"\n"):
        raise NotCanonicalError("the line end is missing")
    value = parse_canonical(content[:-1])
    if not isinstance(value, dict) or sorted(value) != ["seq", "sha256"]:
        raise NotCanonicalError('it does not hold "seq" and "sha256" alone')
    seq, digest = value["seq"], value["sha256"]
    if not (isinstance(seq, int) and not isinstance(seq, bool) and seq >= 1 and isinstance(digest, str)):
        raise NotCanonicalError('"seq" is not a whole number from 1, or "sha256" not a text')
    if not is_digest(digest):
        raise NotCanonicalError('"sha256" is not a SHA-256')
    return TrailHead(seq, digest)
