"""Rendering a report again from its folio alone: the same bytes, on any machine with the same renderer.

The folio is first checked against its own manifests. Then its study definition, raw data, settings and
records are read, the findings computed again and compared with the archived ones, and the report rendered
and compared. The folio is not touched.
"""

import json
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from assayfolio.canonical import sha256_hex
from assayfolio.errors import ChangedError, Fault, InputError, Place
from assayfolio.evaluation.apply import evaluate
from assayfolio.evidence.verification import verify_lone_folios
from assayfolio.findings_document import findings_bytes
from assayfolio.report.render import render_report
from assayfolio.workflow.intake import folio_intake
from assayfolio.workflow.records import RUN_FORMAT, report_input, run_facts
from assayfolio.workflow.register import HISTORY_FILE


@dataclass(frozen=True, slots=True)
class RerenderedReport:
    """A report rendered again, and whether it is the archived one to the byte."""

    pdf: bytes
    is_identical: bool


def rerender(folio: Path) -> RerenderedReport:
    """The report of the run archived in `folio`, rendered again.

    Raises InputError where `folio` is not the folio of a completed run of this format, ChangedError where it
    does not agree with its own manifests or the findings computed now are not those archived.
    """
    _require_unchanged(folio)
    record = _record(folio, "run.json")
    if record.get("format") != RUN_FORMAT or record.get("outcome") != "completed":
        raise InputError(f"{folio} is not the folio of a completed run of the format {RUN_FORMAT}.")
    environment = _record(folio, "environment.json")
    history = _record(folio, HISTORY_FILE.removeprefix("data/"))
    inputs = tuple((item["role"], item["path"], item["folio_path"]) for item in record["inputs"])
    intake = folio_intake(folio, inputs)
    findings = evaluate(intake.study, intake.observations)
    document = findings_bytes(findings)
    if sha256_hex(document) != record["findings_sha256"]:
        raise ChangedError(f"{folio}: the findings computed now differ from those archived.")
    facts = run_facts(record, environment, history, sha256_hex(document))
    pdf = render_report(report_input(intake, findings, facts)).pdf
    return RerenderedReport(pdf, sha256_hex(pdf) == record["report_sha256"])


def _require_unchanged(folio: Path) -> None:
    failed = verify_lone_folios([folio]).with_outcome("failed")
    if failed:
        lines = [f"  {outcome.number} {outcome.title}: {'; '.join(outcome.notes)}" for outcome in failed]
        raise ChangedError("\n".join([f"{folio} is not as it was sealed, so nothing was rendered.", *lines]))


def _record(folio: Path, name: str) -> dict[str, Any]:
    path = folio / "data" / name
    try:
        loaded = json.loads(path.read_bytes())
    except (OSError, ValueError) as error:
        fault = Fault(Place(str(path)), str(error))
        raise InputError(f"{folio} cannot be read as a run's folio.", (fault,)) from error
    if not isinstance(loaded, dict):
        raise InputError(f"{path} is not a record.")
    return loaded
