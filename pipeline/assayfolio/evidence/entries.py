"""What the audit trail is made of: entries, the head beside them, and what can be wrong with them.

`runs/audit-trail.jsonl` holds one entry a line in canonical JSON (RFC 8785). An entry carries the SHA-256 of
the line before it (without the line's end), the first one 64 zeros. `runs/audit-trail.head` holds the
number and the SHA-256 of the newest line, so that a changed or lost last line shows as well.
"""

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from datetime import datetime
from typing import Literal

from assayfolio.canonical import Json, canonical_bytes, sha256_hex
from assayfolio.errors import MachineError
from assayfolio.evidence.strict_json import NotCanonicalError, parse_canonical

TRAIL_FILE = "audit-trail.jsonl"
HEAD_FILE = "audit-trail.head"
NO_LINE = "0" * 64

HEAD_RESTORED = "head-restored"
TORN_LINE_SET_ASIDE = "torn-line-set-aside"
RECOVERIES = frozenset({HEAD_RESTORED, TORN_LINE_SET_ASIDE})

# In the order in which canonical JSON has them.
_KEYS = ("action", "actor", "details", "previous", "reason", "seq", "subject", "time")
_TIME = re.compile(r"\d{4}-[01]\d-[0-3]\dT[0-2]\d:[0-5]\d:[0-6]\d\.\d{6}Z", re.ASCII)
_DIGEST = re.compile(r"[0-9a-f]{64}", re.ASCII)


class TrailBrokenError(MachineError):
    """The audit trail is not as this program left it, so nothing is added to it."""


def is_trail_time(text: str) -> bool:
    """Whether `text` is a time as entries carry it: RFC 3339 in UTC, as 2026-01-31T09:15:00.000000Z."""
    if _TIME.fullmatch(text) is None:
        return False
    try:
        datetime.fromisoformat(text)
    except ValueError:
        return False  # no such day or hour
    return True


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


def parse_entry(line: bytes) -> TrailEntry:
    """The entry whose line (without its end) is exactly `line`. Raises NotCanonicalError with the reason."""
    entry, found = entry_of(parse_canonical(line))
    if entry is None:
        raise NotCanonicalError(found)
    return entry


def entry_of(value: Json) -> tuple[TrailEntry | None, str]:
    """The entry that a value of canonical JSON makes; or None, and why it makes none."""
    if not isinstance(value, dict):
        return None, "it is not an object"
    if tuple(value) != _KEYS:
        odd = sorted(set(_KEYS).symmetric_difference(value))
        return None, f"keys missing or unknown: {', '.join(odd)}"
    action, actor, details, previous, reason, seq, subject, time = value.values()
    if (
        type(seq) is int
        and seq >= 1
        and type(time) is str
        and is_trail_time(time)
        and type(actor) is type(action) is type(subject) is type(previous) is str
        and (reason is None or type(reason) is str)
        and type(details) is dict
    ):
        return TrailEntry(seq, time, actor, action, subject, reason, details, previous), ""
    return None, _trouble(value)


def _trouble(value: Mapping[str, Json]) -> str:
    """What is wrong with a value of an entry's keys that makes none."""
    seq, time = value["seq"], value["time"]
    if not (isinstance(seq, int) and not isinstance(seq, bool) and seq >= 1):
        return '"seq" is not a whole number from 1'
    if not (isinstance(time, str) and is_trail_time(time)):
        return '"time" is not a UTC time with microseconds'
    if not all(isinstance(value[key], str) for key in ("actor", "action", "subject")):
        return '"actor", "action" or "subject" is not a text'
    if not (value["reason"] is None or isinstance(value["reason"], str)):
        return '"reason" is neither a text nor null'
    if not isinstance(value["details"], dict):
        return '"details" is not an object'
    return '"previous" is not a text'
