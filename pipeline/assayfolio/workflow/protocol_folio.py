"""Fixing a plan: from the study definition to a sealed protocol folio, in the steps that a run takes too.

1 read and validate the plan, 2 allot the protocol's number, 5 render the protocol, 6 stage the folio and read
it back, 7 register: enter the seal in the trail, then rename the folder into place. A failure after step 2
keeps its number, with the reason in the trail; no folio comes of it.
"""

from collections.abc import Mapping
from contextlib import ExitStack
from dataclasses import dataclass
from pathlib import Path

from assayfolio.canonical import Json, canonical_bytes, sha256_hex
from assayfolio.errors import InputError, MachineError
from assayfolio.evidence.bill_of_materials import BOM_FILE, bill_bytes
from assayfolio.evidence.crate import CRATE_FILE
from assayfolio.evidence.entries import TrailEntry, TrailHead
from assayfolio.evidence.environment import environment_record
from assayfolio.evidence.folio import Content, folio_lock, stage_folio
from assayfolio.evidence.history import trail_extract
from assayfolio.evidence.protocols import (
    PROTOCOL_ALLOTTED,
    PROTOCOL_FAILED,
    PROTOCOL_STAGED,
    REGISTERED,
    RegisteredPlan,
    next_protocol_number,
    protocol_name,
    protocol_subject,
    registered_plans,
)
from assayfolio.evidence.register import ReceivedFile
from assayfolio.evidence.trail import TrailWriter
from assayfolio.findings_parts import power_part
from assayfolio.report.loading import load_renderer
from assayfolio.report.protocol import render_protocol
from assayfolio.report.protocol_facts import ProtocolFacts, ProtocolInput
from assayfolio.study.canonical_plan import plan_bytes, plan_digest
from assayfolio.study.differences import Difference
from assayfolio.version import VERSION
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.failure import failure_text
from assayfolio.workflow.intake import InputFile
from assayfolio.workflow.plan_to_fix import PlanToFix
from assayfolio.workflow.provenance import protocol_crate
from assayfolio.workflow.records import requirements_lock
from assayfolio.workflow.recovery import acknowledge_interruptions, found_trail
from assayfolio.workflow.registration import timing
from assayfolio.workflow.steps import Step
from assayfolio.workflow.surroundings import Surroundings, look_around
from assayfolio.worksheet.rows import planned_rows

PROTOCOL_FORMAT = "assayfolio-protocol/1"
PROTOCOL_FILE = "data/protocol.json"
PROTOCOL_PDF = "data/protocol.pdf"
PLAN_FILE = "data/plan.json"
POWER_FILE = "data/power.json"
WORKSHEET_FOLDER = "data/worksheet"


@dataclass(frozen=True, slots=True)
class Change:
    """What an amendment changes in the plan registered before it, and why."""

    amends: RegisteredPlan
    differences: tuple[Difference, ...]
    reason: str


@dataclass(frozen=True, slots=True)
class FixedPlan:
    """A plan that is registered now: its protocol, where it lies, its seal, how it stands to the data."""

    subject: str
    folio: Path
    seal: str
    plan_sha256: str
    time: str
    timing: str
    first_seen: str | None
    data_present: tuple[str, ...]


@dataclass(slots=True)
class _Protocol:
    """A protocol that has its number."""

    plan: PlanToFix
    change: Change | None
    surroundings: Surroundings
    number: int
    head_at_start: TrailHead
    first_seen: ReceivedFile | None
    entries: list[TrailEntry]
    head: TrailHead

    @property
    def subject(self) -> str:
        return protocol_subject(self.plan.study.study, self.number)

    @property
    def timing(self) -> str:
        return timing(None, self.first_seen)

    @property
    def folder(self) -> Path:
        return self.plan.workspace.runs / self.plan.study.study

    def enter(self, action: str, details: Mapping[str, Json], reason: str | None = None) -> TrailEntry:
        with trail_book(self.plan.workspace, self.plan.laboratory.wait_seconds) as trail:
            entry = trail.append(action, self.subject, reason, details)
            self.entries.append(entry)
            return entry


def fix_plan(plan: PlanToFix, change: Change | None) -> FixedPlan:
    """Register the plan: as the study's first, or as a `change` of the one that is registered.

    Raises InputError where another protocol of the study was registered meanwhile, BusyError where another
    writer holds the workspace, MachineError where it failed after its number was allotted.
    """
    surroundings = look_around()
    load_renderer(plan.laboratory)
    with ExitStack() as held:
        protocol = _allot(plan, change, surroundings, held)
        try:
            return _seal(protocol)
        except BaseException as error:
            raise _stopped(protocol, error) from error


