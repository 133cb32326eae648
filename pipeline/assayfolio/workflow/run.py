"""A run, from study definition and raw data to a sealed folio, in numbered steps.

1 read every input, enter raw data that were not seen before, and validate, 2 allot the run number, 3 check
the installed code, 4 compute the findings and hold them against the second route, 5 render the report, 6
stage the folio and read it back, 7 seal it: enter the seal in the trail, then rename the folder into place.
Each step is entered in the audit trail as it is done. A fault in step 1 leaves a `refused` entry and no
number; a failure after step 2 keeps its number and leaves a folio with the reason.
"""

from collections.abc import Mapping
from contextlib import ExitStack
from dataclasses import dataclass, field
from pathlib import Path

from assayfolio.canonical import Json, canonical_bytes, sha256_hex
from assayfolio.errors import ExitCode, InputError, MachineError
from assayfolio.evaluation.apply import evaluate
from assayfolio.evaluation.reported import second_routes
from assayfolio.evidence.bill_of_materials import BOM_FILE, bill_bytes
from assayfolio.evidence.crate import CRATE_FILE
from assayfolio.evidence.environment import environment_record
from assayfolio.evidence.folio import Content, FileToCopy, folio_lock, stage_folio
from assayfolio.evidence.history import next_number, run_name, run_subject, trail_extract
from assayfolio.evidence.protocols import RegisteredPlan
from assayfolio.evidence.read_me_first import read_me_first
from assayfolio.evidence.trail import TrailEntry, TrailHead
from assayfolio.findings import CRITERION_MET, Findings
from assayfolio.findings_document import findings_bytes
from assayfolio.observations.values import Observations
from assayfolio.report.facts import UNREGISTERED, RegistrationFacts
from assayfolio.report.loading import load_renderer
from assayfolio.report.render import render_report
from assayfolio.study.plan import SignOff
from assayfolio.version import VERSION
from assayfolio.workflow.actors import Actor
from assayfolio.workflow.authority import NotAllowedError, require
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.clock_record import clock_record
from assayfolio.workflow.environments import program_record
from assayfolio.workflow.failure import failure_text
from assayfolio.workflow.flow_words import files_words, flow_words
from assayfolio.workflow.intake import AnyInput, InputFile, Intake, SeenFiles, read_files, validated
from assayfolio.workflow.people_record import person_record
from assayfolio.workflow.provenance import run_crate
from assayfolio.workflow.records import (
    bag_info,
    completed_record,
    failed_record,
    report_input,
    requirements_lock,
    run_facts,
    run_record,
)
from assayfolio.workflow.recovery import acknowledge_interruptions, found_trail
from assayfolio.workflow.refusal import enter_refusal, holdable, refusal_entered
from assayfolio.workflow.register import (
    HISTORY_FILE,
    enter_received,
    execution_history,
    executions_record,
    input_details,
)
from assayfolio.workflow.registration import require_registered_plan
from assayfolio.workflow.replacing import Replacement, enter_replacement, replaced_run
from assayfolio.workflow.second_route import require_agreement, second_route_record
from assayfolio.workflow.selfcheck import self_check
from assayfolio.workflow.standing import (
    Standing,
    earlier_payload,
    earlier_results,
    pre_registration,
    registration_facts,
    settled,
    standing_at_allotment,
)
from assayfolio.workflow.steps import Progress, Step
from assayfolio.workflow.surroundings import Surroundings, look_around
from assayfolio.workflow.workspace import Workspace, shown_path


@dataclass(frozen=True, slots=True)
class RunOutcome:
    """A run that came to its end: its findings, its folio and the folio's seal, and who is to sign it."""

    subject: str
    folio: Path
    seal: str
    findings: Findings
    sign_off: tuple[SignOff, ...]
    registration: RegistrationFacts = UNREGISTERED

    @property
    def exit_code(self) -> ExitCode:
        """What the command answers with: whether every criterion that was set in advance is met."""
        criteria = [one for response in self.findings.responses for one in response.criteria]
        met = all(criterion.verdict == CRITERION_MET for criterion in criteria)
        return ExitCode.DONE if met else ExitCode.FINDING


@dataclass(slots=True)
class _Run:
    """A run that has its number: what it works with, and what it has made so far."""

    workspace: Workspace
    intake: Intake
    surroundings: Surroundings
    number: int
    head_at_start: TrailHead
    standing: Standing
    progress: Progress
    entries: list[TrailEntry]
    history: Mapping[str, Json] = field(default_factory=dict)
    registration: RegistrationFacts = UNREGISTERED
    reached: Step = Step.ALLOT
    facts: dict[str, Json] = field(default_factory=dict)
    record: dict[str, Json] = field(default_factory=dict)
    payload: dict[str, Content] = field(default_factory=dict)

    @property
    def name(self) -> str:
        return run_name(self.number)

    @property
    def subject(self) -> str:
        return run_subject(self.intake.study.study, self.number)

    @property
    def folder(self) -> Path:
        return self.workspace.runs / self.intake.study.study

    def enter(
        self, action: str, step: Step, details: Mapping[str, Json], reason: str | None = None
    ) -> TrailHead:
        """Enter a step of this run in the trail as it happens; return the trail's new head."""
        wait = self.intake.laboratory.wait_seconds
        with trail_book(self.workspace, wait) as trail:
            self.entries.append(trail.append(action, self.subject, reason, {"step": int(step), **details}))
            self.reached = step
            return trail.head


