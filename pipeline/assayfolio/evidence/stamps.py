"""What every entry says of itself beside its event: who in which roles, and when by which clock.

`by` and `at` stand in the details of each entry; entries of an earlier version have neither.
"""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime, timedelta
from typing import Any, NamedTuple

from assayfolio.canonical import Json
from assayfolio.evidence.entries import TrailEntry

BY, AT = "by", "at"
# A clock that a time source keeps is put right in small steps all the time.
CLOCK_MOVED = timedelta(seconds=5)
_SAME_MOMENT = timedelta(seconds=1)
_MICROSECOND = timedelta(microseconds=1)
_MOVED_MICROSECONDS = CLOCK_MOVED / _MICROSECOND


def person_of(entry: TrailEntry) -> str | None:
    """The person who worked under the entry's account, as the laboratory's list had it then."""
    person = _part(entry, BY).get("person")
    return person if isinstance(person, str) else None


def roles_of(entry: TrailEntry) -> tuple[str, ...]:
    """The roles that the person had then."""
    roles = _part(entry, BY).get("roles")
    return tuple(role for role in roles if isinstance(role, str)) if isinstance(roles, list) else ()


def local_time_of(entry: TrailEntry) -> str | None:
    """The entry's time with the offset of the computer's time zone."""
    local = _part(entry, AT).get("local")
    return local if isinstance(local, str) else None


def is_synchronised(entry: TrailEntry) -> bool | None:
    """Whether a time source kept the clock then; None where that was not known."""
    kept = _part(entry, AT).get("synchronised")
    return kept if isinstance(kept, bool) else None


def own_details(entry: TrailEntry) -> Mapping[str, Json]:
    """The details of the event itself."""
    return {key: value for key, value in entry.details.items() if key not in (BY, AT)}


def _part(entry: TrailEntry, key: str) -> Mapping[str, Json]:
    part = entry.details.get(key)
    return part if isinstance(part, dict) else {}


@dataclass(frozen=True, slots=True)
class ClockRemark:
    """Something about the clock at one entry. `impossible`: no clock does that, so an entry was made up."""

    entry: TrailEntry
    words: str
    impossible: bool


class _Reading(NamedTuple):
    """An entry, its time as a moment, and what it says of the clock."""

    entry: TrailEntry
    moment: datetime
    at: Mapping[str, Json]


def clock_remarks(entries: Sequence[TrailEntry]) -> Iterator[ClockRemark]:
    """Where the clock was set back or forward between entries, and where what they say of it cannot be.

    Between two entries of one start-up the counter says how much time has passed; a clock that was set shows
    by more than 5 s of difference.
    """
    before: _Reading | None = None
    for entry in entries:
        reading = _Reading(entry, datetime.fromisoformat(entry.time), _part(entry, AT))
        if before is None or not _is_plain(before, reading):
            remark = _of_one(reading) or (None if before is None else _of_two(before, reading))
            if remark is not None:
                yield remark
        before = reading


def _is_plain(then: _Reading, now: _Reading) -> bool:
    """Whether plainly nothing is to be said of the second; what is left is for `_of_one` and `_of_two`."""
    at: Mapping[str, Any] = now.at
    before: Mapping[str, Any] = then.at
    clock = now.moment - then.moment
    try:
        passed = at["monotonic_us"] - before["monotonic_us"]
        apart = clock / _MICROSECOND - passed
        local = datetime.fromisoformat(at["local"]) - now.moment
        same_start = at["boot"] == before["boot"] is not None
    except (KeyError, TypeError, ValueError):
        return False
    return (
        same_start
        and clock >= _NO_TIME
        and passed >= 0
        and -_MOVED_MICROSECONDS <= apart <= _MOVED_MICROSECONDS
        and -_SAME_MOMENT <= local <= _SAME_MOMENT
    )


def _of_one(reading: _Reading) -> ClockRemark | None:
    entry, local = reading.entry, reading.at.get("local")
    if not isinstance(local, str):
        return None
    try:
        apart = abs(datetime.fromisoformat(local) - reading.moment)
    except (ValueError, TypeError):
        return ClockRemark(entry, f"entry {entry.seq} gives no local time that can be understood", True)
    if apart > _SAME_MOMENT:
        words = f"entry {entry.seq} gives two different times, {entry.time} and {local}"
        return ClockRemark(entry, words, True)
    return None


def _of_two(then: _Reading, now: _Reading) -> ClockRemark | None:
    before, entry = then.entry, now.entry
    clock = now.moment - then.moment
    passed = _passed(then.at, now.at)
    if clock >= _NO_TIME and (passed is None or (passed >= _NO_TIME and abs(clock - passed) <= CLOCK_MOVED)):
        return None
    times = f"entry {entry.seq} ({entry.time}) is dated before entry {before.seq} ({before.time})"
    if clock < _NO_TIME and now.at and not isinstance(now.at.get("behind_seconds"), int | float):
        words = f"{times} and does not say so, as every entry does that is made while the clock stands behind"
        return ClockRemark(entry, words, True)
    if passed is None:
        return ClockRemark(entry, f"{times}: the clock was set back", False)
    if passed < _NO_TIME:
        words = (
            f"the counter of entry {entry.seq} runs behind that of entry {before.seq} of the same start-up"
        )
        return ClockRemark(entry, words, True)
    if abs(clock - passed) > CLOCK_MOVED:
        way = "back" if clock < passed else "forward"
        words = (
            f"the clock was set {way} by {abs(clock - passed).total_seconds():.0f} s between entries "
            f"{before.seq} and {entry.seq} ({before.time}, {entry.time})"
        )
        return ClockRemark(entry, words, False)
    return ClockRemark(entry, f"{times}: the clock was set back", False)


_NO_TIME = timedelta(0)


def _passed(then: Mapping[str, Json], now: Mapping[str, Json]) -> timedelta | None:
    """What has passed between two entries by the counter; None where they are not of one start-up."""
    boot = now.get("boot")
    if boot is None or boot != then.get("boot"):
        return None
    first, second = then.get("monotonic_us"), now.get("monotonic_us")
    if not isinstance(first, int) or not isinstance(second, int):
        return None
    return timedelta(microseconds=second - first)
