"""Findings and report of an archived run made again, from its folio alone."""

from dataclasses import dataclass

from assayfolio.errors import Fault, InputError, Place
from assayfolio.evaluation.apply import evaluate
from assayfolio.evaluation.reported import second_routes
from assayfolio.findings import Findings
from assayfolio.findings_document import findings_bytes
from assayfolio.report.facts import RegistrationFacts
from assayfolio.report.render import RenderedReport, render_report
from assayfolio.workflow.archived import ArchivedRun
from assayfolio.workflow.intake import Intake, folio_intake
from assayfolio.workflow.records import report_input, run_facts
from assayfolio.workflow.register import HISTORY_FILE
from assayfolio.workflow.second_route import require_agreement
from assayfolio.workflow.standing import (
    earlier_results,
    registration_facts,
    settled,
    standing_of_folio,
)


@dataclass(frozen=True, slots=True)
class ComputedAgain:
    """What the archived definition and data give today."""

    intake: Intake
    findings: Findings
    document: bytes
    registration: RegistrationFacts


def compute_again(run: ArchivedRun) -> ComputedAgain:
    """The findings of `run`, computed from the archived definition and data.

    Raises InputError where these can no longer be read as they were, MachineError where the second route does
    not confirm the results.
    """
    intake = folio_intake(run.folder, run.inputs)
    computed = evaluate(intake.study, intake.observations)
    require_agreement(second_routes(computed, intake.observations))
    standing = standing_of_folio(run.folder)
    findings = settled(computed, intake, standing, str(run.record["started"]))
    registration = registration_facts(standing, earlier_results(intake, standing))
    return ComputedAgain(intake, findings, findings_bytes(findings), registration)


def render_again(run: ArchivedRun, computed: ComputedAgain, findings_sha256: str) -> RenderedReport:
    """The report of `run`, rendered from what was computed; the facts of the run itself are those on record.

    `findings_sha256` is the digest that the report prints. Raises InputError where a record is not as a run
    leaves it, RenderingError where the report cannot be set exactly as written.
    """
    try:
        facts = run_facts(
            run.record, run.environment, run.document(HISTORY_FILE), findings_sha256, computed.registration
        )
    except (KeyError, TypeError, ValueError) as error:
        fault = Fault(Place(str(run.folder / "data")), f"a record lacks or misstates {error}")
        raise InputError("The report cannot be rendered again.", (fault,)) from error
    return render_report(report_input(computed.intake, computed.findings, facts))
