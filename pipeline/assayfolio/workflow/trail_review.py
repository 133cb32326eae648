"""Reviewing the audit trail of a run: by somebody who did not run it, with an outcome in words."""

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

from assayfolio.canonical import Json
from assayfolio.errors import Fault, InputError, Place
from assayfolio.evidence.entries import TrailEntry
from assayfolio.evidence.history import RunHistory, run_histories, split_subject
from assayfolio.evidence.stamps import person_of
from assayfolio.evidence.states import TRAIL_REVIEWED
from assayfolio.evidence.trail_exceptions import TrailException, trail_exceptions
from assayfolio.evidence.trail_filters import studies_of
from assayfolio.study.reasons import SHORTEST_REASON, emptiness
from assayfolio.workflow.actors import Actor
from assayfolio.workflow.authority import allowed, refused
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.recovery import found_trail
from assayfolio.workflow.settings_files import standing_settings
from assayfolio.workflow.workspace import Workspace, shown_path

COMMAND = "trail --review"
MOST_CHARACTERS = 2000


@dataclass(frozen=True, slots=True)
class TrailReview:
    """A review as it was entered, and the exceptions of the run's study up to that point."""

    run: str
    entry: TrailEntry
    through_seq: int
    outcome: str
    exceptions: tuple[TrailException, ...]

    def lines(self) -> list[str]:
        """For people."""
        return [
            f"{self.run}: trail reviewed up to entry {self.through_seq}, entered as {self.entry.seq}",
            f"  outcome     {self.outcome}",
            f"  exceptions  {len(self.exceptions)} in the trail of its study",
            *(f"    {each.kind}: entry {each.entry.seq}, {each.words}" for each in self.exceptions),
        ]

    def document(self) -> Mapping[str, Json]:
        """For programs."""
        return {
            "run": self.run,
            "seq": self.entry.seq,
            "through_seq": self.through_seq,
            "outcome": self.outcome,
            "exceptions": [
                {"kind": each.kind, "seq": each.entry.seq, "words": each.words} for each in self.exceptions
            ],
        }


def review_trail(workspace: Workspace, named: Path, outcome: str) -> TrailReview:
    """Enter that the trail of the run `named` was reviewed up to its newest entry, with this outcome.

    Raises InputError for an outcome that says nothing and where there is no such run; NotAllowedError, after
    an entry of the attempt, for an account that may not, or that took part in the run; BusyError and
    MachineError as the trail does.
    """
    outcome = " ".join(outcome.split())
    _require_words(outcome)
    standing = standing_settings(workspace)
    with trail_book(workspace, standing.laboratory.wait_seconds) as trail:
        found_trail(workspace, trail)
        actor = allowed(workspace, trail, COMMAND)
        run = _run_of(workspace, named, trail.entries)
        if not standing.laboratory.one_person and _took_part(actor, run):
            who = actor.person or actor.account
            why = f"{who} took part in {run.subject}; its trail is reviewed by another person"
            raise refused(trail, COMMAND, why, "somebody who did not run it")
        through = trail.head.seq
        details: dict[str, Json] = {"run": run.subject, "through_seq": through, "outcome": outcome}
        entry = trail.append(TRAIL_REVIEWED, run.subject, None, details)
        found = trail_exceptions(trail.entries)
    exceptions = tuple(each for each in found if run.study in studies_of(each.entry))
    return TrailReview(run.subject, entry, through, outcome, exceptions)


def _require_words(outcome: str) -> None:
    empty = emptiness(outcome)
    if empty is not None:
        raise InputError(
            f"The outcome is {empty.replace('any value', 'any review')}; say what was looked at and what was "
            f"found, in {SHORTEST_REASON} characters or more: --outcome."
        )
    if len(outcome) > MOST_CHARACTERS:
        raise InputError(f"The outcome has more than {MOST_CHARACTERS} characters; refer to a report of it.")


def _run_of(workspace: Workspace, named: Path, entries: tuple[TrailEntry, ...]) -> RunHistory:
    place = named.resolve()
    inside = place.relative_to(workspace.runs) if place.is_relative_to(workspace.runs) else named
    subject = inside.as_posix()
    if split_subject(subject) is not None:
        run = next((run for run in run_histories(entries) if run.subject == subject), None)
        if run is not None:
            return run
    advice = "name one that the audit trail knows, such as runs/LOT-7/run-0001 or LOT-7/run-0001"
    raise InputError("There is no trail to review.", (Fault(Place(shown_path(named)), "is no run", advice),))


def _took_part(actor: Actor, run: RunHistory) -> bool:
    """Whether the account, or the same person under another, made an entry of the run while it was made."""
    persons = {person for entry in run.to_be_staged if (person := person_of(entry)) is not None}
    return actor.account in {entry.actor for entry in run.to_be_staged} or actor.person in persons