def run_study(
    workspace: Workspace, study_path: Path, progress: Progress, replacement: Replacement | None = None
) -> RunOutcome:
    """Run the study at `study_path`; see the text of this module for the steps.

    `replacement` says which run of the study the new one replaces. Raises NotAllowedError, after an entry of
    the attempt, for an account that may not run, where the settings are not those in force, and where that
    run cannot be replaced; InputError for a faulty plan or data (nothing but a trail entry is left),
    BusyError where another writer holds the workspace, MachineError and its kin where the run failed after
    its number was allotted (its folio is sealed with the reason).
    """
    surroundings = look_around()
    actor = _authorised(workspace, study_path)
    intake, registered = _read(workspace, study_path)
    progress(Step.READ, _read_words(intake.observations))
    with ExitStack() as held:
        run = _allot(workspace, intake, registered, surroundings, progress, held, replacement)
        run.facts["person"] = person_record(actor, intake.laboratory)
        try:
            findings = _compute_and_render(run)
            return _seal_completed(run, findings)
        except BaseException as error:
            raise _seal_failed(run, error) from error


def _authorised(workspace: Workspace, study_path: Path) -> Actor:
    """The actor, where he may run studies; settings that cannot be read are entered as a refused run."""
    try:
        return require(workspace, "run")
    except NotAllowedError:
        raise  # the attempt has been entered
    except InputError as error:
        enter_refusal(workspace, study_path, SeenFiles(), error)
        raise


def _read(workspace: Workspace, study_path: Path) -> tuple[Intake, RegisteredPlan | None]:
    """Read every input, enter the raw data that are new, then validate: no file is looked into untraced.

    The plan has to be the registered one, where one is; that is given too.
    """
    seen = SeenFiles()
    with refusal_entered(workspace, study_path, seen):
        study, laboratory = read_files(workspace, study_path, seen)
    with trail_book(workspace, laboratory.wait_seconds) as trail:
        found_trail(workspace, trail)
        enter_received(trail, seen)
        entries = trail.entries
    with refusal_entered(workspace, study_path, seen):
        registered = require_registered_plan(workspace, entries, study, laboratory)
        return validated(study, laboratory, tuple(seen.files)), registered


def _read_words(observations: tuple[Observations, ...]) -> str:
    first, count = observations[0], len(observations)
    of_each = "" if count == 1 else f" of each of {count} responses"
    return f"{flow_words(first)}{of_each} at {len(first.levels)} levels from {files_words(first)}"


def _allot(
    workspace: Workspace,
    intake: Intake,
    registered: RegisteredPlan | None,
    surroundings: Surroundings,
    progress: Progress,
    held: ExitStack,
    replacement: Replacement | None,
) -> _Run:
    study, wait = intake.study.study, intake.laboratory.wait_seconds
    with trail_book(workspace, wait) as trail:
        found_trail(workspace, trail)
        acknowledge_interruptions(workspace, trail)
        old = replaced_run(trail, intake, replacement, surroundings.actor)
        number = next_number(trail.entries, study)
        standing = standing_at_allotment(workspace, trail.entries, intake, registered)
        run = _Run(workspace, intake, surroundings, number, trail.head, standing, progress, [])
        # The folio's lock first: an allotted run without it counts as interrupted.
        held.enter_context(folio_lock(run.folder, run.name))
        details = {"step": int(Step.ALLOT), "number": number, **input_details(intake.files)}
        details["sign_off"] = [item.role for item in intake.study.sign_off]
        run.entries.append(trail.append("allotted", run.subject, None, details))
        if old is not None:
            entry, run.facts["replaces"] = enter_replacement(trail, run.subject, old)
            run.entries.append(entry)
        run.history = execution_history(trail, run.subject)
    progress(Step.ALLOT, f"{run.subject}, execution {run.history['execution']} on these data")
    return run


