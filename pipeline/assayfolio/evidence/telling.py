"""Telling witnesses of the entries as they are made, and entering in the trail where one was not reached.

A witness that is not reached stops nothing: that it was not is entered once, and it is left alone for a
minute, so that no command waits for it again and again. When it is reached again, that is entered too, with
the entries it was not told of. The chain makes up for them: a later head vouches for everything before it.
"""

from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime, timedelta

from assayfolio.canonical import Json
from assayfolio.errors import MachineError
from assayfolio.evidence.entries import TrailEntry, TrailHead
from assayfolio.evidence.witnesses import Witness

WITNESS_NOT_REACHED = "witness-not-reached"
WITNESS_REACHED = "witness-reached"
WITNESS_BEHIND = "witness-behind"
ABOUT_WITNESSES = frozenset({WITNESS_NOT_REACHED, WITNESS_REACHED, WITNESS_BEHIND})
SUBJECT = "audit trail"
REST = timedelta(minutes=1)
# When this process last tried in vain: the trail tells of the first time only.
_tried: dict[str, str] = {}


@dataclass(frozen=True, slots=True)
class Notice:
    """Something about a witness that is to be entered in the trail."""

    action: str
    reason: str
    details: Mapping[str, Json]


class Telling:
    """The witnesses of one opening of the trail, and which of them could not be reached before."""

    def __init__(self, witnesses: Iterable[Witness], entries: Sequence[TrailEntry]) -> None:
        self._witnesses = tuple(witnesses)
        self._opened_at = len(entries)
        self._missed = missed_since(entries, {each.name for each in self._witnesses})

    def behind(self, head: TrailHead) -> Iterator[Notice]:
        """Witnesses that do not keep the newest head, though nothing says that they were not reached.

        That is so where the command before was ended between the entry and the witness, and where an entry
        was added by other means. One that keeps nothing yet is a new one.
        """
        for witness in self._witnesses:
            if not witness.each_entry or witness.name in self._missed or head.seq == 0:
                continue
            try:
                newest = witness.kept().newest
            except MachineError:
                continue  # one that may only be written to, or that `tell` will find out of reach
            if 0 < newest.seq < head.seq:
                yield Notice(
                    WITNESS_BEHIND,
                    f"the witness stood at entry {newest.seq}, the trail at {head.seq}: a command was ended "
                    "before it could tell the witness, or entries were added by other means",
                    {"witness": witness.name, "from_seq": newest.seq + 1, "through_seq": head.seq},
                )

    def tell(self, entry: TrailEntry, head: TrailHead) -> list[Notice]:
        """Tell the witnesses of a new entry; return what has to be entered about them."""
        return self._tell([each for each in self._witnesses if each.each_entry], entry, head, entry.seq)

    def close(self, entry: TrailEntry, head: TrailHead) -> list[Notice]:
        """Tell the witnesses that are told once, when the trail is closed, of its last entry."""
        at_the_end = [each for each in self._witnesses if not each.each_entry]
        return self._tell(at_the_end, entry, head, self._opened_at + 1)

    def _tell(
        self, witnesses: Iterable[Witness], entry: TrailEntry, head: TrailHead, first: int
    ) -> list[Notice]:
        """Tell them of a head that stands for the entries from `first` on."""
        notices = []
        for witness in witnesses:
            missed = self._missed.get(witness.name)
            if missed is not None:
                tried = max(missed.time, _tried.get(witness.name, ""))
                if _moment(entry.time) - _moment(tried) < REST:
                    continue
            since = first if missed is None else missed.seq
            details: dict[str, Json] = {"witness": witness.name, "from_seq": since}
            try:
                witness.tell(head, entry.time)
            except MachineError as error:
                if missed is None:
                    notices.append(Notice(WITNESS_NOT_REACHED, str(error), details))
                self._missed[witness.name] = _Missed(since, entry.time)
                _tried[witness.name] = entry.time
                continue
            if missed is not None:
                del self._missed[witness.name]
                details["through_seq"] = entry.seq - 1
                notices.append(Notice(WITNESS_REACHED, "the witness could be reached again", details))
        return notices


@dataclass(frozen=True, slots=True)
class _Missed:
    """The first entry that a witness was not told of, and when it was last tried."""

    seq: int
    time: str


def missed_since(entries: Iterable[TrailEntry], names: set[str]) -> dict[str, _Missed]:
    """Which of the witnesses could not be reached when last tried, as the trail has it."""
    missed: dict[str, _Missed] = {}
    for entry in entries:
        if entry.action not in (WITNESS_NOT_REACHED, WITNESS_REACHED):
            continue
        name, seq = entry.details.get("witness"), entry.details.get("from_seq")
        if not isinstance(name, str) or not isinstance(seq, int) or name not in names:
            continue
        if entry.action == WITNESS_NOT_REACHED:
            missed[name] = _Missed(seq, entry.time)
        else:
            missed.pop(name, None)
    return missed


def explained_gaps(entries: Iterable[TrailEntry], name: str, last: int) -> list[range]:
    """The entries that a witness was not told of, as the trail itself says; `last` is its newest entry.

    A command that was ended leaves one entry untold, so that more than one is not explained by that.
    """
    gaps: list[range] = []
    since: int | None = None
    for entry in entries:
        if entry.details.get("witness") != name:
            continue
        first, through = entry.details.get("from_seq"), entry.details.get("through_seq")
        if entry.action == WITNESS_NOT_REACHED and isinstance(first, int):
            since = first
        elif not isinstance(first, int) or not isinstance(through, int):
            continue
        elif entry.action == WITNESS_REACHED:
            gaps.append(range(first, through + 1))
            since = None
        elif entry.action == WITNESS_BEHIND and first == through:
            gaps.append(range(first, through + 1))
    if since is not None:
        gaps.append(range(since, last + 1))
    return gaps


def _moment(time: str) -> datetime:
    return datetime.fromisoformat(time)
