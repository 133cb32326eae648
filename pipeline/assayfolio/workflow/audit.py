"""Verifying folios and the trail: what is checked, and the words and documents that the command prints."""

from collections.abc import Mapping, Sequence
from pathlib import Path

from assayfolio.canonical import Json
from assayfolio.errors import InputError, MachineError
from assayfolio.evidence.files import read_regular
from assayfolio.evidence.keyring import pem_parts
from assayfolio.evidence.signing.identities import certificate_facts
from assayfolio.evidence.signing.refusals import SigningRefusedError
from assayfolio.evidence.trail import TrailEntry, TrailReading, Witnesses, read_trail
from assayfolio.evidence.verification import Verification, verify_lone_folios, verify_workspace
from assayfolio.evidence.witnesses import Witness
from assayfolio.workflow.register import DataRegister, data_register
from assayfolio.workflow.witnessing import distinct, witnesses_of
from assayfolio.workflow.workspace import Workspace, find_workspace

ONE_SCREEN = 24
"""From this many checks on, the failed ones are named again at the end."""


def verify_all(
    named_workspace: Path | None,
    folios: Sequence[Path],
    witnesses: Sequence[Witness] = (),
    anchors: Sequence[bytes] = (),
) -> Verification:
    """Verify `folios`, or every folio of the workspace, and the whole trail.

    The trail is held against the witnesses that the settings name, and against `witnesses`. Signatures are
    believed by the certificates (DER) in `anchors`, or else by those that the trail pins. A folio that lies
    in no workspace is checked by itself; what only a trail can show is then not checkable.
    """
    start = folios[0] if folios else Path()
    try:
        workspace = find_workspace(named_workspace, start)
    except InputError:
        if named_workspace is not None or not folios:
            raise
        return verify_lone_folios(folios, anchors)
    named = named_witnesses(workspace, witnesses)
    return verify_workspace(workspace.runs, folios or None, named, anchors=anchors)


def named_witnesses(workspace: Workspace, more: Sequence[Witness] = ()) -> Witnesses:
    """The witnesses that the settings of `workspace` name, and `more`."""

    def named(entries: Sequence[TrailEntry]) -> Sequence[Witness]:
        return distinct((*witnesses_of(workspace, entries), *more))

    return named


def anchors_at(path: Path) -> tuple[bytes, ...]:
    """The certificates (DER) in a file, PEM or DER. Raises InputError where there is none."""
    try:
        found = pem_parts(read_regular(path), "certificate")
        for der in found:
            certificate_facts(der)
    except OSError as error:
        raise InputError(f"{path} cannot be read: {error.strerror}.") from error
    except SigningRefusedError as error:
        raise InputError(f"{path}: {error}") from error
    if not found:
        raise InputError(f"{path} holds no certificate.")
    return found


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
