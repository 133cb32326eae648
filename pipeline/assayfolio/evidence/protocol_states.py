"""What the trail says of the protocols, against itself and against what lies in the workspace.

2.8  Each study's protocols are numbered from 1 without a gap, each registered once, amending the one before.
2.9  For each protocol: registered and there, or entered as stopped; nothing ended without a word.
"""

import os
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from assayfolio.errors import MachineError
from assayfolio.evidence.entries import TrailEntry, TrailReading
from assayfolio.evidence.folio import UNSEALED, leftover_record, reopen_staged
from assayfolio.evidence.folio_reading import TrailIndex
from assayfolio.evidence.inventory import shown
from assayfolio.evidence.locks import is_locked
from assayfolio.evidence.outcomes import CheckOutcome, Tally
from assayfolio.evidence.protocols import (
    PROTOCOL_ALLOTTED,
    PROTOCOL_INTERRUPTED,
    REGISTERED,
    ProtocolHistory,
    RegisteredPlan,
    protocol_name,
    registered_plans,
    split_protocol,
    unallotted_protocols,
)


def explained_protocols(index: TrailIndex) -> Mapping[str, frozenset[str]]:
    """The names, by study, of the folders that the trail explains: protocols and what stopped ones left."""
    found: dict[str, frozenset[str]] = {}
    for one in index.protocols.values():
        left = {one.name} if one.registered else set()
        left |= {f"{one.name}{UNSEALED}"}
        found[one.study] = found.get(one.study, frozenset()) | left
    return found


def check_protocol_numbers(reading: TrailReading) -> CheckOutcome:
    """Check 2.8: numbers gapless for each study; each protocol registered once, amending the one before."""
    tally = Tally()
    numbers: dict[str, int] = {}
    for entry in reading.entries:
        protocol = split_protocol(entry.subject)
        if entry.action != PROTOCOL_ALLOTTED:
            continue
        if protocol is None:
            found = f"entry {entry.seq} allots {shown(entry.subject)}, which is not the name of a protocol"
            tally.failed.append(found)
            continue
        study, number = protocol
        expected = numbers.get(study, 0) + 1
        if number != expected:
            tally.failed.append(f"entry {entry.seq} allots {entry.subject} where {expected} comes next")
        numbers[study] = max(numbers.get(study, 0), number)
    for entry in unallotted_protocols(reading.entries):
        tally.failed.append(f"entry {entry.seq} is about {entry.subject}, which was never allotted")
    for study in sorted(numbers):
        _check_amendments(reading, study, tally)
    return tally.outcome("2.8", "protocols numbered without a gap", "audit trail")


def _check_amendments(reading: TrailReading, study: str, tally: Tally) -> None:
    """Whether each registration is well formed and names the one before."""
    entries = [
        entry
        for entry in reading.entries
        if entry.action == REGISTERED and (split_protocol(entry.subject) or ("",))[0] == study
    ]
    plans = {plan.seq: plan for plan in registered_plans(entries, study)}
    before: int | None = None
    seen: set[str] = set()
    for entry in entries:
        plan = plans.get(entry.seq)
        if plan is None:
            tally.failed.append(f"entry {entry.seq} registers {shown(entry.subject)} without seal or digests")
            continue
        if entry.subject in seen:
            tally.failed.append(f"entry {entry.seq} registers {entry.subject} a second time")
        elif plan.amends != before:
            named = "nothing" if plan.amends is None else protocol_name(plan.amends)
            wanted = "nothing" if before is None else protocol_name(before)
            tally.failed.append(
                f"entry {entry.seq} registers {entry.subject} as amending {named}, where {wanted} was in "
                "force"
            )
        seen.add(entry.subject)
        before = plan.number


def check_protocol(runs: Path, history: ProtocolHistory) -> CheckOutcome:
    """Check 2.9: whether one protocol ended as the trail says, and its folio or leftover is there."""
    tally = Tally()
    try:
        _check_end(runs, history, tally)
    except MachineError as error:
        tally.unchecked.append(str(error))
    return tally.outcome("2.9", "what became of the protocol", history.subject)


def _check_end(runs: Path, history: ProtocolHistory, tally: Tally) -> None:
    folder = runs / history.study
    target = folder / history.name
    there, locked = os.path.lexists(target), is_locked(folder, history.name)
    if history.registered is not None:
        if there and (target.is_symlink() or not target.is_dir()):
            tally.failed.append(f"{history.subject} is not a folder: something else stands in its place")
        elif not there and locked:
            tally.unchecked.append("being registered now, about to get its name")
        elif not there:
            _explain_absence(folder, history, tally)
    elif there:
        tally.failed.append(
            f"{history.subject} is there, but the audit trail has no registration of it: it was put there by "
            "other means"
        )
    elif history.stopped is not None:
        _check_stopped(folder, history, tally)
    elif locked:
        tally.unchecked.append("being registered now")
    else:
        last = history.entries[-1]
        tally.failed.append(
            "interrupted; not yet entered in the audit trail (the next command that writes enters it). Its "
            "last "
            f'entry is {last.seq}, "{shown(last.action)}"'
        )


def _explain_absence(folder: Path, history: ProtocolHistory, tally: Tally) -> None:
    staged = reopen_staged(folder, history.name)
    seal = history.registered.details.get("seal") if history.registered else None
    if staged is not None and staged.seal == seal:
        tally.failed.append(
            f"the rename was interrupted: {history.subject}{UNSEALED} is complete and carries the seal of "
            "the audit trail; the next command that writes completes the rename"
        )
        return
    tally.failed.append(
        f"missing: {history.subject} was registered, and its folio is gone: deleted or moved away"
    )


def _check_stopped(folder: Path, history: ProtocolHistory, tally: Tally) -> None:
    entry = history.stopped
    if entry is None:
        return
    tally.remarks.append(
        f"not registered; entry {entry.seq} tells of it: {shown(entry.reason or 'no reason given')}"
    )
    if entry.action == PROTOCOL_INTERRUPTED:
        found = leftover_record(folder, history.name)
        if {key: entry.details.get(key) for key in found} != found:
            tally.failed.append(
                f"changed: {history.subject}{UNSEALED} is not as entry {entry.seq} found it, or is gone"
            )


def check_claim(
    run: Mapping[str, Any], allotted: TrailEntry, plans: tuple[RegisteredPlan, ...], tally: Tally
) -> None:
    """What the record of a completed run says of its pre-registration, against the plans registered then."""
    before = [plan for plan in plans if plan.seq < allotted.seq]
    claim = run.get("pre_registration")
    if not before:
        if claim is not None:
            tally.failed.append("data/run.json claims a registered plan; by the audit trail there was none")
        return
    latest, first = before[-1], before[0]
    stated = claim if isinstance(claim, dict) else {}
    if (stated.get("protocol"), stated.get("registered")) != (latest.name, first.time):
        tally.failed.append(
            f"data/run.json does not say that {latest.name} was in force and the plan registered "
            f"{first.time}, as entries {first.seq} and {latest.seq} of the audit trail do"
        )
