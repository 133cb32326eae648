"""Changing the laboratory's settings: what differs, the reason, and where it is needed a second person.

The files are edited by hand; nothing else is done with them before they are entered here. A change of roles,
separation of duties, one-person or witnesses is proposed by one person and confirmed by another, unless the
settings in force say that the laboratory has one person.
"""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Literal

from assayfolio.canonical import Json
from assayfolio.errors import Fault, InputError, Place, StudyError
from assayfolio.evidence.settings import (
    PROPOSED,
    SETTINGS,
    SUBJECT,
    EnteredSettings,
    entered_settings,
    open_proposal,
    settings_details,
    settings_digests,
    settings_in_force,
)
from assayfolio.evidence.trail import TrailEntry, TrailWriter, read_trail
from assayfolio.study.differences import Difference, shortened
from assayfolio.study.reasons import SHORTEST_REASON, emptiness
from assayfolio.study.settings_document import (
    LABORATORY_FILE,
    needs_second_person,
    settings_differences,
    settings_of,
)
from assayfolio.workflow.actors import Actor, actor_among
from assayfolio.workflow.authority import MAY, may, refused
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.intake import PLACEHOLDER
from assayfolio.workflow.recovery import found_trail
from assayfolio.workflow.settings_files import (
    StandingSettings,
    changed_files,
    enter_first_settings,
    standing_settings,
)
from assayfolio.workflow.workspace import Workspace

CONFIRM = "settings --confirm"
State = Literal[
    "in force", "entered", "proposed", "confirmed", "never entered", "to be entered", "to be confirmed"
]


@dataclass(frozen=True, slots=True)
class SettingsOutcome:
    """How the settings stand: `entry` is the newest one about them, `changes` what differs field by field."""

    state: State
    entry: TrailEntry | None
    files: tuple[str, ...]
    changes: tuple[Difference, ...]
    second_needed: bool

    def lines(self) -> list[str]:
        """For people: the difference, and what has been or is to be done about it."""
        return [*difference_lines(self.files, self.changes), *_STATE_LINES[self.state](self)]

    def document(self) -> Mapping[str, Json]:
        """For programs."""
        entry = self.entry
        return {
            "state": self.state,
            "entry": None if entry is None else {"seq": entry.seq, "time": entry.time, "actor": entry.actor},
            "reason": None if entry is None else entry.reason,
            "files": list(self.files),
            "second_person_needed": self.second_needed,
            "differences": [
                {"key": change.key, "old": change.old, "new": change.new} for change in self.changes
            ],
        }


def difference_lines(files: Sequence[str], changes: Sequence[Difference]) -> list[str]:
    """What differs, a line a field: what it was, what it is."""
    if not files:
        return []
    if not changes:
        return [f"{' and '.join(files)}: only layout and comments differ; no setting does"]
    width = max(len(change.key) for change in changes)
    return [
        f"{change.key:<{width}}  {shortened(change.old)} -> {shortened(change.new)}" for change in changes
    ]


def settings_now(workspace: Workspace) -> SettingsOutcome:
    """How the settings stand. Nothing is written, and nobody needs a role to ask.

    Raises InputError where a settings file cannot be read or is faulty.
    """
    standing = _named(standing_settings(workspace))
    entries = read_trail(workspace.runs).entries
    known, proposal = settings_in_force(entries), open_proposal(entries)
    if known is None or known.provisional:
        changes = () if known is None else settings_differences(known.texts, standing.texts)
        return SettingsOutcome("never entered", None, tuple(standing.texts), changes, second_needed=False)
    files = changed_files(known, standing.texts)
    changes = settings_differences(known.texts, standing.texts) if files else ()
    second = _second_needed(known, changes)
    if not files:
        return SettingsOutcome("in force", known.entry, (), (), second)
    if proposal is not None and not changed_files(proposal, standing.texts):
        return SettingsOutcome("to be confirmed", proposal.entry, files, changes, second)
    return SettingsOutcome("to be entered", known.entry, files, changes, second)


def enter_settings(
    workspace: Workspace, shown: SettingsOutcome, reason: str, second: str | None
) -> SettingsOutcome:
    """Enter the change that was `shown`, or propose it where it needs a second person (`second`, if named).

    Raises NotAllowedError (a refused attempt is entered) for an account that may not, InputError for a reason
    that says nothing, where nothing differs, or where it is another change by now.
    """
    standing = _named(standing_settings(workspace))
    with trail_book(workspace, standing.laboratory.wait_seconds) as trail:
        found_trail(workspace, trail)
        known = settings_in_force(trail.entries)
        if known is None or known.provisional:
            entry = enter_first_settings(trail, standing, reason)
            return SettingsOutcome("entered", entry, shown.files, shown.changes, second_needed=False)
        actor = _may(trail, known, "settings")
        files = changed_files(known, standing.texts)
        changes = settings_differences(known.texts, standing.texts)
        if (files, changes) != (shown.files, shown.changes):
            raise InputError("The settings differ from what was shown by now; look at them again.")
        if not files:
            raise InputError("Nothing was entered: the settings are those in force.")
        _require_reason(reason, known.entry.reason)
        needed = _second_needed(known, changes)
        details = settings_details(standing.texts, known.digests, changes)
        if needed:
            _require_other(second, actor)
            entry = trail.append(PROPOSED, SUBJECT, reason, {**details, "second": second})
            return SettingsOutcome("proposed", entry, files, changes, needed)
        entry = trail.append(SETTINGS, SUBJECT, reason, details)
        return SettingsOutcome("entered", entry, files, changes, needed)


