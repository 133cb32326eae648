"""Verifying folios and the trail, and showing the trail: the words and documents that the commands print."""

from collections.abc import Mapping, Sequence
from pathlib import Path

from assayfolio.canonical import Json
from assayfolio.errors import InputError, MachineError
from assayfolio.evidence.register import RECEIVED
from assayfolio.evidence.trail import TrailReading, read_trail
from assayfolio.evidence.verification import Verification, verify_lone_folios, verify_workspace
from assayfolio.workflow.register import DataRegister, data_register
from assayfolio.workflow.workspace import find_workspace

ONE_SCREEN = 24
"""From this many checks on, the failed ones are named again at the end."""


def verify_all(named_workspace: Path | None, folios: Sequence[Path]) -> Verification:
    """Verify `folios`, or every folio of the workspace, and the whole trail.

    A folio that lies in no workspace is checked by itself; what only a trail can show is then not checkable.
    """
    start = folios[0] if folios else Path()
    try:
        workspace = find_workspace(named_workspace, start)
    except InputError:
        if named_workspace is not None or not folios:
            raise
        return verify_lone_folios(folios)
    return verify_workspace(workspace.runs, folios or None)


def unfinished_data(named_workspace: Path | None) -> DataRegister | None:
    """The state of every raw data file, for verification to mention; None where it cannot be told."""
    try:
        return register_of(named_workspace)[0]
    except (InputError, MachineError):
        return None  # no workspace, or no trail that can be read: the checks say so


def register_of(named_workspace: Path | None) -> tuple[DataRegister, TrailReading]:
    """The state of every raw data file of the workspace, and the trail that it was read from.

    Raises InputError where there is no workspace, MachineError where the trail cannot be read.
    """
    workspace = find_workspace(named_workspace, Path())
    reading = read_trail(workspace.runs)
    return data_register(workspace, reading), reading


def verification_lines(verification: Verification, information: Sequence[str] = ()) -> list[str]:
    """The numbered checks, for people, and under them what else they should know."""
    width = max((len(outcome.outcome) for outcome in verification.outcomes), default=0)
    lines = []
    for outcome in verification.outcomes:
        lines.append(f"{outcome.number:<4}  {outcome.outcome:<{width}}  {outcome.subject}: {outcome.title}")
        lines.extend(f"      {'':<{width}}    {note}" for note in outcome.notes)
    lines.extend(information)
    if len(verification.outcomes) > ONE_SCREEN:
        lines.extend(
            f"Failed: {outcome.number} {outcome.subject}: {outcome.title}"
            for outcome in verification.with_outcome("failed")
        )
    counts = _counts(verification)
    lines.append(", ".join(f"{count} {word}" for word, count in counts.items()))
    return lines


def verification_document(verification: Verification) -> Mapping[str, Json]:
    """The numbered checks, for programs."""
    return {
        "exit_code": int(verification.exit_code),
        "counts": _counts(verification),
        "checks": [
            {
                "number": outcome.number,
                "title": outcome.title,
                "subject": outcome.subject,
                "outcome": outcome.outcome,
                "notes": list(outcome.notes),
            }
            for outcome in verification.outcomes
        ],
    }


def _counts(verification: Verification) -> dict[str, int]:
    return {
        word: sum(outcome.outcome == word for outcome in verification.outcomes)
        for word in ("passed", "failed", "not checkable")
    }


def trail_of(named_workspace: Path | None) -> TrailReading:
    """The trail of the workspace as it stands on the disk."""
    return read_trail(find_workspace(named_workspace, Path()).runs)


def trail_lines(reading: TrailReading) -> list[str]:
    """The trail for people: a line an entry, the reason under it."""
    if not reading.lines:
        return ["The audit trail is empty."]
    widths = [
        max(len(text) for text in column)
        for column in zip(*[(e.actor, e.action, e.subject) for e in reading.entries], strict=True)
    ] or [0, 0, 0]
    lines = []
    for entry in reading.entries:
        moment = f"{entry.time[:10]} {entry.time[11:19]} UTC"
        lines.append(
            f"{entry.seq:>6}  {moment}  {entry.actor:<{widths[0]}}  "
            f"{entry.action:<{widths[1]}}  {entry.subject:<{widths[2]}}".rstrip()
        )
        indent = " " * 33
        if entry.reason:
            lines.append(f"{indent}{entry.reason}")
        if entry.action == RECEIVED:
            path, digest = entry.details.get("path"), entry.details.get("sha256")
            lines.append(f"{indent}{path}, SHA-256 {digest}")
        seal = entry.details.get("seal")
        if isinstance(seal, str):
            lines.append(f"{indent}seal {seal}")
    lines.append(f"Head: entry {reading.last.seq}, {reading.last.sha256}")
    return lines


def trail_document(reading: TrailReading) -> Mapping[str, Json]:
    """The trail for programs: head, faults, and the entries as they stand."""
    return {
        "head": None if reading.head is None else {"seq": reading.head.seq, "sha256": reading.head.sha256},
        "faults": [str(fault) for fault in reading.faults],
        "entries": [
            {
                "seq": entry.seq,
                "time": entry.time,
                "actor": entry.actor,
                "action": entry.action,
                "subject": entry.subject,
                "reason": entry.reason,
                "details": entry.details,
                "previous": entry.previous,
            }
            for entry in reading.entries
        ],
    }
