"""Sealing a record of the laboratory as a folio of its own, in one hold of the trail."""

import os
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

from assayfolio.canonical import Json
from assayfolio.errors import AssayfolioError, MachineError
from assayfolio.evidence.folio import UNSEALED, Content, stage_folio
from assayfolio.evidence.history import trail_extract
from assayfolio.evidence.laboratory_folios import (
    FOLDER,
    FOLIO_ALLOTTED,
    TRAIL_FILE,
    folio_name,
    folio_subject,
    next_folio_number,
)
from assayfolio.evidence.trail import TrailWriter
from assayfolio.version import VERSION
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.recovery import acknowledge_interruptions, found_trail
from assayfolio.workflow.settings_files import standing_settings
from assayfolio.workflow.workspace import Workspace

RECORD_SEALED = "record-sealed"
WAIT_SECONDS = 10.0
_MOST_NUMBERS = 10_000


@dataclass(frozen=True, slots=True)
class Record:
    """What is to be sealed: its kind, what it is about in one line, when it was made, its files by path.

    `details` go into the trail entry that holds the seal.
    """

    kind: str
    about: str
    made: str
    payload: Mapping[str, Content]
    details: Mapping[str, Json]


@dataclass(frozen=True, slots=True)
class SealedRecord:
    """Where a record lies now, and its seal; `subject` is None outside a workspace."""

    folio: Path
    seal: str
    subject: str | None


def laboratory_name(workspace: Workspace) -> str:
    """The laboratory's name as its settings have it; empty where they cannot be read."""
    try:
        return standing_settings(workspace).laboratory.name
    except AssayfolioError:
        return ""


def seal_in_workspace(workspace: Workspace, record: Record) -> SealedRecord:
    """Seal `record` under the next number of its kind in `runs/_laboratory/`, with its entries in the trail.

    Raises BusyError where another writer holds the workspace, MachineError where the machine refuses.
    """
    with trail_book(workspace, WAIT_SECONDS) as trail:
        found_trail(workspace, trail)
        acknowledge_interruptions(workspace, trail)
        return seal_in_trail(workspace, trail, record, RECORD_SEALED)


def seal_in_trail(
    workspace: Workspace,
    trail: TrailWriter,
    record: Record,
    action: str,
    about: str | None = None,
) -> SealedRecord:
    """The same with the trail at hand; the entry with the seal is an `action` on the subject `about`."""
    number = next_folio_number(trail.entries, record.kind)
    subject = folio_subject(record.kind, number)
    kind: dict[str, Json] = {"kind": record.kind, "number": number}
    allotted = trail.append(FOLIO_ALLOTTED, subject, None, kind)
    payload = {**record.payload, TRAIL_FILE: trail_extract([allotted])}
    name = folio_name(record.kind, number)
    staged = stage_folio(workspace.runs / FOLDER, name, payload, _bag_info(record, subject))
    details = {**record.details, "folio": subject, "seal": staged.seal}
    trail.append(action, about or subject, record.about, details)
    return SealedRecord(staged.publish(), staged.seal, subject)


def seal_in_folder(folder: Path, record: Record) -> SealedRecord:
    """Seal `record` under the next free number in `folder`, for somebody who has no workspace.

    Raises MachineError where the machine refuses.
    """
    for number in range(1, _MOST_NUMBERS):
        name = folio_name(record.kind, number)
        if not any(os.path.lexists(folder / one) for one in (name, f"{name}{UNSEALED}")):
            staged = stage_folio(folder, name, record.payload, _bag_info(record, name))
            return SealedRecord(staged.publish(), staged.seal, None)
    raise MachineError(f"{folder} holds {_MOST_NUMBERS} records already; take another folder.")


def _bag_info(record: Record, name: str) -> Sequence[tuple[str, str]]:
    return [
        ("External-Identifier", name),
        ("External-Description", record.about),
        ("Bagging-Date", record.made[:10]),
        ("Bag-Software-Agent", f"assayfolio {VERSION}"),
    ]
