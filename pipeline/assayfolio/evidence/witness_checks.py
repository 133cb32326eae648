"""Check 1.7: the audit trail against the heads that are kept elsewhere."""

import os
import time
from collections.abc import Iterable
from datetime import datetime, timedelta
from pathlib import Path

from assayfolio.errors import MachineError
from assayfolio.evidence.entries import HEAD_FILE, TRAIL_FILE, TrailReading
from assayfolio.evidence.locks import is_locked
from assayfolio.evidence.outcomes import CheckOutcome, Tally
from assayfolio.evidence.settings import witness_in_force_since
from assayfolio.evidence.telling import ABOUT_WITNESSES, explained_gaps
from assayfolio.evidence.trail import WRITER
from assayfolio.evidence.witnesses import KeptHeads, PrintedHead, Witness

NUMBER, TITLE = "1.7", "the audit trail agrees with the heads kept elsewhere"
_NO_WITNESS = (
    "compared with no head kept elsewhere (witness or archived report): a trail cut back together with its "
    "head would show only through the folios, and one built anew together with them not at all"
)
_MOST_NAMED = 3
_SETTLING_SECONDS = 0.2
_CLOCKS_DIFFER = timedelta(minutes=1)


def check_witnesses(runs: Path, reading: TrailReading, witnesses: Iterable[Witness]) -> CheckOutcome:
    """Compare the trail with every witness that can be reached.

    Failed: the trail is shorter than a witness has it, an entry is another than the witness was told of, the
    witness lacks heads without the trail saying why. Not checkable: a witness that cannot be reached, or
    holds what is no head. Said as well: who could alter the witness, and the trail itself.
    """
    tally = Tally()
    asked = 0
    for witness in witnesses:
        asked += 1
        _compare(runs, reading, witness, tally)
    if not asked:
        tally.remarks.append(_NO_WITNESS)
    tally.remarks.append(_trail_guard_words(runs))
    return tally.outcome(NUMBER, TITLE, "audit trail")


def _compare(runs: Path, reading: TrailReading, witness: Witness, tally: Tally) -> None:
    try:
        kept = witness.kept()
        if kept.newest.seq < len(reading.lines) and is_locked(runs, WRITER):
            time.sleep(_SETTLING_SECONDS)  # an entry that is just being made
            kept = witness.kept()
    except MachineError as error:
        tally.unchecked.append(f"{witness.name}: not reached, so not compared: {error}")
        return
    guard = kept.guard
    tally.unchecked.extend(f"{witness.name}: {trouble}" for trouble in kept.troubles)
    if not kept.digests:
        tally.unchecked.append(f"{witness.name}: it keeps no head yet; {guard}")
        return
    count, newest = len(reading.lines), kept.newest
    wrong = [
        seq for seq in sorted(kept.digests) if seq <= count and reading.digests[seq - 1] != kept.digests[seq]
    ]
    if wrong:
        more = f" and {len(wrong) - 1} of the later ones" if len(wrong) > 1 else ""
        tally.failed.append(
            f"{witness.name}: entry {wrong[0]}{more} is not the one that the witness was told of: the audit "
            f"trail was changed or built anew from there on ({guard})"
        )
    if newest.seq > count:
        tally.failed.append(
            f"{witness.name}: it was told of entry {newest.seq}, the audit trail has {count}: "
            f"it was cut back, or an earlier copy was put in its place ({guard})"
        )
    if witness.each_entry:
        _judge_gaps(reading, witness.name, frozenset(kept.digests), tally)
    elif not isinstance(witness, PrintedHead):
        _judge_end(reading, witness.name, newest.seq, tally)
    _judge_times(reading, witness.name, kept, tally)
    if not wrong and newest.seq <= count:
        tally.remarks.append(
            f"{witness.name}: {_heads(len(kept.digests))} up to entry {newest.seq} of {count}; {guard}"
        )


def _heads(count: int) -> str:
    return "1 head agrees," if count == 1 else f"{count} heads agree,"


def _judge_gaps(reading: TrailReading, name: str, kept: frozenset[int], tally: Tally) -> None:
    """Heads that a witness should have been told of: from its first on, or since the settings name it."""
    count = len(reading.lines)
    since = witness_in_force_since(reading.entries, name)
    first = min(min(kept), count if since is None else since)
    missing = set(range(first, count + 1)) - kept
    known = [gap for gap in explained_gaps(reading.entries, name, count) if missing.intersection(gap)]
    for gap in known:
        missing.difference_update(gap)
    tally.remarks.extend(
        f"{name}: not told of entries {gap.start} to {gap.stop - 1}, as the audit trail says" for gap in known
    )
    if missing == {count}:
        tally.unchecked.append(
            f"{name}: not told of the last entry, {count}: the command that made it was ended before it "
            "could, or the entry was added by other means. The next command that writes enters what it found."
        )
    elif missing:
        named = ", ".join(map(str, sorted(missing)[:_MOST_NAMED]))
        more = f" and {len(missing) - _MOST_NAMED} more" if len(missing) > _MOST_NAMED else ""
        lacking = "the head of entry" if len(missing) == 1 else "the heads of entries"
        tally.failed.append(
            f"{name}: it lacks {lacking} {named}{more}, and the audit trail does not say why: heads were "
            "taken out there, or entries were added here by other means"
        )


def _judge_end(reading: TrailReading, name: str, newest: int, tally: Tally) -> None:
    """Entries after the last that a witness was told of, where it is told when the trail is closed."""
    later = [entry for entry in reading.entries[newest:] if entry.action not in ABOUT_WITNESSES]
    gaps = explained_gaps(reading.entries, name, len(reading.lines))
    untold = [entry.seq for entry in later if not any(entry.seq in gap for gap in gaps)]
    if untold:
        tally.unchecked.append(
            f"{name}: not told of entries from {untold[0]} on: the command that made them was ended "
            "before it could, or they were added by other means"
        )


def _judge_times(reading: TrailReading, name: str, kept: KeptHeads, tally: Tally) -> None:
    """Entries that are dated later than somebody else's clock had it, which cannot be."""
    ahead = [
        (seq, datetime.fromisoformat(entry.time), told)
        for seq, told in sorted(kept.times.items())
        if seq <= len(reading.parsed)
        and (entry := reading.parsed[seq - 1]) is not None
        and datetime.fromisoformat(entry.time) - told > _CLOCKS_DIFFER
    ]
    if ahead:
        seq, dated, told = ahead[0]
        more = f", and {len(ahead) - 1} later ones likewise" if len(ahead) > 1 else ""
        tally.failed.append(
            f"{name}: entry {seq} is dated {dated:%Y-%m-%d %H:%M:%S} UTC, its time stamp says "
            f"{told:%Y-%m-%d %H:%M:%S} UTC{more}: this computer's clock was ahead"
        )
    elif kept.times:
        seq = max(kept.times)
        tally.remarks.append(f"{name}: entry {seq} was there at {kept.times[seq]:%Y-%m-%d %H:%M:%S} UTC")


def _trail_guard_words(runs: Path) -> str:
    """Whether the account that verifies could alter the trail."""
    reachable = [name for name in (TRAIL_FILE, HEAD_FILE) if os.access(runs / name, os.W_OK)]
    if reachable or os.access(runs, os.W_OK):
        return "this account can write to the audit trail, so what it does itself is shown by a witness only"
    return "this account cannot write to the audit trail"
