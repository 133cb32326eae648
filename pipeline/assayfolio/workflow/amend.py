"""Amending a registered plan: what changes, whether after the data, why; sealed as the next protocol."""

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

from assayfolio.errors import InputError
from assayfolio.evidence.protocols import RegisteredPlan, registered_plans
from assayfolio.evidence.trail import read_trail
from assayfolio.study.change_reasons import EXPECTED, change_emptiness
from assayfolio.study.differences import Difference, shortened
from assayfolio.study.faults import shown
from assayfolio.workflow.authority import require
from assayfolio.workflow.plan_to_fix import plan_to_fix
from assayfolio.workflow.preregister import timing_lines
from assayfolio.workflow.protocol_folio import Change, FixedPlan, fix_plan
from assayfolio.workflow.registration import differences_to, minute_text, read_registered, timing
from assayfolio.workflow.workspace import Workspace, shown_path


@dataclass(frozen=True, slots=True)
class Proposal:
    """A change of a registered plan before it is entered: what it amends, what differs, and its timing."""

    study: str
    amends: RegisteredPlan
    differences: tuple[Difference, ...]
    timing: str
    first_seen: str | None
    data_present: tuple[str, ...]

    def lines(self) -> list[str]:
        """The change, for the person who is asked why."""
        amended = f"{self.study}/{self.amends.name}, registered {minute_text(self.amends.time)}"
        listed = [
            line
            for one in self.differences
            for line in (f"  {one.key}", f"    was  {shortened(one.old)}", f"    is   {shortened(one.new)}")
        ]
        timed = timing_lines(self.timing, self.first_seen, self.data_present)
        return [f"Amends {amended}", *listed, *(f"  {line}" for line in timed)]


def amend(workspace: Workspace, study_path: Path, reason_for: Callable[[Proposal], str]) -> FixedPlan:
    """Register the plan in `study_path` as an amendment of the one that is registered.

    `reason_for` is shown the change and gives the reason. Raises InputError where nothing is registered,
    where nothing differs, and for a reason that says nothing; BusyError and MachineError as `fix_plan` does.
    """
    require(workspace, "amend")
    plan = plan_to_fix(workspace, study_path)
    file = shown_path(study_path)
    entries = read_trail(workspace.runs).entries
    plans = registered_plans(entries, plan.study.study)
    if not plans:
        raise InputError(
            f"No plan of {plan.study.study} is registered, so there is nothing to amend. "
            f"`assayfolio preregister {file}` registers it."
        )
    latest = plans[-1]
    found = differences_to(read_registered(workspace, latest), plan.study)
    if not found:
        raise InputError(
            f"The plan is the one registered as {plan.study.study}/{latest.name}: nothing differs in "
            "meaning, so there is nothing to amend."
        )
    seen = plan.first_seen(entries)
    proposal = Proposal(
        study=plan.study.study,
        amends=latest,
        differences=found,
        timing=timing(None, seen),
        first_seen=None if seen is None else seen.time,
        data_present=tuple(path for path, _ in plan.data_present),
    )
    reason = " ".join(reason_for(proposal).split())
    earlier = [one.reason for one in plans if one.reason is not None]
    empty = change_emptiness(reason, earlier)
    if empty is not None:
        said = "is missing" if not reason else f"{shown(reason)} is {empty}"
        raise InputError(f"The reason for the amendment {said}; {EXPECTED}. Nothing was entered.")
    return fix_plan(plan, Change(latest, found, reason))
