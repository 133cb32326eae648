"""Refusing to sign, with a reason: nothing is signed, and everybody who signs later is shown it."""

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

from assayfolio.canonical import Json
from assayfolio.errors import InputError
from assayfolio.evidence.entries import TrailEntry
from assayfolio.evidence.moves import rules_of
from assayfolio.study.reasons import SHORTEST_REASON, emptiness
from assayfolio.workflow.authority import allowed, refused
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.recovery import found_trail
from assayfolio.workflow.settings_files import standing_settings
from assayfolio.workflow.signable import signable
from assayfolio.workflow.signing_case import COMMAND
from assayfolio.workflow.signing_summary import SIGN_REFUSED
from assayfolio.workflow.workspace import Workspace

MOST_CHARACTERS = 1000


@dataclass(frozen=True, slots=True)
class RefusedSignature:
    """A refusal as it was entered."""

    subject: str
    role: str
    person: str
    reason: str
    entry: TrailEntry

    def lines(self) -> list[str]:
        """For people."""
        return [f"{self.subject}: {self.person} refuses to sign as {self.role}, entry {self.entry.seq}"]

    def document(self) -> Mapping[str, Json]:
        """For programs."""
        return {
            "subject": self.subject,
            "role": self.role,
            "person": self.person,
            "reason": self.reason,
            "seq": self.entry.seq,
            "refused": True,
        }


def refuse_to_sign(workspace: Workspace, named: Path, role: str, reason: str) -> RefusedSignature:
    """Enter that the person behind this account refuses to sign the folio `named` in `role`.

    Raises NotAllowedError, after an entry of the attempt, where he could not have signed it either, but for
    the turn and the review that come before; InputError for a reason that says nothing.
    """
    reason = " ".join(reason.split())
    empty = emptiness(reason)
    if empty is not None or len(reason) > MOST_CHARACTERS:
        raise InputError(
            f"The reason is {empty or 'too long'}; say why you do not sign, in {SHORTEST_REASON} to "
            f"{MOST_CHARACTERS} characters."
        )
    target = signable(workspace, named)
    laboratory = standing_settings(workspace).laboratory
    with trail_book(workspace, laboratory.wait_seconds) as trail:
        found_trail(workspace, trail)
        actor = allowed(workspace, trail, COMMAND)
        why = None
        if actor.in_use and role not in actor.roles:
            why = f"{actor.person} has not the role {role}"
        elif role not in {each.role for each in target.definition.sign_off}:
            why = f"nobody is asked to sign {target.subject} as {role}"
        if why is not None:
            raise refused(trail, COMMAND, why, role, {"subject": target.subject, "role": role})
        person = actor.person or actor.account
        details: dict[str, Json] = {"role": role, "person": person}
        details["in_order"] = target.why_not(trail.entries, actor.account, role, rules_of(laboratory)) is None
        entry = trail.append(SIGN_REFUSED, target.subject, reason, details)
    return RefusedSignature(target.subject, role, person, reason, entry)
