"""Pre-registering the plan of a study: fixed, sealed and entered before the data."""

from collections.abc import Mapping
from pathlib import Path

from assayfolio.canonical import Json
from assayfolio.errors import InputError
from assayfolio.evidence.protocols import registered_plans
from assayfolio.evidence.trail import read_trail
from assayfolio.workflow.authority import require
from assayfolio.workflow.plan_to_fix import plan_to_fix
from assayfolio.workflow.protocol_folio import FixedPlan, fix_plan
from assayfolio.workflow.registration import BEFORE, differences_to, minute_text, read_registered
from assayfolio.workflow.workspace import Workspace, shown_path


def preregister(workspace: Workspace, study_path: Path) -> FixedPlan:
    """Register the plan in `study_path` as the first protocol of its study.

    Raises InputError with all faults of the plan, where the account may not, and where a plan of the study is
    registered already; BusyError and MachineError as `fix_plan` does.
    """
    require(workspace, "preregister")
    plan = plan_to_fix(workspace, study_path)
    plans = registered_plans(read_trail(workspace.runs).entries, plan.study.study)
    if plans:
        latest = plans[-1]
        subject, when = f"{plan.study.study}/{latest.name}", minute_text(latest.time)
        file = shown_path(study_path)
        if differences_to(read_registered(workspace, latest), plan.study):
            raise InputError(
                f"{plan.study.study} is registered already: as {subject}, on {when}, with another plan. "
                f"A change is an amendment: assayfolio amend {file} --reason ..."
            )
        raise InputError(
            f"This very plan is registered already: as {subject}, on {when}. Nothing was entered."
        )
    return fix_plan(plan, None)


def fixed_lines(fixed: FixedPlan, folio: str) -> list[str]:
    """What was registered, for people."""
    return [
        f"{fixed.subject} registered {minute_text(fixed.time)}",
        *(f"  {line}" for line in timing_lines(fixed.timing, fixed.first_seen, fixed.data_present)),
        f"  Plan      SHA-256 {fixed.plan_sha256}",
        f"  Folio     {folio}",
        f"  Protocol  {folio}/data/protocol.pdf",
        f"  Seal      {fixed.seal}",
    ]


def timing_lines(timing: str, first_seen: str | None, present: tuple[str, ...]) -> list[str]:
    """How a registration stands to the data."""
    if timing != BEFORE:
        when = minute_text(first_seen) if first_seen else "before"
        return [f"After data of this study were first seen, {when}; every report says so."]
    lines = ["Before any data of this study were seen."]
    if present:
        lines.append(f"In its place already, and named in the protocol: {', '.join(present)}")
    return lines


def fixed_document(workspace: Workspace, fixed: FixedPlan) -> Mapping[str, Json]:
    """What was registered, for programs."""
    folio = shown_path(fixed.folio.relative_to(workspace.root))
    return {
        "protocol": fixed.subject,
        "folio": folio,
        "report": f"{folio}/data/protocol.pdf",
        "seal": fixed.seal,
        "plan_sha256": fixed.plan_sha256,
        "registered": fixed.time,
        "timing": fixed.timing,
        "data_first_seen": fixed.first_seen,
        "data_present": list(fixed.data_present),
    }
