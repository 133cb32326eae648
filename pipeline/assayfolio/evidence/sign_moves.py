"""Whether a signature on a protocol is in order: what `moves` says of runs, for plans that were fixed."""

from collections.abc import Sequence
from dataclasses import dataclass

from assayfolio.evidence.entries import TrailEntry
from assayfolio.evidence.moves import Move, Rules, out_of_turn, signed_already
from assayfolio.evidence.protocols import REGISTERED, protocol_histories, protocol_name, registered_plans
from assayfolio.evidence.states import APPROVER, Signature, asked_roles, signatures_in
from assayfolio.evidence.states import is_approved as all_signed


@dataclass(frozen=True, slots=True)
class ProtocolStanding:
    """How a registered protocol stands: who registered it, who is asked to sign, who did."""

    subject: str
    registrant: str
    asked: tuple[str, ...]
    signatures: tuple[Signature, ...]
    amended_by: str | None

    @property
    def state(self) -> str:
        """The state in a word or two."""
        if all_signed(self.asked, self.signatures):
            return "approved"
        return "in review" if self.signatures else "draft"


def protocol_standing(entries: Sequence[TrailEntry], subject: str) -> ProtocolStanding | None:
    """How the protocol `subject` stands by the trail; None where no entry registers it."""
    history = next((one for one in protocol_histories(entries) if one.subject == subject), None)
    if history is None or history.entry(REGISTERED) is None:
        return None
    plans = registered_plans(entries, history.study)
    later = next((plan.number for plan in plans if plan.amends == history.number), None)
    return ProtocolStanding(
        subject=subject,
        registrant=history.allotted.actor,
        asked=asked_roles(history.allotted),
        signatures=signatures_in(history.entries),
        amended_by=None if later is None else protocol_name(later),
    )


def why_not_sign_protocol(move: Move, protocol: ProtocolStanding | None, rules: Rules) -> str | None:
    """Why `move` is not in order; None where it is."""
    if protocol is None:
        return "only a registered protocol is signed"
    if protocol.amended_by is not None:
        return f"{protocol.subject} is amended by {protocol.amended_by}; that one can be signed"
    if protocol.asked and move.role not in protocol.asked:
        return f"nobody is asked to sign {protocol.subject} as {move.role}"
    one = (protocol.subject, protocol.asked, protocol.signatures)
    return signed_already(move, *one) or _not_by(move, protocol, rules) or out_of_turn(move, *one)


def _not_by(move: Move, protocol: ProtocolStanding, rules: Rules) -> str | None:
    if rules.one_person:
        return None
    authors = {signature.account for signature in protocol.signatures if signature.role == "author"}
    authors.add(protocol.registrant)
    if move.role == "reviewer" and rules.separation.reviewer_is_not_runner and move.account in authors:
        return f"{move.account} wrote {protocol.subject}; the reviewer has to be another person"
    if move.role == APPROVER and rules.separation.approver_is_not_author and move.account in authors:
        return f"{move.account} wrote {protocol.subject}; the approver has to be another person"
    return None
