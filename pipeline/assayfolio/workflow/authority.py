"""Who may do what: every command that writes asks here first, and an attempt that is refused is entered.

Without `configs/people.yaml` roles are not in use: every account may do everything, except where the settings
need two persons. With it, the list that counts is the one in force, which the audit trail holds: a list that
was edited by other means than `assayfolio settings` gives nobody a right.
"""

from collections.abc import Mapping

from assayfolio.canonical import Json
from assayfolio.errors import InputError
from assayfolio.evidence.settings import settings_in_force
from assayfolio.evidence.trail import TrailWriter
from assayfolio.study.faults import listed
from assayfolio.study.laboratory import People, PersonRole
from assayfolio.workflow.actors import Actor, actor_among, actor_of, people_of
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.recovery import found_trail
from assayfolio.workflow.settings_files import (
    CHANGED,
    StandingSettings,
    changed_files,
    enter_first_settings,
    settings_texts,
    standing_settings,
    waiting_seconds,
)
from assayfolio.workflow.workspace import PEOPLE, Workspace

__all__ = ["ATTEMPT_REFUSED", "MAY", "Actor", "NotAllowedError", "actor_of", "may", "require"]

ATTEMPT_REFUSED = "attempt-refused"
MAY: Mapping[str, tuple[PersonRole, ...]] = {
    "run": ("runner", "author"),
    "worksheet": ("runner", "author"),
    "deviation": ("runner", "author"),
    "preregister": ("author",),
    "amend": ("author",),
    "void": ("approver", "quality-assurance"),
    "trail --review": ("reviewer", "approver", "quality-assurance"),
    "archive --dispose": ("administrator",),
    "archive --dispose --confirm": ("quality-assurance", "approver"),
    "settings": ("administrator",),
    "settings --confirm": ("administrator", "approver", "quality-assurance"),
    "sign": ("author", "reviewer", "approver"),
    "signer enrol": ("author", "reviewer", "approver"),
    "signer renew": ("author", "reviewer", "approver"),
    "signer revoke": ("administrator", "quality-assurance"),
    "signer --confirm": ("administrator", "quality-assurance"),
}
"""The roles of which one is needed for a command; a command that is not here is anybody's."""


class NotAllowedError(InputError):
    """The account may not do this; the attempt has been entered in the audit trail."""


def may(actor: Actor, command: str) -> str | None:
    """Why `actor` may not give `command`; None where he may."""
    needed = MAY.get(command, ())
    if not actor.in_use or not needed:
        return None
    if actor.person is None:
        return f"the account {actor.account} is not in the laboratory's list of people"
    if not set(needed).intersection(actor.roles):
        return f"{actor.person} has not the role that `{command}` needs: {listed(needed)}"
    return None


def require(workspace: Workspace, command: str) -> Actor:
    """The actor, where he may give `command` and the settings are those in force.

    Enters the settings of a workspace whose trail has none yet. Raises NotAllowedError, after an entry
    `attempt-refused`, where the settings were changed outside `assayfolio settings` or the account may not;
    InputError where the settings cannot be read; BusyError and MachineError as opening the trail does.
    """
    with trail_book(workspace, waiting_seconds(workspace)) as trail:
        found_trail(workspace, trail)
        return allowed(workspace, trail, command)


def allowed(workspace: Workspace, trail: TrailWriter, command: str) -> Actor:
    """The same with the trail at hand."""
    known = settings_in_force(trail.entries)
    first: StandingSettings | None = None
    if known is None or known.provisional:
        first = _first_settings(workspace)
        people = people_of(workspace) if first is None else _people_in_use(first)
    else:
        changed = changed_files(known, settings_texts(workspace))
        if changed:
            needed = f"an entry of the settings as they are: {', '.join(changed)}"
            raise refused(trail, command, CHANGED, needed, {"changed": list(changed)})
        people = _people_in_use(standing_settings(workspace))
    actor = actor_among(people)
    why = may(actor, command)
    if why is not None:
        raise refused(trail, command, why, list(MAY[command]))
    if first is not None:
        enter_first_settings(trail, first)
    return actor


def _first_settings(workspace: Workspace) -> StandingSettings | None:
    """The settings of a workspace that has none in force, to be entered by somebody who may work there.

    Faults of `lab.yaml` are left for the command to tell, which reads it itself: None.
    """
    try:
        return standing_settings(workspace)
    except InputError:
        return None


def _people_in_use(standing: StandingSettings) -> People | None:
    if standing.people is None and "people" in standing.laboratory.require:
        raise InputError(
            f"{PEOPLE} is missing, which {standing.laboratory.name} requires: list who works here, in which "
            "roles, and enter that with `assayfolio settings`."
        )
    return standing.people


_NO_DETAILS: Mapping[str, Json] = {}


def refused(
    trail: TrailWriter, command: str, why: str, needed: Json, details: Mapping[str, Json] = _NO_DETAILS
) -> NotAllowedError:
    """Enter the attempt, and give the error to raise."""
    trail.append(
        ATTEMPT_REFUSED, f"assayfolio {command}", why, {"command": command, "needed": needed, **details}
    )
    return NotAllowedError(f"Not allowed, and the attempt was entered in the audit trail: {why}.")
