"""Deviations that the audit trail itself shows: late or changed data, data too early, the clock moved."""

from collections.abc import Iterator, Mapping, Sequence
from datetime import datetime, timedelta
from itertools import pairwise
from typing import Any

from assayfolio.canonical import Json
from assayfolio.evidence.entries import TrailEntry
from assayfolio.evidence.history import ALLOTTED, split_subject
from assayfolio.evidence.register import DataUse, ReceivedFile, data_digests, read_register
from assayfolio.workflow.registration import BEFORE, minute_text

_MOST_MOVES = 5
_BEYOND_KEEPING = timedelta(seconds=60)  # what a time source that keeps a clock would not do in one step


def departures(
    entries: Sequence[TrailEntry],
    record: Mapping[str, Any],
    data: Mapping[str, str],
    exclusions: str | None,
) -> list[dict[str, Json]]:
    """What the trail shows to have departed from the plan, each with `what` and `reason`.

    `record` is the run's registration record so far, `data` its raw data files, SHA-256 by path, `exclusions`
    the SHA-256 of its file of exclusions, None without one.
    """
    register = read_register(entries)
    received = register.received
    found = [
        *_there_before(record, data),
        *_late(entries, record["study"], received, data),
        *_changed(received, data),
        *_excluded_later(register.uses, record["study"], frozenset(data.values()), exclusions),
        *_clock(_of_study(entries, record["study"], data)),
    ]
    return [{"what": what, "reason": reason} for what, reason in found]


def _there_before(record: Mapping[str, Any], data: Mapping[str, str]) -> Iterator[tuple[str, str]]:
    """Data of this run that lay in their place when a protocol was registered, not seen by any run yet."""
    digests = set(data.values())
    for item in record["protocols"]:
        if item["timing"] != BEFORE:
            return
        there = [one["path"] for one in item["data_present"] if one["sha256"] in digests]
        if there:
            what = f"{', '.join(there)} lay in its place when {item['protocol']} was registered"
            yield (
                what,
                f"dates: registered {minute_text(item['time'])}; whether anyone had read it is not known",
            )
            return


def _late(
    entries: Sequence[TrailEntry], study: str, received: Sequence[ReceivedFile], data: Mapping[str, str]
) -> Iterator[tuple[str, str]]:
    """Data that came after a first run of the study on other data."""
    digests = set(data.values())
    for entry in entries:
        run = split_subject(entry.subject) if entry.action == ALLOTTED else None
        if run is None or run[0] != study or data_digests(entry, ()) >= digests:
            continue
        late = [file for file in received if file.sha256 in digests and file.seq > entry.seq]
        if late:
            named = ", ".join(sorted(_path(file, data) for file in late))
            seen = minute_text(late[0].time)
            what = f"{named} first seen {seen}, after {entry.subject} had begun on other data"
            yield what, f"late data: {entry.subject} began {minute_text(entry.time)}"
            return


def _path(file: ReceivedFile, data: Mapping[str, str]) -> str:
    return next(path for path, digest in data.items() if digest == file.sha256)


def _changed(received: Sequence[ReceivedFile], data: Mapping[str, str]) -> Iterator[tuple[str, str]]:
    """Data files that had been seen with other bytes under the same name before."""
    first = {file.sha256: file for file in received}
    for path, digest in data.items():
        own = first.get(digest)
        before = [
            file
            for file in received
            if file.path == path and file.sha256 != digest and own is not None and file.seq < own.seq
        ]
        if before:
            seen = before[-1]
            what = (
                f"{path} was changed after it was first seen: it had other bytes on {minute_text(seen.time)}"
            )
            yield what, f"late data: SHA-256 {seen.sha256[:16]} then, {digest[:16]} now"


def _excluded_later(
    uses: Sequence[DataUse], study: str, data: frozenset[str], exclusions: str | None
) -> Iterator[tuple[str, str]]:
    """Exclusions that came, changed or went after these data had been analysed in another way."""
    earlier = [use for use in uses if use.study == study and use.data == data and use.outcome == "completed"]
    other = [use for use in earlier if use.exclusions != exclusions]
    if not other or earlier[0].exclusions == exclusions:
        return
    first = earlier[0].subject
    if exclusions is None:
        what = f"nothing is excluded any more, after {first} had been computed with exclusions"
    elif earlier[0].exclusions is None:
        what = f"values were excluded after {first} had been computed with them"
    else:
        what = f"the exclusions are others than those that {first} was computed with"
    reason = f"exclusions after a result: {len(other)} of {len(earlier)} earlier runs had others or none"
    yield what, reason


def _of_study(entries: Sequence[TrailEntry], study: str, data: Mapping[str, str]) -> Sequence[TrailEntry]:
    """The entries from the first one about the study or its data to the last."""
    digests = set(data.values())
    for at, entry in enumerate(entries):
        own = entry.subject == study or entry.subject.startswith(f"{study}/")
        if own or entry.details.get("sha256") in digests:
            return entries[at:]
    return ()


def _clock(entries: Sequence[TrailEntry]) -> Iterator[tuple[str, str]]:
    """Where the clock was moved while the study went on: backwards, or against the counter since start-up."""
    moves = [
        (before, after, by)
        for before, after in pairwise(entries)
        if (by := _moved_by(before, after)) is not None
    ]
    for before, after, by in moves[:_MOST_MOVES]:
        way = "back" if by < 0 else "forward"
        between = f"between entries {before.seq} and {after.seq}"
        what = f"the computer's clock was set {way} by {_length(abs(by))} {between}"
        yield what, f"clock: {before.time[:19]}Z, then {after.time[:19]}Z; entry numbers keep the order"
    if len(moves) > _MOST_MOVES:
        yield (
            f"the computer's clock was moved {len(moves) - _MOST_MOVES} more times",
            "clock: see the audit trail",
        )


def _moved_by(before: TrailEntry, after: TrailEntry) -> float | None:
    """By how many seconds the clock was moved between two entries; None where nothing shows that it was."""
    passed = datetime.fromisoformat(after.time) - datetime.fromisoformat(before.time)
    then, now = before.details.get("at"), after.details.get("at")
    if isinstance(then, Mapping) and isinstance(now, Mapping) and then.get("boot") == now.get("boot"):
        start, end = then.get("monotonic_us"), now.get("monotonic_us")
        if then.get("boot") is not None and isinstance(start, int) and isinstance(end, int):
            moved = passed - timedelta(microseconds=end - start)
            return moved.total_seconds() if abs(moved) > _BEYOND_KEEPING else None
    return passed.total_seconds() if passed < timedelta(0) else None


def _length(seconds: float) -> str:
    if seconds < 120:
        return f"{seconds:.0f} s"
    return f"{seconds / 60:.0f} min" if seconds < 7200 else f"{seconds / 3600:.1f} h"
