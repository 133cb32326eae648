"""Reading the audit trail as it stands on the disk, and judging it; nothing is ever written here."""

from collections.abc import Iterator, Sequence
from pathlib import Path

from assayfolio.canonical import sha256_hex
from assayfolio.evidence.entries import (
    EMPTY_HEAD,
    HEAD_FILE,
    NO_LINE,
    RECOVERIES,
    TRAIL_FILE,
    TrailEntry,
    TrailFault,
    TrailHead,
    TrailReading,
    entry_of,
    is_digest,
)
from assayfolio.evidence.files import explained, read_regular
from assayfolio.evidence.memory import collector_paused
from assayfolio.evidence.strict_json import NotCanonicalError, parse_canonical, parse_canonical_lines


def read_trail(runs: Path) -> TrailReading:
    """Read the trail and its head in the folder `runs`; judge both; change nothing.

    Raises MachineError where a file is there but cannot be read.
    """
    return _read(runs, None)[0]


class TrailMemory:
    """A trail that was read before, kept so that reading it again only judges what was added.

    Nothing is taken for granted: the bytes are read again and compared with those that were judged. Where
    they differ, all of it is judged anew.
    """

    def __init__(self) -> None:
        self._kept: tuple[bytes, TrailReading] | None = None

    def read(self, runs: Path) -> TrailReading:
        """The same as `read_trail`."""
        kept = self._kept
        reading, content = _read(runs, kept)
        whole = not reading.faults and not reading.torn
        self._kept = (content, reading) if whole else None
        return reading


def _read(runs: Path, kept: tuple[bytes, TrailReading] | None) -> tuple[TrailReading, bytes]:
    # The head first: a writer that works meanwhile can then only make the trail look longer.
    head_bytes = _read_if_there(runs / HEAD_FILE)
    found = _read_if_there(runs / TRAIL_FILE)
    content = found or b""
    known = kept[1] if kept is not None and content.startswith(kept[0]) else _NOTHING
    with collector_paused():
        start = len(kept[0]) if kept is not None and known is kept[1] else 0
        *added, torn = content[start:].split(b"\n")
        lines = (*known.lines, *added)
        digests = (*known.digests, *map(sha256_hex, added))
        new, faults = _parse_lines(added, len(known.lines) + 1)
        parsed = (*known.parsed, *new)
        faults.extend(_sequence_faults(parsed, len(known.lines)))
        faults.extend(_chain_faults(parsed, digests, len(known.lines)))
        head, head_lag, head_faults = _judge_head(head_bytes, parsed, digests, bool(torn))
        faults.extend(head_faults)
        entries = (*known.entries, *(entry for entry in new if entry is not None))
    reading = TrailReading(
        entries=entries,
        lines=lines,
        head=head,
        torn=torn,
        faults=tuple(faults),
        parsed=parsed,
        digests=digests,
        head_lag=head_lag,
        exists=found is not None,
    )
    return reading, content


_NOTHING = TrailReading(
    entries=(),
    lines=(),
    head=None,
    torn=b"",
    faults=(),
    parsed=(),
    digests=(),
    head_lag=0,
    exists=False,
)


def _read_if_there(path: Path) -> bytes | None:
    with explained("read the file", path):
        try:
            return read_regular(path)
        except FileNotFoundError:
            return None


def _parse_lines(lines: list[bytes], first: int) -> tuple[list[TrailEntry | None], list[TrailFault]]:
    parsed: list[TrailEntry | None] = []
    faults: list[TrailFault] = []
    for number, value in enumerate(parse_canonical_lines(lines), start=first):
        entry: TrailEntry | None = None
        if isinstance(value, NotCanonicalError):
            found = str(value) if lines[number - first] else "the line is empty"
        else:
            entry, found = entry_of(value)
        parsed.append(entry)
        if entry is None:
            faults.append(TrailFault("form", TRAIL_FILE, number, found))
    return parsed, faults


def _sequence_faults(parsed: Sequence[TrailEntry | None], judged: int) -> Iterator[TrailFault]:
    """Each number that does not follow from the one before; a shift is told once, where it begins.

    The first `judged` lines are known to be right.
    """
    expected: int | None = judged + 1
    for number, entry in enumerate(parsed[judged:], start=judged + 1):
        if entry is None:
            expected = None if expected is None else expected + 1
            continue
        if expected is not None and entry.seq != expected:
            found = f"it has the number {entry.seq} where {expected} should stand"
            yield TrailFault("sequence", TRAIL_FILE, number, found)
        expected = entry.seq + 1


def _chain_faults(
    parsed: Sequence[TrailEntry | None], digests: Sequence[str], judged: int
) -> Iterator[TrailFault]:
    before = digests[judged - 1] if judged else NO_LINE
    pairs = zip(parsed[judged:], digests[judged:], strict=True)
    for number, (entry, digest) in enumerate(pairs, start=judged + 1):
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
    content: bytes | None, parsed: Sequence[TrailEntry | None], digests: Sequence[str], torn: bool
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
