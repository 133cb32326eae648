"""Writing the audit trail: one writer at a time, entry by entry, each on the disk before the next thing.

An append is one write of the line, an fsync of the trail, then the head replaced by rename. A process that
is killed in between leaves one of three states, and the next writer mends them openly, with an entry each:

* part of a line at the end: its bytes are moved to `audit-trail.torn-<number>`, the trail is cut back to
  its last whole line, and "torn-line-set-aside" is entered;
* a whole line that the head does not know yet: "head-restored" is entered;
* bytes moved aside, the entry about them missing: "torn-line-set-aside" is entered.

Anything else is not the mark of a killed writer, and `open_trail` refuses with TrailBrokenError.
"""

import os
from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from contextlib import contextmanager
from pathlib import Path
from types import MappingProxyType
from typing import TypeAlias

from assayfolio.canonical import Json, sha256_hex
from assayfolio.errors import InputError, MachineError
from assayfolio.evidence.entries import (
    HEAD_FILE,
    HEAD_RESTORED,
    TORN_LINE_SET_ASIDE,
    TRAIL_FILE,
    TrailBrokenError,
    TrailEntry,
    TrailFault,
    TrailHead,
    TrailReading,
    is_trail_time,
    set_aside_files,
)
from assayfolio.evidence.files import explained, read_regular, replace_file, sync_folder
from assayfolio.evidence.locks import lock_path, take_lock
from assayfolio.evidence.telling import SUBJECT, Notice, Telling
from assayfolio.evidence.trail_reading import TrailMemory, read_trail
from assayfolio.evidence.witnesses import Witness

__all__ = [
    "TORN_PREFIX",
    "WRITER",
    "TrailBrokenError",
    "TrailEntry",
    "TrailFault",
    "TrailHead",
    "TrailReading",
    "TrailWriter",
    "open_trail",
    "read_trail",
]

WRITER = "writer"
TORN_PREFIX = "audit-trail.torn-"
_memory = TrailMemory()
_NO_DETAILS: Mapping[str, Json] = MappingProxyType({})
Stamp: TypeAlias = Callable[[TrailEntry | None], Mapping[str, Json]]
"""Given the last entry, what goes into the details of the next one beside the event's own."""
Witnesses: TypeAlias = Callable[[Sequence[TrailEntry]], Sequence[Witness]]
"""Given all entries, the places that are to be told of the next ones."""


