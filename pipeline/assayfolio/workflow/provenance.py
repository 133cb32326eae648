"""What a folio tells programs of itself: its crate, made from the records that stand in it."""

from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import Any

from assayfolio.canonical import sha256_hex
from assayfolio.evidence.crate import CrateFacts, KeptFile, crate_bytes
from assayfolio.evidence.entries import TrailEntry
from assayfolio.evidence.folio import Content
from assayfolio.study.laboratory import Laboratory
from assayfolio.study.plan import StudyDefinition
from assayfolio.version import VERSION
from assayfolio.workflow.intake import Intake

RUN_WORDS = "The raw data were evaluated as the study definition says; plan, data and results are in it."
PROTOCOL_WORDS = "The study definition was fixed as a protocol; plan, planned power and worksheet are in it."


def run_crate(
    intake: Intake, record: Mapping[str, Any], entries: Sequence[TrailEntry], payload: Mapping[str, Content]
) -> bytes:
    """The crate of a run that has ended: its record, its entries so far, and everything else of its folio."""
    facts = _facts((intake.study.title, RUN_WORDS), intake.laboratory.name, record, entries, payload)
    failure = record["reason"] if record["outcome"] == "failed" else None
    return crate_bytes(replace(facts, failure=failure))


def protocol_crate(
    study: StudyDefinition,
    laboratory: Laboratory,
    record: Mapping[str, Any],
    entries: Sequence[TrailEntry],
    payload: Mapping[str, Content],
) -> bytes:
    """The crate of a protocol: its record, its entries so far, and everything else of its folio."""
    return crate_bytes(_facts((study.title, PROTOCOL_WORDS), laboratory.name, record, entries, payload))


def _facts(
    words: tuple[str, str],
    laboratory: str,
    record: Mapping[str, Any],
    entries: Sequence[TrailEntry],
    payload: Mapping[str, Content],
) -> CrateFacts:
    title, description = words
    return CrateFacts(
        identifier=entries[0].subject,
        title=title,
        description=description,
        laboratory=laboratory,
        account=record["actor"],
        person=person_of(entries[0]),
        version=VERSION,
        started=record["started"],
        ended=entries[-1].time,
        failure=None,
        inputs={item["folio_path"]: item["role"] for item in record["inputs"]},
        files=kept_files(payload),
    )


def person_of(entry: TrailEntry) -> str | None:
    """The person whom the laboratory had entered for the account of `entry`, if any."""
    by = entry.details.get("by")
    person = by.get("person") if isinstance(by, Mapping) else None
    return person if isinstance(person, str) else None


def kept_files(payload: Mapping[str, Content]) -> dict[str, KeptFile]:
    """Size and digest of each file of a payload, by its path."""
    return {path: _kept(content) for path, content in payload.items()}


def _kept(content: Content) -> KeptFile:
    if isinstance(content, bytes):
        return KeptFile(len(content), sha256_hex(content))
    return KeptFile(content.size, content.sha256)
