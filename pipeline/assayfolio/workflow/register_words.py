"""The intake register in words for people and as a document for programs."""

from collections import Counter
from collections.abc import Iterator, Mapping
from typing import get_args

from assayfolio.canonical import Json
from assayfolio.evidence.data_states import DataFile, State
from assayfolio.evidence.register import DataUse
from assayfolio.evidence.states import standing_words
from assayfolio.workflow.register import DataRegister

_DIGITS = 8
_MOST_MENTIONED = 20
_INDENT = " " * 8


def register_lines(register: DataRegister) -> list[str]:
    """Every data file for people: state and path, then digest, first seen, runs, notes."""
    lines = [line for file in register.files for line in _file_lines(register, file)]
    lines.extend(_unread_lines(register))
    counts = _counts(register)
    total = f"{sum(counts.values())} data files" if len(register.files) != 1 else "1 data file"
    return [*lines, f"{total}: {', '.join(f'{count} {state}' for state, count in counts.items())}"]


def unfinished_lines(register: DataRegister) -> list[str]:
    """What `verify` mentions: the open and the orphan files, as information. Empty where there are none."""
    found = [file for state in ("orphan", "open") for file in register.in_state(state)]
    if not found:
        return []
    rest = len(found) - _MOST_MENTIONED
    counts = _counts(register)
    return [
        f"Raw data (information, not a check): {counts['open']} open, {counts['orphan']} orphan",
        *(f"  {file.state:<6}  {file.path}: {'; '.join(file.notes)}" for file in found[:_MOST_MENTIONED]),
        *([f"  and {rest} more; `assayfolio trail --data` lists them all"] if rest > 0 else []),
        *(f"  {line}" for line in _unread_lines(register)),
    ]


def unfinished_document(register: DataRegister) -> dict[str, Json]:
    """The open and the orphan files, for programs."""
    return {
        "counts": _counts(register),
        "files": [_file_document(register, file) for file in register.files if file.state != "used"],
        "definitions_not_read": _unread_document(register),
    }


def register_document(register: DataRegister) -> dict[str, Json]:
    """Every data file for programs."""
    return {
        "counts": _counts(register),
        "files": [_file_document(register, file) for file in register.files],
        "definitions_not_read": _unread_document(register),
    }


def _unread_document(register: DataRegister) -> list[Json]:
    return [{"path": path, "reason": reason} for path, reason in register.unread]


def _counts(register: DataRegister) -> dict[str, int]:
    counted = Counter(file.state for file in register.files)
    return {state: counted[state] for state in get_args(State)}


def _file_lines(register: DataRegister, file: DataFile) -> Iterator[str]:
    yield f"{file.state:<6}  {file.path}"
    if file.sha256 is not None:
        yield f"{_INDENT}SHA-256 {file.sha256}, {file.size} bytes"
    if file.received is not None:
        moment = f"{file.received.time[:10]} {file.received.time[11:19]} UTC"
        study = f", for {file.received.study}" if file.received.study else ""
        yield f"{_INDENT}first seen {moment}, entry {file.received.seq}{study}"
    for use in file.uses:
        yield f"{_INDENT}{use.subject}: {use.outcome}{_execution(register, use)}, plan {_plan(use)}"
        for words in standing_words(register.standings[use.subject]):
            yield f"{_INDENT}  {words}"
    for refusal in file.refusals:
        yield f"{_INDENT}{refusal.subject}: refused, entry {refusal.seq}"
    for note in file.notes:
        yield f"{_INDENT}{note}"


def _execution(register: DataRegister, use: DataUse) -> str:
    found = register.executions(use)
    if found is None:
        return ""
    return f", execution {found.number} of {len(found.same)} on these data"


def _plan(use: DataUse) -> str:
    plan = use.plan[:_DIGITS] if use.plan else "not recorded"
    return f"{plan} with exclusions {use.exclusions[:_DIGITS]}" if use.exclusions else plan


def _unread_lines(register: DataRegister) -> Iterator[str]:
    for path, reason in register.unread:
        yield f"{path} cannot be read as a study definition, so what it names is not known: {reason}"


def _file_document(register: DataRegister, file: DataFile) -> Mapping[str, Json]:
    received = file.received
    return {
        "path": file.path,
        "sha256": file.sha256,
        "size": file.size,
        "state": file.state,
        "notes": list(file.notes),
        "named_by": list(file.named_by),
        "first_seen": None
        if received is None
        else {"time": received.time, "seq": received.seq, "study": received.study},
        "runs": [_use_document(register, use) for use in file.uses],
        "refusals": [
            {"seq": refusal.seq, "time": refusal.time, "subject": refusal.subject}
            for refusal in file.refusals
        ],
    }


def _use_document(register: DataRegister, use: DataUse) -> Mapping[str, Json]:
    found, standing = register.executions(use), register.standings[use.subject]
    return {
        "run": use.subject,
        "outcome": use.outcome,
        "state": standing.state,
        "replaces": standing.replaces,
        "superseded_by": standing.superseded_by,
        "plan": use.plan,
        "exclusions": use.exclusions,
        "execution": None if found is None else found.number,
        "executions": None if found is None else len(found.same),
    }
