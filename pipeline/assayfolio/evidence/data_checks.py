"""What verification has to say about raw data: received before use, each once; and a run's own account.

Check 2.5, and the part of check 3.12 that compares a run's record with the intake register.
"""

from collections.abc import Mapping
from typing import Any

from assayfolio.evidence.entries import TrailEntry, TrailReading, is_digest
from assayfolio.evidence.history import ALLOTTED, RunHistory
from assayfolio.evidence.inventory import shown
from assayfolio.evidence.outcomes import CheckOutcome, Tally
from assayfolio.evidence.register import (
    RECEIVED,
    REFUSED,
    Register,
    data_digests,
    named_data,
    received_file,
)

RAW_DATA = "raw data"


def check_received(reading: TrailReading) -> CheckOutcome:
    """Check 2.5: every raw data file entered once by its digest, before any run read it.

    Entries of a version that kept no register are noted; once a file has been received they are findings.
    """
    tally = Tally()
    received: dict[str, int] = {}
    without_register = 0
    for entry in reading.entries:
        if entry.action == RECEIVED:
            _enter(entry, received, tally)
        elif entry.action in (ALLOTTED, REFUSED):
            if named_data(entry) is not None:
                _check_use(entry, received, tally)
            elif received:
                tally.failed.append(f"entry {entry.seq} does not say which of its inputs are raw data")
            else:
                without_register += 1
    if without_register:
        tally.remarks.append(f"{without_register} entries are older than the register of raw data")
    return tally.outcome("2.5", "raw data entered once, before their first use", "audit trail")


def _enter(entry: TrailEntry, received: dict[str, int], tally: Tally) -> None:
    file = received_file(entry)
    if file is None:
        tally.failed.append(
            f"entry {entry.seq} tells of no file: path, size or SHA-256 are missing or malformed"
        )
    elif file.sha256 in received:
        first = received[file.sha256]
        tally.failed.append(
            f"entry {entry.seq} enters {shown(file.path)} again: entry {first} has these bytes"
        )
    else:
        received[file.sha256] = entry.seq


def _check_use(entry: TrailEntry, received: Mapping[str, int], tally: Tally) -> None:
    inputs = entry.details.get("inputs")
    for path in named_data(entry) or ():
        digest = inputs.get(path) if isinstance(inputs, dict) else None
        if not is_digest(digest):
            tally.failed.append(
                f"entry {entry.seq} names {shown(path)} as raw data, but not among its inputs"
            )
        elif digest not in received:
            tally.failed.append(
                f"entry {entry.seq} ({shown(entry.subject)}) used {shown(path)} before it was received"
            )


def check_account(run: Mapping[str, Any], history: RunHistory, register: Register, tally: Tally) -> None:
    """The raw data and the number of the execution in the run's record, against the register."""
    if named_data(history.allotted) is None:
        return  # older than the register
    inputs = run.get("inputs")
    kept = {
        str(each.get("sha256"))
        for each in (inputs if isinstance(inputs, list) else ())
        if isinstance(each, dict) and each.get("role") == RAW_DATA
    }
    if kept != data_digests(history.allotted, ()):
        tally.failed.append(
            f"the raw data in data/run.json are not those of entry {history.allotted.seq} of the audit trail"
        )
    stated = run.get("executions")
    number = stated.get("number") if isinstance(stated, dict) else None
    found = register.executions(history.subject)
    if found is not None and number != found.number:
        tally.failed.append(
            f"data/run.json calls this execution {number} on these data, "
            f"by the audit trail it is {found.number}"
        )
