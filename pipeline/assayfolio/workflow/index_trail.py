"""The audit trail as the register reads it: only what was added since, and single lines again by their place.

The register does not judge the trail, verification does. A line that does not follow from the one before is
counted, and the pages say so.
"""

import os
from collections.abc import Iterable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path

from assayfolio.canonical import sha256_hex
from assayfolio.evidence.entries import NO_LINE, TRAIL_FILE, TrailEntry, TrailHead, entry_of
from assayfolio.evidence.files import explained
from assayfolio.evidence.strict_json import NotCanonicalError, parse_canonical_lines

_BLOCK = 16 * 1024 * 1024


@dataclass(frozen=True, slots=True)
class Mark:
    """How far the trail was read: the last whole line, where it begins and where it ends."""

    head: TrailHead
    begin: int
    end: int


START = Mark(TrailHead(0, NO_LINE), 0, 0)


@dataclass(frozen=True, slots=True)
class PlacedEntry:
    """An entry, and the bytes of the trail that hold its line."""

    entry: TrailEntry
    begin: int
    size: int


@dataclass(frozen=True, slots=True)
class Block:
    """Some lines of the trail: their entries, how many are not orderly, and the mark after them."""

    entries: tuple[PlacedEntry, ...]
    faults: int
    mark: Mark


class TrailLines:
    """The open trail. Made by `open_lines`."""

    def __init__(self, path: Path, descriptor: int) -> None:
        self._path = path
        self._descriptor = descriptor

    def follows(self, mark: Mark) -> bool:
        """Whether the line of `mark` stands where it stood. Lines before it are verification's affair."""
        if mark == START:
            return True
        line = self._read(mark.begin, mark.end - mark.begin)
        return line.endswith(b"\n") and sha256_hex(line[:-1]) == mark.head.sha256

    def blocks(self, mark: Mark) -> Iterator[Block]:
        """What stands after `mark`, in whole lines; an unfinished line at the end is left for later."""
        while True:
            content = self._read(mark.end, _BLOCK)
            whole = content.rfind(b"\n") + 1
            if not whole and len(content) == _BLOCK:
                content = self._read(mark.end, os.fstat(self._descriptor).st_size - mark.end)
                whole = content.rfind(b"\n") + 1
            if not whole:
                return
            block = _block(content[: whole - 1].split(b"\n"), mark)
            yield block
            mark = block.mark

    def entries_at(self, places: Iterable[tuple[int, int]]) -> list[TrailEntry]:
        """The entries whose lines begin and are as long as `places` say."""
        values = parse_canonical_lines([self._read(begin, size) for begin, size in places])
        # What is no entry was changed since it was read: verification tells.
        found = (entry_of(value)[0] for value in values if not isinstance(value, NotCanonicalError))
        return [entry for entry in found if entry is not None]

    def _read(self, begin: int, size: int) -> bytes:
        with explained("read the audit trail", self._path):
            return os.pread(self._descriptor, size, begin)


def _block(lines: list[bytes], mark: Mark) -> Block:
    entries, faults = [], 0
    seq, before, begin, end = mark.head.seq, mark.head.sha256, mark.begin, mark.end
    for line, value in zip(lines, parse_canonical_lines(lines), strict=True):
        entry = None if isinstance(value, NotCanonicalError) else entry_of(value)[0]
        seq += 1
        if entry is None or entry.seq != seq or entry.previous != before:
            faults += 1
        if entry is not None:
            entries.append(PlacedEntry(entry, end, len(line)))
        before, begin, end = sha256_hex(line), end, end + len(line) + 1
    return Block(tuple(entries), faults, Mark(TrailHead(seq, before), begin, end))


@contextmanager
def open_lines(runs: Path) -> Iterator[TrailLines]:
    """The trail in `runs` for reading; where nothing was ever entered it has no lines."""
    path = runs / TRAIL_FILE
    with explained("read the audit trail", path):
        try:
            descriptor = os.open(path, os.O_RDONLY | os.O_NOFOLLOW)
        except FileNotFoundError:
            descriptor = os.open(os.devnull, os.O_RDONLY)
    try:
        yield TrailLines(path, descriptor)
    finally:
        os.close(descriptor)
