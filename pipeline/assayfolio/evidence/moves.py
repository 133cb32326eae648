"""Which command is in order in which state of a study and its runs: one function, which says why not.

Who may give a command is another question (`workflow.authority`); here it is what has to come before what.
"""

from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Literal

from assayfolio.evidence.states import APPROVER, RunStanding, Signature, StudyStanding
from assayfolio.study.laboratory import Laboratory, Separation

ROLES_IN_ORDER = ("author", "reviewer", APPROVER)
MoveKind = Literal["preregister", "amend", "run", "replace", "void", "sign"]


@dataclass(frozen=True, slots=True)
class Move:
    """What an account sets out to do; `role` is the one it is to sign in."""

    kind: MoveKind
    account: str
    role: str | None = None


@dataclass(frozen=True, slots=True)
class Rules:
    """What the laboratory wants before what."""

    pre_registration: bool
    approved_protocol: bool
    review_before_approval: bool
    separation: Separation
    one_person: bool


def rules_of(laboratory: Laboratory) -> Rules:
    """The rules that the laboratory's settings amount to."""
    approved = "approved-protocol" in laboratory.require
    return Rules(
        pre_registration=approved or "pre-registration" in laboratory.require,
        approved_protocol=approved,
        review_before_approval=laboratory.review_before_approval,
        separation=laboratory.separation,
        one_person=laboratory.one_person,
    )


def why_not(move: Move, study: StudyStanding, run: RunStanding | None, rules: Rules) -> str | None:
    """Why `move` is not in order; None where it is. `run` is the one to be replaced, voided or signed."""
    return _REASONS[move.kind](move, study, run, rules)


def _preregister(_move: Move, study: StudyStanding, _run: RunStanding | None, _rules: Rules) -> str | None:
    if study.protocol is None:
        return None
    return f"the plan of {study.study} is registered already as {study.protocol}; a change is an amendment"


def _amend(_move: Move, study: StudyStanding, _run: RunStanding | None, _rules: Rules) -> str | None:
    return None if study.protocol else f"no plan of {study.study} is registered that could be amended"


def _start(_move: Move, study: StudyStanding, _run: RunStanding | None, rules: Rules) -> str | None:
    if rules.pre_registration and study.protocol is None:
        return f"the plan of {study.study} is not registered, which the laboratory requires before a run"
    if rules.approved_protocol and not study.protocol_approved:
        return f"{study.study}/{study.protocol} is not approved, which the laboratory requires before a run"
    return None


def _replace(move: Move, study: StudyStanding, run: RunStanding | None, rules: Rules) -> str | None:
    if run is None:
        return f"{study.study} has no such run to be replaced"
    if not run.ended:
        return f"{run.subject} has not ended"
    if run.superseded_by is not None:
        return f"{run.subject} is superseded by {run.superseded_by} already; that one can be replaced"
    return _start(move, study, run, rules)


def _void(_move: Move, study: StudyStanding, run: RunStanding | None, _rules: Rules) -> str | None:
    if run is None:
        return f"{study.study} has no such run"
    if run.voided is not None:
        return f"{run.subject} is void already, by entry {run.voided.seq}"
    if not run.completed:
        state = "failed" if run.ended else "at work"
        return f"{run.subject} is {state}: it has no result that could be void"
    return None


def _sign(move: Move, study: StudyStanding, run: RunStanding | None, rules: Rules) -> str | None:
    if run is None or not run.completed:
        return "only a completed run is signed"
    if run.state not in ("draft", "in review"):
        return f"{run.subject} is {run.state}"
    if not run.data_locked:
        return f"the raw data of {run.subject} were not entered before it"
    if rules.approved_protocol and not study.protocol_approved:
        return f"no approved protocol of {study.study}, which the laboratory requires"
    if run.asked and move.role not in run.asked:
        return f"nobody is asked to sign {run.subject} as {move.role}"
    one = (run.subject, run.asked, run.signatures)
    reason = signed_already(move, *one) or _not_by(move, run, rules) or out_of_turn(move, *one)
    return reason or (_not_reviewed(run, rules) if move.role == APPROVER else None)


def _not_by(move: Move, run: RunStanding, rules: Rules) -> str | None:
    """Why it cannot be this account: the acts that need two persons."""
    if rules.one_person:
        return None
    authors = {signature.account for signature in run.signatures if signature.role == "author"}
    if move.role == "reviewer" and rules.separation.reviewer_is_not_runner and move.account == run.runner:
        return f"{move.account} ran {run.subject}; the reviewer has to be another person"
    if move.role == APPROVER and rules.separation.approver_is_not_author and move.account in authors:
        return f"{move.account} signed {run.subject} as author; the approver has to be another person"
    return None


def signed_already(
    move: Move, subject: str, asked: Sequence[str], signatures: Iterable[Signature]
) -> str | None:
    """Why the role has nothing left to sign, or this account has signed in it."""
    of_role = [signature for signature in signatures if signature.role == move.role]
    if len(of_role) >= max(1, list(asked).count(move.role or "")):
        return f"{subject} is signed as {move.role} already"
    if move.account in {signature.account for signature in of_role}:
        return (
            f"{move.account} signed {subject} as {move.role} already; the next one has to be another person"
        )
    return None


def out_of_turn(
    move: Move, subject: str, asked: Sequence[str], signatures: Iterable[Signature]
) -> str | None:
    """Why it is not the role's turn: authors sign before reviewers, reviewers before approvers."""
    if move.role not in ROLES_IN_ORDER:
        return None
    before = ROLES_IN_ORDER[: ROLES_IN_ORDER.index(move.role)]
    signed = [signature.role for signature in signatures]
    missing = [role for role in before if signed.count(role) < list(asked).count(role)]
    return f"{subject} is not signed yet as {' and '.join(missing)}" if missing else None


def _not_reviewed(run: RunStanding, rules: Rules) -> str | None:
    """Why it cannot be approved yet: the review of the trail comes before."""
    others = [account for account in run.reviewed_by if rules.one_person or account != run.runner]
    if rules.review_before_approval and not others:
        return f"the audit trail of {run.subject} was not reviewed yet by somebody who did not run it"
    return None


_Reason = Callable[[Move, StudyStanding, RunStanding | None, Rules], str | None]
_REASONS: Mapping[MoveKind, _Reason] = {
    "preregister": _preregister,
    "amend": _amend,
    "run": _start,
    "replace": _replace,
    "void": _void,
    "sign": _sign,
}
