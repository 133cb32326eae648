"""How a run stands to what was fixed and what departed: put down at its start, settled in its findings.

A run and a later rendering of its report take the same path: the run puts down what the audit trail and the
protocols say when it gets its number, the rendering reads that back from the folio.
"""

import json
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from assayfolio.canonical import Json, canonical_bytes, sha256_hex
from assayfolio.errors import BusyError, Fault, InputError, Place
from assayfolio.evaluation.apply import evaluate
from assayfolio.evaluation.dates import date_deviations
from assayfolio.evaluation.registered import with_registration
from assayfolio.evidence.entries import TrailEntry
from assayfolio.evidence.protocols import RegisteredPlan, registered_plans
from assayfolio.findings import Findings
from assayfolio.findings_document import findings_bytes
from assayfolio.findings_intake import Deviation
from assayfolio.report.facts import EarlierResult, ProtocolVersion, RegistrationFacts
from assayfolio.study.canonical_plan import plan_document
from assayfolio.study.differences import kept_names
from assayfolio.study.plan import StudyDefinition
from assayfolio.study.reading import read_study
from assayfolio.workflow.departures import departures
from assayfolio.workflow.deviation import DEVIATIONS_FILE, deviations_record, entered_deviations
from assayfolio.workflow.intake import Intake, validated
from assayfolio.workflow.registration import (
    AFTER,
    PROTOCOLS_FOLDER,
    REGISTRATION_FILE,
    definition_file,
    definitions_for_run,
    folio_definitions,
    plan_before_data,
    plans_to_compare,
    registration_record,
)
from assayfolio.workflow.workspace import Workspace


@dataclass(frozen=True, slots=True)
class Standing:
    """The registration record of a run, its deviations, and the study definitions of earlier protocols."""

    registration: Mapping[str, Any]
    deviations: Mapping[str, Any]
    definitions: Mapping[str, bytes]

    @property
    def payload(self) -> dict[str, bytes]:
        """The files of the folio that keep this."""
        return {
            REGISTRATION_FILE: canonical_bytes(self.registration),
            DEVIATIONS_FILE: canonical_bytes(self.deviations),
            **self.definitions,
        }

    def study(self, protocol: str) -> StudyDefinition:
        """The study definition of an earlier protocol."""
        return read_study(self.definitions[definition_file(protocol)], f"{protocol}/study.yaml")


def standing_at_allotment(
    workspace: Workspace, entries: Sequence[TrailEntry], intake: Intake, compared: RegisteredPlan | None
) -> Standing:
    """How the run that is about to get its number stands; `compared` is the plan it was held against.

    Raises BusyError where another plan was registered since, ChangedError where a protocol that is needed
    cannot be read as it was sealed.
    """
    study = intake.study.study
    plans = registered_plans(entries, study)
    if (plans[-1] if plans else None) != compared:
        raise BusyError(f"Another plan of {study} was registered meanwhile; give the command again.")
    data = {file.path: file.sha256 for file in intake.files if file.role == "raw data"}
    record = registration_record(entries, intake.study, data)
    exclusions = next((file.sha256 for file in intake.files if file.role == "exclusions"), None)
    record["departures"] = departures(entries, record, data, exclusions)
    return Standing(record, deviations_record(entries, study), definitions_for_run(workspace, record))


def standing_of_folio(folio: Path) -> Standing:
    """The same, read back from a run's folio.

    The folio of an earlier version holds nothing of it: no plan could be registered then. Raises InputError
    where a file cannot be read.
    """
    if not (folio / REGISTRATION_FILE).exists():
        return _NOTHING_KEPT
    registration = _read(folio, REGISTRATION_FILE)
    return Standing(registration, _read(folio, DEVIATIONS_FILE), folio_definitions(folio, registration))


_NOTHING_KEPT = Standing(
    {"in_use": None, "first_seen": None, "study_first_seen": None, "protocols": [], "departures": []},
    {"recorded": []},
    {},
)