class TrailWriter:
    """Appends to the trail while the writer's lock is held. Made by `open_trail` alone."""

    def __init__(
        self,
        runs: Path,
        actor: str,
        now: Callable[[], str],
        stamp: Stamp,
        telling: Telling,
        reading: TrailReading,
        descriptor: int,
    ) -> None:
        self.runs = runs
        self.reading = reading
        self._actor = actor
        self._now = now
        self._stamp = stamp
        self._telling = telling
        self._descriptor = descriptor
        self._entries = list(reading.entries)
        self._head = reading.last
        self._size = sum(len(line) for line in reading.lines) + len(reading.lines)
        self._usable = True

    @property
    def head(self) -> TrailHead:
        """Number and digest of the newest line; 0 and 64 zeros where there is none."""
        return self._head

    @property
    def entries(self) -> tuple[TrailEntry, ...]:
        """Every entry of the trail, those of this writer included."""
        return tuple(self._entries)

    def append(
        self, action: str, subject: str, reason: str | None = None, details: Mapping[str, Json] = _NO_DETAILS
    ) -> TrailEntry:
        """Enter one event and return when it is on the disk.

        Raises InputError for a text that cannot be written in UTF-8; MachineError where the disk refuses
        (this writer then appends no more: opening the trail again mends what was left); TrailBrokenError
        where another program has changed the file meanwhile; ValueError where `details` hold what canonical
        JSON cannot or `now` gives no time of the right form.
        """
        entry = self._enter(action, subject, reason, details)
        self._tell_witnesses(entry)
        return entry

    def close(self) -> None:
        """Tell the witnesses that are told of the last entry only. After a failed append nothing is told."""
        if self._usable and len(self._entries) > len(self.reading.entries):
            self.enter_notices(self._telling.close(self._entries[-1], self._head))

    def enter_notices(self, notices: Iterable[Notice]) -> None:
        """Enter what is to be said of witnesses."""
        for notice in notices:
            self.append(notice.action, SUBJECT, notice.reason, notice.details)

    def _tell_witnesses(self, entry: TrailEntry) -> None:
        # What is entered about one witness goes to the others too; a witness out of reach is left alone.
        self.enter_notices(self._telling.tell(entry, self._head))

    def _enter(
        self, action: str, subject: str, reason: str | None, details: Mapping[str, Json]
    ) -> TrailEntry:
        if not self._usable:
            raise MachineError(f"{self.runs / TRAIL_FILE}: an append failed before; nothing more is entered")
        time = self._now()
        if not is_trail_time(time):
            raise ValueError(f"not a UTC time with microseconds: {time!r}")
        stamp = self._stamp(self._entries[-1] if self._entries else None)
        if not stamp.keys().isdisjoint(details):
            raise ValueError(f"the details of {action!r} name what every entry carries: {sorted(stamp)}")
        told = {**details, **stamp}
        _require_utf8(self._actor, action, subject, reason or "", *_texts(told))
        entry = TrailEntry(
            seq=self._head.seq + 1,
            time=time,
            actor=self._actor,
            action=action,
            subject=subject,
            reason=reason,
            details=told,
            previous=self._head.sha256,
        )
        line = entry.line
        self._usable = False
        self._write_line(line)
        head = TrailHead(entry.seq, sha256_hex(line))
        replace_file(self.runs / HEAD_FILE, head.content)
        self._head = head
        self._entries.append(entry)
        self._usable = True
        return entry

    def _write_line(self, line: bytes) -> None:
        path = self.runs / TRAIL_FILE
        content = line + b"\n"
        with explained("add to the audit trail", path):
            if os.fstat(self._descriptor).st_size != self._size:
                raise TrailBrokenError(
                    f"{path}: another program changed it while it was being written. {_ADVICE}"
                )
            written = os.write(self._descriptor, content)
            if written != len(content):
                raise MachineError(
                    f"{path}: only {written} of {len(content)} bytes of an entry could be written "
                    "(is the disk full?). The next command sets the torn line aside."
                )
            os.fsync(self._descriptor)
        self._size += len(content)


_ADVICE = "Nothing was added. Run `assayfolio verify` to see everything that is wrong."


def no_witnesses(_entries: Sequence[TrailEntry]) -> Sequence[Witness]:
    """No place is told."""
    return ()


def _no_stamp(_last: TrailEntry | None) -> Mapping[str, Json]:
    return {}


@contextmanager
def open_trail(
    runs: Path,
    actor: str,
    now: Callable[[], str],
    wait_seconds: float,
    stamp: Stamp = _no_stamp,
    witnesses: Witnesses = no_witnesses,
) -> Iterator[TrailWriter]:
    """Hold the trail in the folder `runs` for writing, mended openly if a writer was killed before.

    `actor`, `now()` and, in its details, `stamp(last entry)` go into every entry, in this order; `now` gives
    RFC 3339 in UTC with microseconds ("2026-01-31T09:15:00.000000Z"). Every entry is told to the witnesses
    when it is on the disk; one that is not reached stops nothing, and that is entered. Raises BusyError
    after `wait_seconds` of waiting for another writer, TrailBrokenError where the trail is not as a writer
    leaves it, MachineError where the disk refuses.
    """
    holder: Json = {"actor": actor, "process": os.getpid(), "since": now()}
    _require_utf8(actor)
    lock = take_lock(lock_path(runs, WRITER), wait_seconds, holder)
    try:
        reading = _memory.read(runs)
        _refuse_broken(runs, reading)
        descriptor = _open_file(runs / TRAIL_FILE, reading.exists)
        try:
            telling = Telling(witnesses(reading.entries), reading.entries)
            writer = TrailWriter(runs, actor, now, stamp, telling, reading, descriptor)
            _recover(writer, reading, descriptor)
            writer.enter_notices(telling.behind(reading.last))
            try:
                yield writer
            finally:
                writer.close()
        finally:
            os.close(descriptor)
    finally:
        os.close(lock)