def _allot(plan: PlanToFix, change: Change | None, surroundings: Surroundings, held: ExitStack) -> _Protocol:
    study = plan.study.study
    with trail_book(plan.workspace, plan.laboratory.wait_seconds) as trail:
        found_trail(plan.workspace, trail)
        acknowledge_interruptions(plan.workspace, trail)
        _require_newest(plan, change, trail)
        number = next_protocol_number(trail.entries, study)
        # The folio's lock first: an allotted protocol without it counts as interrupted.
        held.enter_context(folio_lock(plan.workspace.runs / study, protocol_name(number)))
        first_seen = plan.first_seen(trail.entries)
        head = trail.head
        protocol = _Protocol(plan, change, surroundings, number, head, first_seen, [], head)
        reason = None if change is None else change.reason
        details: dict[str, Json] = {"step": int(Step.ALLOT), "number": number, **_particulars(protocol)}
        details["sign_off"] = [item.role for item in plan.study.sign_off]
        protocol.entries.append(trail.append(PROTOCOL_ALLOTTED, protocol.subject, reason, details))
        protocol.head = trail.head
    return protocol


def _require_newest(plan: PlanToFix, change: Change | None, trail: TrailWriter) -> None:
    plans = registered_plans(trail.entries, plan.study.study)
    newest = plans[-1].seq if plans else None
    if newest != (None if change is None else change.amends.seq):
        raise InputError(
            f"Another protocol of {plan.study.study} was registered meanwhile; nothing was entered. Look at "
            "it, and give the command again."
        )


def _particulars(protocol: _Protocol) -> dict[str, Json]:
    """What the allotment and the protocol's record say alike."""
    plan, change = protocol.plan, protocol.change
    seen = protocol.first_seen
    return {
        "inputs": {file.path: file.sha256 for file in plan.files},
        "plan": plan_digest(plan.study),
        "study_definition": plan.definition_sha256,
        "amends": None if change is None else change.amends.number,
        "differences": [] if change is None else [_difference(one) for one in change.differences],
        "timing": protocol.timing,
        "data_first_seen": None if seen is None else {"time": seen.time, "seq": seen.seq, "path": seen.path},
        "data_present": [{"path": path, "sha256": digest} for path, digest in plan.data_present],
    }


def _difference(one: Difference) -> Json:
    return {"key": one.key, "old": one.old, "new": one.new}


def _seal(protocol: _Protocol) -> FixedPlan:
    plan, change = protocol.plan, protocol.change
    environment = environment_record()
    payload = _payload(plan)
    payload["data/environment.json"] = canonical_bytes(environment)
    payload[BOM_FILE] = bill_bytes(environment)
    pdf = render_protocol(_protocol_input(protocol))
    payload[PROTOCOL_PDF] = pdf
    record = _record(protocol, pdf)
    payload[PROTOCOL_FILE] = canonical_bytes(record)
    protocol.enter(PROTOCOL_STAGED, {"step": int(Step.STAGE), "files": len(payload) + 2})
    payload["data/trail.jsonl"] = trail_extract(protocol.entries)
    payload[CRATE_FILE] = protocol_crate(plan.study, plan.laboratory, record, protocol.entries, payload)
    name = protocol_name(protocol.number)
    staged = stage_folio(protocol.folder, name, payload, _bag_info(protocol))
    registered = protocol.enter(
        REGISTERED,
        {
            "step": int(Step.SEAL),
            "seal": staged.seal,
            "plan": plan_digest(plan.study),
            "study_definition": plan.definition_sha256,
            "amends": None if change is None else change.amends.number,
            "timing": protocol.timing,
        },
        None if change is None else change.reason,
    )
    return FixedPlan(
        subject=protocol.subject,
        folio=staged.publish(),
        seal=staged.seal,
        plan_sha256=plan_digest(plan.study),
        time=registered.time,
        timing=protocol.timing,
        first_seen=None if protocol.first_seen is None else protocol.first_seen.time,
        data_present=tuple(path for path, _ in plan.data_present),
    )


