"""Rendering a report again from its folio alone: the same bytes, on any machine with the same renderer.

The folio's own study definition, raw data, settings and records are read, the findings computed again and
compared with the archived ones, and the report rendered. The folio is not touched.
"""

import json
from pathlib import Path
from typing import Any

from assayfolio.canonical import sha256_hex
from assayfolio.errors import Fault, InputError, MachineError, Place
from assayfolio.evaluation import evaluate
from assayfolio.findings import findings_bytes
from assayfolio.report.render import RenderedReport, render_report
from assayfolio.workflow.intake import folio_intake
from assayfolio.workflow.records import RUN_FORMAT, report_input, run_facts


def rerender(folio: Path) -> RenderedReport:
    """The report of the run archived in `folio`, rendered again.

    Raises InputError where `folio` is not the folio of a completed run of this format, MachineError where
    the findings computed now are not those archived.
    """
    record = _record(folio, "run.json")
    if record.get("format") != RUN_FORMAT or record.get("outcome") != "completed":
        raise InputError(f"{folio} is not the folio of a completed run of the format {RUN_FORMAT}.")
    environment = _record(folio, "environment.json")
    inputs = tuple((item["role"], item["path"], item["folio_path"]) for item in record["inputs"])
    intake = folio_intake(folio, inputs)
    findings = evaluate(intake.study, intake.observations)
    document = findings_bytes(findings)
    if sha256_hex(document) != record["findings_sha256"]:
        raise MachineError(f"{folio}: the findings computed now differ from those archived.")
    facts = run_facts(record, environment, sha256_hex(document))
    return render_report(report_input(intake, findings, facts))


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