def _compute_and_render(run: _Run) -> Findings:
    run.payload = {file.folio_path: _kept(file) for file in run.intake.files}
    run.payload["data/requirements.lock"] = requirements_lock()
    run.payload[HISTORY_FILE] = canonical_bytes(run.history)
    run.payload |= run.standing.payload
    run.record = run_record(run.intake, run.surroundings, run.number, run.head_at_start)
    run.record |= {"executions": executions_record(run.history), **run.facts}
    run.record["clock"] = clock_record(run.intake.laboratory)
    load_renderer(run.intake.laboratory)
    environment = environment_record()
    run.payload["data/environment.json"] = canonical_bytes(environment)
    run.payload[BOM_FILE] = bill_bytes(environment)
    checked = self_check()
    run.record |= {"self_check": checked, "program": program_record(run.workspace)}
    run.enter("self-checked", Step.SELF_CHECK, {"result": checked})
    run.progress(Step.SELF_CHECK, checked)

    computed = evaluate(run.intake.study, run.intake.observations)
    _take_second_route(run, computed)
    findings = settled(computed, run.intake, run.standing, run.surroundings.started_utc)
    _take_earlier_plans(run)
    document = findings_bytes(findings)
    run.payload["data/findings.json"] = document
    run.record["findings_sha256"] = sha256_hex(document)
    head = run.enter("computed", Step.COMPUTE, {"findings": sha256_hex(document)})
    run.progress(Step.COMPUTE, f"findings {sha256_hex(document)[:16]}")

    run.record["trail_head_of_report"] = {"seq": head.seq, "sha256": head.sha256}
    run.progress(Step.RENDER, "setting the pages; this takes the longest")
    facts = run_facts(run.record, environment, run.history, sha256_hex(document), run.registration)
    report = render_report(report_input(run.intake, findings, facts))
    run.payload["data/report.pdf"] = report.pdf
    run.payload |= {f"data/figures/{name}": content for name, content in report.figures}
    run.record = completed_record(run.record, report.pdf)
    run.enter("rendered", Step.RENDER, {"report": sha256_hex(report.pdf)})
    run.progress(Step.RENDER, f"report.pdf {len(report.pdf) // 1024} kB")
    return findings


def _kept(file: AnyInput) -> Content:
    """How the folio comes by an input: its bytes, or a copy of those that were read."""
    return file.content if isinstance(file, InputFile) else FileToCopy(file.source, file.size, file.sha256)


def _take_second_route(run: _Run, findings: Findings) -> None:
    """Recompute what is to be reported by other algorithms; how far both agree goes into the run's record."""
    routes = second_routes(findings, run.intake.observations)
    run.record["second_route"] = second_route_record(routes)
    require_agreement(routes)


def _take_earlier_plans(run: _Run) -> None:
    """Compute under each plan that was amended after the data were seen, to stand beside the result."""
    earlier = earlier_results(run.intake, run.standing)
    run.payload |= earlier_payload(earlier)
    run.record["pre_registration"] = pre_registration(run.standing, earlier)
    run.registration = registration_facts(run.standing, earlier)


def _seal_completed(run: _Run, findings: Findings) -> RunOutcome:
    folio, seal = _seal(run, "completed")
    return RunOutcome(run.subject, folio, seal, findings, run.intake.study.sign_off, run.registration)


def _seal(run: _Run, outcome: str) -> tuple[Path, str]:
    run.payload |= read_me_first(run.subject, run.intake.study.title, VERSION)
    run.payload["data/run.json"] = canonical_bytes(run.record)
    run.enter("staged", Step.STAGE, {"files": len(run.payload) + 2})
    run.payload["data/trail.jsonl"] = trail_extract(run.entries)
    run.payload[CRATE_FILE] = run_crate(run.intake, run.record, run.entries, run.payload)
    staged = stage_folio(run.folder, run.name, run.payload, bag_info(run.intake, run.surroundings, run.name))
    run.progress(Step.STAGE, f"{len(run.payload)} files written and read back")
    run.enter("sealed", Step.SEAL, {"seal": staged.seal, "outcome": outcome})
    folio = staged.publish()
    run.progress(Step.SEAL, f"seal {staged.seal[:16]}")
    return folio, staged.seal


def _seal_failed(run: _Run, error: BaseException) -> BaseException:
    """Seal the folio of a run that failed; return the error to be raised."""
    reason, account = failure_text(error)
    if run.entries[-1].action == "sealed":
        where = f"{run.subject} is sealed but not in its place; the next run puts it there"
        return MachineError(f"{reason}\n{where}.")
    where = f"{run.subject} failed; its number is kept"
    try:
        run.enter("failed", Step(run.reached + 1), {}, holdable(reason))
        run.payload.pop("data/report.pdf", None)  # a report is issued by a completed run only
        run.record.pop("report_sha256", None)
        run.payload["data/failure.txt"] = account.encode("utf-8", "backslashreplace")
        run.record = failed_record(run.record, holdable(reason))
        folio, _ = _seal(run, "failed")
        where = f"{where}, and its folio says why: {shown_path(folio)}"
    except Exception as second:  # noqa: BLE001 - the first error is the one to tell; this one beside it
        where = f"{where}, but its folio could not be sealed ({second})"
    return MachineError(f"{reason}\n{where}.")
