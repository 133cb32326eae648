"""Whether a person may sign a folio now: everything that is asked before he sees it, and again at the end."""

from dataclasses import dataclass
from datetime import datetime

from assayfolio.canonical import Json
from assayfolio.evidence.entries import TrailEntry
from assayfolio.evidence.moves import rules_of
from assayfolio.evidence.sign_offs import signatures_of
from assayfolio.evidence.signers import Enrolled, Signers, signers_of
from assayfolio.evidence.trail import TrailWriter
from assayfolio.study.laboratory import Laboratory
from assayfolio.workflow import surroundings
from assayfolio.workflow.actors import Actor
from assayfolio.workflow.authority import allowed, refused
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.recovery import acknowledge_interruptions, found_trail
from assayfolio.workflow.settings_files import standing_settings
from assayfolio.workflow.signable import Signable
from assayfolio.workflow.signer_keys import why_locked
from assayfolio.workflow.workspace import Workspace

COMMAND = "sign"


@dataclass(frozen=True, slots=True)
class SigningCase:
    """One signing: what, by whom, in which role, under which settings, and what the trail said of it."""

    workspace: Workspace
    target: Signable
    actor: Actor
    role: str
    enrolled: Enrolled
    laboratory: Laboratory
    signers: Signers
    entries: tuple[TrailEntry, ...]

    @property
    def before(self) -> int:
        """How many signatures there are already."""
        return len(signatures_of(self.entries, self.target.subject))


def time_of_signing() -> datetime:
    """The present time by this computer's clock, with its offset, in whole seconds."""
    return datetime.fromisoformat(surroundings.look_around().started_local).replace(microsecond=0)


def case_of(workspace: Workspace, target: Signable, role: str) -> SigningCase:
    """The case, where the person may sign `target` in `role` now. Raises as `admitted` does."""
    laboratory = standing_settings(workspace).laboratory
    with trail_book(workspace, laboratory.wait_seconds) as trail:
        found_trail(workspace, trail)
        acknowledge_interruptions(workspace, trail)
        actor, enrolled = admitted(workspace, trail, target, role, laboratory)
        entries = trail.entries
    return SigningCase(workspace, target, actor, role, enrolled, laboratory, signers_of(entries), entries)


def admitted(
    workspace: Workspace, trail: TrailWriter, target: Signable, role: str, laboratory: Laboratory
) -> tuple[Actor, Enrolled]:
    """The actor and his certificate, where he may sign `target` in `role` now.

    Raises NotAllowedError, after an entry of the attempt, for every reason why he may not.
    """
    actor = allowed(workspace, trail, COMMAND)
    enrolled = signers_of(trail.entries).of(actor.account)
    why = _why_not(trail, actor, target, role, laboratory) or _why_no_key(actor, enrolled)
    if why is not None or enrolled is None:
        needed = f"signing {target.subject} as {role} in order"
        details: dict[str, Json] = {"subject": target.subject, "role": role}
        raise refused(trail, COMMAND, why or "no certificate", needed, details)
    return actor, enrolled


def _why_not(
    trail: TrailWriter, actor: Actor, target: Signable, role: str, laboratory: Laboratory
) -> str | None:
    if actor.in_use and role not in actor.roles:
        return f"{actor.person} has not the role {role}"
    rules = rules_of(laboratory)
    return why_locked(trail.entries, actor.account) or target.why_not(
        trail.entries, actor.account, role, rules
    )


def _why_no_key(actor: Actor, enrolled: Enrolled | None) -> str | None:
    if enrolled is None:
        return f"no certificate is in force for {actor.account}; enrol one: assayfolio signer enrol"
    if actor.in_use and actor.person != enrolled.person:
        return f"the certificate of {actor.account} is that of {enrolled.person}, not of {actor.person}"
    if time_of_signing() > datetime.fromisoformat(enrolled.not_after):
        return f"the certificate of {enrolled.person} ended {enrolled.not_after[:10]}: renew it"
    return None