def _payload(plan: PlanToFix) -> dict[str, Content]:
    payload: dict[str, Content] = {
        file.folio_path: file.content for file in plan.files if isinstance(file, InputFile)
    }
    payload[PLAN_FILE] = plan_bytes(plan.study)
    payload["data/requirements.lock"] = requirements_lock()
    payload |= {f"{WORKSHEET_FOLDER}/worksheet{end}": content for end, content in plan.worksheet.items()}
    if plan.power is not None or plan.power_gaps:
        payload[POWER_FILE] = canonical_bytes(
            {
                "study": plan.study.study,
                "planned_power": None if plan.power is None else power_part(plan.power),
                "not_reported": [{"what": gap.what, "reason": gap.reason} for gap in plan.power_gaps],
            }
        )
    return payload


def _record(protocol: _Protocol, pdf: bytes) -> dict[str, Json]:
    change, surroundings = protocol.change, protocol.surroundings
    return {
        "format": PROTOCOL_FORMAT,
        "study": protocol.plan.study.study,
        "protocol": protocol_name(protocol.number),
        "number": protocol.number,
        "started": surroundings.started_utc,
        "started_local": surroundings.started_local,
        "actor": surroundings.actor,
        "host": surroundings.host,
        **_particulars(protocol),
        "inputs": [
            {
                "role": file.role,
                "path": file.path,
                "folio_path": file.folio_path,
                "size": file.size,
                "sha256": file.sha256,
            }
            for file in protocol.plan.files
        ],
        "amends_seal": None if change is None else change.amends.seal,
        "reason": None if change is None else change.reason,
        "order_sha256": protocol.plan.order_sha256,
        "report_sha256": sha256_hex(pdf),
        "trail_head_at_start": {"seq": protocol.head_at_start.seq, "sha256": protocol.head_at_start.sha256},
        "trail_head_of_report": {"seq": protocol.head.seq, "sha256": protocol.head.sha256},
    }


def _bag_info(protocol: _Protocol) -> list[tuple[str, str]]:
    plan = protocol.plan
    return [
        ("Source-Organization", plan.laboratory.name),
        ("External-Identifier", protocol.subject),
        ("External-Description", plan.study.title),
        ("Bagging-Date", protocol.surroundings.started_utc[:10]),
        ("Bag-Software-Agent", f"assayfolio {VERSION}"),
    ]


def _protocol_input(protocol: _Protocol) -> ProtocolInput:
    plan, change, seen = protocol.plan, protocol.change, protocol.first_seen
    definition = next(file for file in plan.files if file.role == "study definition")
    assert isinstance(definition, InputFile), "a study definition is held in memory"
    return ProtocolInput(
        study=plan.study,
        laboratory=plan.laboratory,
        power=plan.power,
        power_gaps=plan.power_gaps,
        definition=definition.content,
        rows=planned_rows(plan.study) if plan.study.worksheet is not None else (),
        facts=ProtocolFacts(
            number=protocol.number,
            started_utc=protocol.surroundings.started_utc,
            started_local=protocol.surroundings.started_local,
            actor=protocol.surroundings.actor,
            host=protocol.surroundings.host,
            definition_path=definition.path,
            definition_sha256=definition.sha256,
            plan_sha256=plan_digest(plan.study),
            order_sha256=plan.order_sha256,
            trail_seq=protocol.head.seq,
            trail_sha256=protocol.head.sha256,
            amends=None if change is None else change.amends.name,
            amends_time=None if change is None else change.amends.time,
            reason=None if change is None else change.reason,
            differences=()
            if change is None
            else tuple((one.key, one.old, one.new) for one in change.differences),
            data_first_seen=None if seen is None else seen.time,
            data_present=tuple(path for path, _ in plan.data_present),
        ),
    )


def _stopped(protocol: _Protocol, error: BaseException) -> BaseException:
    """Enter why no folio came of the protocol; return the error to be raised."""
    reason, _ = failure_text(error)
    if protocol.entries[-1].action == REGISTERED:
        where = f"{protocol.subject} is registered but not in its place; the next command puts it there"
        return MachineError(f"{reason}\n{where}.")
    where = f"{protocol.subject} was not registered; its number is kept"
    try:
        told = reason.encode("utf-8", "backslashreplace").decode("utf-8")
        protocol.enter(PROTOCOL_FAILED, {"step": int(Step.RENDER)}, told)
    except Exception as second:  # noqa: BLE001 - the first error is the one to tell; this one beside it
        where = f"{where}, but that could not be entered ({second})"
    return MachineError(f"{reason}\n{where}.")