def _read(folio: Path, name: str) -> dict[str, Any]:
    try:
        record = json.loads((folio / name).read_bytes())
    except (OSError, ValueError) as error:
        fault = Fault(Place(f"{folio.name}/{name}"), str(error))
        raise InputError(f"{folio} cannot be read as a run's folio.", (fault,)) from error
    assert isinstance(record, dict), "a record is an object"
    return record


def settled(findings: Findings, intake: Intake, standing: Standing, started: str) -> Findings:
    """The findings with what was registered marked, and every deviation that dates, trail and people show."""
    record = standing.registration
    before = plan_before_data(record)
    first = record["protocols"][0]["time"] if record["protocols"] else None
    found = (
        *date_deviations(intake.study, intake.observations, first, started),
        *(Deviation(one["what"], one["reason"]) for one in record["departures"]),
        *entered_deviations(standing.deviations),
    )
    old = None if before is None else plan_document(standing.study(before))
    new = plan_document(intake.study)
    registered = {
        section: frozenset[str]() if old is None else kept_names(section, old, new)
        for section in ("comparisons", "equivalence")
    }
    return with_registration(findings, registered["comparisons"], registered["equivalence"], found)


def earlier_results(intake: Intake, standing: Standing) -> tuple[EarlierResult, ...]:
    """The result on these data under each plan that was amended after the data were first seen."""
    return tuple(
        _under(intake, standing, item["protocol"]) for item in plans_to_compare(standing.registration)
    )


def _under(intake: Intake, standing: Standing, protocol: str) -> EarlierResult:
    study = standing.study(protocol)
    try:
        earlier = validated(study, intake.laboratory, intake.files)
        return EarlierResult(protocol, study, evaluate(study, earlier.observations), "")
    except InputError as error:
        return EarlierResult(protocol, study, None, str(error).replace("\n", " "))


def earlier_payload(results: Sequence[EarlierResult]) -> dict[str, bytes]:
    """The findings under earlier plans, as files of the folio."""
    return {
        f"{PROTOCOLS_FOLDER}/{one.protocol}/findings.json": findings_bytes(one.findings)
        for one in results
        if one.findings is not None
    }


def registration_facts(standing: Standing, earlier: tuple[EarlierResult, ...]) -> RegistrationFacts:
    """What the report says of the registration."""
    record = standing.registration
    seen, of_study = record["first_seen"], record["study_first_seen"]
    return RegistrationFacts(
        in_use=record["in_use"],
        data_first_seen=None if seen is None else seen["time"],
        study_data_first_seen=None if of_study is None else of_study["time"],
        protocols=tuple(
            ProtocolVersion(
                name=item["protocol"],
                time=item["time"],
                actor=item["actor"],
                plan_sha256=item["plan_sha256"],
                seal=item["seal"],
                amends=item["amends"] is not None,
                after_data=item["timing"] == AFTER,
                reason=item["reason"],
                differences=tuple((one["key"], one["old"], one["new"]) for one in item["differences"]),
            )
            for item in record["protocols"]
        ),
        earlier=earlier,
    )


def pre_registration(standing: Standing, earlier: Sequence[EarlierResult]) -> Json:
    """What the run's own record says of the registration; None where no plan of the study is registered."""
    record = standing.registration
    if record["in_use"] is None:
        return None
    seen = record["first_seen"]
    return {
        "protocol": record["in_use"],
        "plan_sha256": record["plan_sha256"],
        "registered": record["protocols"][0]["time"],
        "data_first_seen": None if seen is None else seen["time"],
        "before_data": record["protocols"][0]["timing"] != AFTER,
        "amendments": len(record["protocols"]) - 1,
        "amendments_after_data": sum(
            item["timing"] == AFTER and item["amends"] is not None for item in record["protocols"]
        ),
        "earlier_results": [
            {
                "protocol": one.protocol,
                "findings_sha256": None if one.findings is None else sha256_hex(findings_bytes(one.findings)),
                "reason": one.reason or None,
            }
            for one in earlier
        ],
    }
