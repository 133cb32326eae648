"""What every entry says of itself beside its event: who in which roles, and when by which clock.

`by` and `at` stand in the details of each entry; entries of an earlier version have neither.
"""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime, timedelta

from assayfolio.canonical import Json
from assayfolio.evidence.entries import TrailEntry

BY, AT = "by", "at"
# A clock that a time source keeps is put right in small steps all the time.
CLOCK_MOVED = timedelta(seconds=5)
_SAME_MOMENT = timedelta(seconds=1)


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


def clock_remarks(entries: Sequence[TrailEntry]) -> Iterator[ClockRemark]:
    """Where the clock was set back or forward between entries, and where what they say of it cannot be.

    Between two entries of one start-up the counter says how much time has passed; a clock that was set shows
    by more than 5 s of difference.
    """
    before: TrailEntry | None = None
    for entry in entries:
        found = _of_one(entry)
        if before is not None:
            found = found or _of_two(before, entry)
        if found is not None:
            yield found
        before = entry


def _of_one(entry: TrailEntry) -> ClockRemark | None:
    local = local_time_of(entry)
    if local is None:
        return None
    # The clock's own moment, written twice: the common case is told by the text alone.
    if local.startswith(entry.time[:-1]) and local.endswith(("+00:00", "Z")):
        return None
    try:
        apart = abs(datetime.fromisoformat(local) - datetime.fromisoformat(entry.time))
    except (ValueError, TypeError):
        return ClockRemark(entry, f"entry {entry.seq} gives no local time that can be understood", True)
    if apart > _SAME_MOMENT:
        words = f"entry {entry.seq} gives two different times, {entry.time} and {local}"
        return ClockRemark(entry, words, True)
    return None


def _of_two(before: TrailEntry, entry: TrailEntry) -> ClockRemark | None:
    then, now = _part(before, AT), _part(entry, AT)
    dated_back = entry.time < before.time
    if now and dated_back and not _said_behind(now):
        words = (
            f"entry {entry.seq} ({entry.time}) is dated before entry {before.seq} ({before.time}) and does "
            "not say so, which every entry does that is made while the clock stands behind"
        )
        return ClockRemark(entry, words, True)
    moved = _moved(before, entry, then, now)
    if moved is not None and moved[0] < timedelta(0):
        words = (
            f"the counter of entry {entry.seq} runs behind that of entry {before.seq} of the same start-up"
        )
        return ClockRemark(entry, words, True)
    if moved is not None and abs(moved[1]) > CLOCK_MOVED:
        way = "back" if moved[1] < timedelta(0) else "forward"
        seconds = abs(moved[1]).total_seconds()
        words = (
            f"the clock was set {way} by {seconds:.0f} s between entries {before.seq} and {entry.seq} "
            f"({before.time}, {entry.time})"
        )
        return ClockRemark(entry, words, False)
    if dated_back:
        words = (
            f"entry {entry.seq} ({entry.time}) is dated before entry {before.seq} ({before.time}): "
            "the clock was set back"
        )
        return ClockRemark(entry, words, False)
    return None


def _said_behind(at: Mapping[str, Json]) -> bool:
    return isinstance(at.get("behind_seconds"), int | float)


def _moved(
    before: TrailEntry, entry: TrailEntry, then: Mapping[str, Json], now: Mapping[str, Json]
) -> tuple[timedelta, timedelta] | None:
    """What has passed by the counter, and by how much more the clock went on; None where that is not told."""
    boot = now.get("boot")
    if boot is None or boot != then.get("boot"):
        return None
    first, second = then.get("monotonic_us"), now.get("monotonic_us")
    if not isinstance(first, int) or not isinstance(second, int):
        return None
    passed = timedelta(microseconds=second - first)
    if entry.time == before.time:
        return passed, -passed
    clock = datetime.fromisoformat(entry.time) - datetime.fromisoformat(before.time)
    return passed, clock - passed