def confirm_settings(workspace: Workspace) -> SettingsOutcome:
    """Confirm the change that another person has proposed, so that it is in force.

    Raises NotAllowedError (a refused attempt is entered) for the person who proposed it, another one than was
    named, or one who may not; InputError where there is no proposal, or the files are not those proposed.
    """
    standing = standing_settings(workspace)
    with trail_book(workspace, standing.laboratory.wait_seconds) as trail:
        known, proposal = settings_in_force(trail.entries), open_proposal(trail.entries)
        if known is None or proposal is None:
            raise InputError("There is no change of the settings to be confirmed.")
        changed = [
            file
            for file, digest in settings_digests(standing.texts).items()
            if digest != proposal.digests[file]
        ]
        if changed:
            raise InputError(
                f"{' and '.join(changed)} differ from the change that entry {proposal.entry.seq} proposes; "
                "propose it again with `assayfolio settings`."
            )
        actor = _may(trail, known, CONFIRM)
        _require_second(trail, proposal, actor)
        changes = settings_differences(known.texts, standing.texts)
        details = settings_details(standing.texts, known.digests, changes)
        details["proposed"] = {"seq": proposal.entry.seq, "actor": proposal.entry.actor}
        entry = trail.append(SETTINGS, SUBJECT, proposal.entry.reason, details)
        files = changed_files(known, standing.texts)
        return SettingsOutcome("confirmed", entry, files, changes, second_needed=True)


def _named(standing: StandingSettings) -> StandingSettings:
    if standing.named:
        return standing
    fault = Fault(
        Place(LABORATORY_FILE), f"it still says {PLACEHOLDER!r}", "put your laboratory's name there"
    )
    raise StudyError("The laboratory has no name yet.", (fault,))


def _may(trail: TrailWriter, known: EnteredSettings, command: str) -> Actor:
    """The actor, by the list of people that is in force: nobody gives himself a right by editing it."""
    _, people = settings_of(known.texts)
    actor = actor_among(people)
    why = may(actor, command)
    if why is not None:
        raise refused(trail, command, why, list(MAY[command]))
    return actor


def _second_needed(known: EnteredSettings, changes: Sequence[Difference]) -> bool:
    if not needs_second_person(changes):
        return False
    try:
        laboratory, _ = settings_of(known.texts)
    except StudyError:
        return True
    return not laboratory.one_person


def _require_reason(reason: str, last: str | None) -> None:
    empty = emptiness(reason.strip())
    if empty is not None:
        expected = f"say what changes and why, in {SHORTEST_REASON} characters or more"
        raise InputError(f"The reason is {empty}; {expected}.")
    if reason == last:
        raise InputError("The reason is that of the change before, word for word; say what this one is for.")


def _require_other(second: str | None, actor: Actor) -> None:
    if second == actor.account:
        raise InputError(f"{second} proposes the change; the second person has to be another one.")


def _require_second(trail: TrailWriter, proposal: EnteredSettings, actor: Actor) -> None:
    by, named = proposal.entry.actor, proposal.second
    person = _person_of(proposal.entry)
    if by == actor.account or (person is not None and person == actor.person):
        why = f"entry {proposal.entry.seq} was proposed under the same account, {by}"
        raise refused(trail, CONFIRM, why, "a second person")
    if named is not None and named != actor.account:
        why = f"entry {proposal.entry.seq} names {named} as the second person"
        raise refused(trail, CONFIRM, why, named)


def _person_of(entry: TrailEntry) -> str | None:
    by = entry.details.get("by")
    person = by.get("person") if isinstance(by, Mapping) else None
    return person if isinstance(person, str) else None


def _seen(outcome: SettingsOutcome) -> str:
    entry = outcome.entry
    if entry is None:
        return "no entry"
    return f"entry {entry.seq}, {entry.time[:10]} {entry.time[11:19]} UTC, {entry.actor}: {entry.reason}"


def _to_be_entered(outcome: SettingsOutcome) -> list[str]:
    if outcome.second_needed:
        return ["To be proposed with a reason, and confirmed by a second person."]
    return ["To be entered with a reason."]


def _proposed(outcome: SettingsOutcome) -> list[str]:
    settings = None if outcome.entry is None else entered_settings(outcome.entry)
    who = "a second person" if settings is None or settings.second is None else settings.second
    return [f"Proposed, {_seen(outcome)}", f"It is in force when {who} runs `assayfolio settings --confirm`."]


_STATE_LINES: Mapping[State, Callable[[SettingsOutcome], list[str]]] = {
    "in force": lambda outcome: [f"The settings are those in force: {_seen(outcome)}"],
    "entered": lambda outcome: [f"Entered, {_seen(outcome)}"],
    "confirmed": lambda outcome: [f"Confirmed and in force, {_seen(outcome)}"],
    "proposed": _proposed,
    "to be confirmed": _proposed,
    "to be entered": _to_be_entered,
    "never entered": lambda _: ["Not in the audit trail yet: the first command that writes enters them."],
}