def _require_utf8(*texts: str) -> None:
    for text in texts:
        try:
            text.encode("utf-8")
        except UnicodeEncodeError:
            shown = text.encode("utf-8", "backslashreplace").decode("utf-8")
            raise InputError(
                f"{shown}: this text or file name holds bytes that are no UTF-8, so it cannot be entered in "
                "the audit trail. Rename the file or correct the text."
            ) from None


def _texts(value: Json) -> Iterator[str]:
    """Every text inside a JSON value, keys included."""
    if isinstance(value, str):
        yield value
    elif isinstance(value, Mapping):
        yield from value
        for part in value.values():
            yield from _texts(part)
    elif isinstance(value, Sequence):
        for part in value:
            yield from _texts(part)


def _refuse_broken(runs: Path, reading: TrailReading) -> None:
    if reading.faults:
        first = reading.faults[0]
        more = f" (and {len(reading.faults) - 1} more)" if len(reading.faults) > 1 else ""
        raise TrailBrokenError(f"{runs / first.file}: the audit trail is broken: {first}{more}. {_ADVICE}")
    if not reading.lines:
        with explained("look for folios", runs):
            folio = next(iter(sorted(runs.glob("*/*/bagit.txt"))), None)
        if folio is not None:
            raise TrailBrokenError(
                f"{runs / TRAIL_FILE}: the audit trail is missing or empty, although "
                f"{folio.parent} is there. {_ADVICE}"
            )


def _open_file(path: Path, exists: bool) -> int:
    with explained("open the audit trail", path):
        descriptor = os.open(path, os.O_RDWR | os.O_APPEND | os.O_CREAT | os.O_NOFOLLOW, 0o644)
    try:
        if not exists:
            sync_folder(path.parent)
    except BaseException:
        os.close(descriptor)
        raise
    return descriptor


def _recover(writer: TrailWriter, reading: TrailReading, descriptor: int) -> None:
    """Mend what a killed writer left. Each step may itself be interrupted and is then found again."""
    runs = writer.runs
    if reading.torn:
        _set_aside(runs, len(reading.lines) + 1, reading.torn)
        with explained("cut the torn line off", runs / TRAIL_FILE):
            os.ftruncate(descriptor, sum(len(line) for line in reading.lines) + len(reading.lines))
            os.fsync(descriptor)
    if reading.head_lag:
        stood = reading.head
        writer.append(
            HEAD_RESTORED,
            "audit trail",
            "the head stood behind the last entry: an append was interrupted before the head moved",
            {
                "head_seq": stood.seq if stood else None,
                "head_sha256": stood.sha256 if stood else None,
                "last_seq": reading.last.seq,
                "last_sha256": reading.last.sha256,
            },
        )
    for path in _unentered(runs, reading):
        with explained("read the torn line", path):
            torn = read_regular(path)
        writer.append(
            TORN_LINE_SET_ASIDE,
            "audit trail",
            "the last line had no end: an append was interrupted while it was being written",
            {"file": path.name, "sha256": sha256_hex(torn), "size": len(torn)},
        )


def _set_aside(runs: Path, number: int, torn: bytes) -> None:
    """Keep the torn bytes in a file of their own, unless an interrupted recovery did so already."""
    base = f"{TORN_PREFIX}{number}"
    path, attempt = runs / base, 1
    while True:
        with explained("set the torn line aside", path):
            try:
                there = read_regular(path)
            except FileNotFoundError:
                break
        if there == torn:
            return
        attempt += 1
        path = runs / f"{base}-{attempt}"
    replace_file(path, torn)


def _unentered(runs: Path, reading: TrailReading) -> list[Path]:
    entered = set_aside_files(reading.entries)
    with explained("look for torn lines", runs):
        return sorted(path for path in runs.glob(f"{TORN_PREFIX}*") if path.name not in entered)
