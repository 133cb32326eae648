"""A corrected run: it gets its own number, and says which run it replaces and why."""

from collections.abc import Mapping
from dataclasses import dataclass

from assayfolio.canonical import Json
from assayfolio.errors import InputError
from assayfolio.evidence.moves import Move, rules_of, why_not
from assayfolio.evidence.states import REPLACES, RunStanding, study_standing
from assayfolio.evidence.trail import TrailEntry, TrailWriter
from assayfolio.study.reasons import SHORTEST_REASON, emptiness
from assayfolio.workflow.authority import refused
from assayfolio.workflow.intake import Intake
from assayfolio.workflow.steps import Step

MOST_CHARACTERS = 500


@dataclass(frozen=True, slots=True)
class Replacement:
    """Which run of the same study a new one replaces, such as `run-0001`, and why."""

    run: str
    reason: str


def replacement_of(run: str | None, reason: str | None) -> Replacement | None:
    """The replacement that a command asks for, None where it asks for none.

    Raises InputError where one of the two is missing or says nothing.
    """
    if run is None and reason is None:
        return None
    if run is None:
        raise InputError("--reason is for a run that replaces another one: name that with --replaces.")
    said = (reason or "").strip()
    empty = "missing" if not said else emptiness(said)
    if empty is None and ("\n" in said or len(said) > MOST_CHARACTERS):
        empty = f"more than one line of {MOST_CHARACTERS} characters"
    if empty is not None:
        raise InputError(
            f"The reason is {empty}; say what is corrected with --reason, in {SHORTEST_REASON} characters or "
            "more."
        )
    return Replacement(run.rpartition("/")[2], said)


@dataclass(frozen=True, slots=True)
class Replaced:
    """The run that is to be replaced, as it stands, and why."""

    run: RunStanding
    reason: str


def replaced_run(
    trail: TrailWriter, intake: Intake, replacement: Replacement | None, account: str
) -> Replaced | None:
    """The run of the study that `replacement` names; None without one.

    Raises NotAllowedError, after an entry, where there is none that can be replaced.
    """
    if replacement is None:
        return None
    study = intake.study.study
    standing = study_standing(trail.entries, study)
    run = standing.run(f"{study}/{replacement.run}")
    why = why_not(Move("replace", account), standing, run, rules_of(intake.laboratory))
    if run is None or why is not None:
        needed = "a run of this study that has ended and is not superseded"
        raise refused(trail, "run --replaces", why or f"there is no {replacement.run}", needed)
    return Replaced(run, replacement.reason)


def enter_replacement(
    trail: TrailWriter, subject: str, replaced: Replaced
) -> tuple[TrailEntry, dict[str, Json]]:
    """Enter that the run `subject` replaces another; give the entry, and what the run's record says of it."""
    old = replaced.run
    details: dict[str, Json] = {"step": int(Step.ALLOT), "replaced": old.subject, "state": old.state}
    entry = trail.append(REPLACES, subject, replaced.reason, details)
    record: dict[str, Json] = {
        "run": old.subject,
        "reason": replaced.reason,
        "state": old.state,
        "void": None if old.voided is None else _void(old),
    }
    return entry, record


def _void(old: RunStanding) -> Mapping[str, Json]:
    void = old.voided
    assert void is not None, "asked for a void run only"
    return {
        "time": void.time,
        "reason": void.reason,
        "investigation": void.investigation,
        "folio": void.folio,
    }
