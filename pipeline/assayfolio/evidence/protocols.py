"""What the audit trail says of each protocol: allotted, registered or not, and which number comes next.

A protocol is a plan that was fixed: the first of a study pre-registers it, each further one amends the one
before. Its entries, with the subject "STUDY/protocol-0001", are in this order: `protocol-allotted`,
`protocol-staged`, `registered` (with the seal of its folio, entered before the folio gets its name). One
that was stopped in between has `failed`, with the reason, or `interrupted`, entered by the next writer; its
number is kept.
"""

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from assayfolio.evidence.entries import TrailEntry, is_digest

PROTOCOL_ALLOTTED = "protocol-allotted"
PROTOCOL_STAGED = "protocol-staged"
REGISTERED = "registered"
PROTOCOL_FAILED = "failed"
PROTOCOL_INTERRUPTED = "interrupted"

_SUBJECT = re.compile(r"([A-Z0-9][A-Z0-9-]{0,39})/(protocol-([0-9]{4,}))", re.ASCII)


def protocol_name(number: int) -> str:
    """The folder name of a protocol: "protocol-0001"; more digits from 10000 on."""
    return f"protocol-{number:04d}"


def protocol_subject(study: str, number: int) -> str:
    """What the entries of a protocol are about: "STUDY/protocol-0001"."""
    return f"{study}/{protocol_name(number)}"


def split_protocol(subject: str) -> tuple[str, int] | None:
    """Study and number of a protocol's subject; None for any other subject or spelling of the number."""
    if "/protocol-" not in subject:
        return None
    matched = _SUBJECT.fullmatch(subject)
    if not matched or protocol_name(int(matched[3])) != matched[2]:
        return None
    return matched[1], int(matched[3])


@dataclass(frozen=True, slots=True)
class ProtocolHistory:
    """The entries of one protocol, in order; the first is its allotment."""

    study: str
    number: int
    entries: tuple[TrailEntry, ...]

    @property
    def name(self) -> str:
        """The protocol's folder name."""
        return protocol_name(self.number)

    @property
    def subject(self) -> str:
        """What its entries are about."""
        return protocol_subject(self.study, self.number)

    @property
    def allotted(self) -> TrailEntry:
        """The entry that gave the protocol its number."""
        return self.entries[0]

    def entry(self, action: str) -> TrailEntry | None:
        """The first entry of this action, if there is one."""
        return next((entry for entry in self.entries if entry.action == action), None)

    @property
    def registered(self) -> TrailEntry | None:
        """The entry that registered the plan, with the folio's seal."""
        return self.entry(REGISTERED)

    @property
    def stopped(self) -> TrailEntry | None:
        """The entry that says why no folio came of it."""
        return self.entry(PROTOCOL_FAILED) or self.entry(PROTOCOL_INTERRUPTED)

    @property
    def to_be_staged(self) -> tuple[TrailEntry, ...]:
        """The entries that the folio's data/trail.jsonl holds: from allotment to "protocol-staged"."""
        places = [at for at, entry in enumerate(self.entries, start=1) if entry.action == PROTOCOL_STAGED]
        return self.entries[: places[0]] if places else self.entries


def protocol_histories(entries: Iterable[TrailEntry]) -> tuple[ProtocolHistory, ...]:
    """The history of every allotted protocol, sorted by study and number."""
    found: dict[tuple[str, int], list[TrailEntry]] = {}
    for entry in entries:
        protocol = split_protocol(entry.subject)
        if protocol is not None and (protocol in found or entry.action == PROTOCOL_ALLOTTED):
            found.setdefault(protocol, []).append(entry)
    return tuple(ProtocolHistory(*key, tuple(found[key])) for key in sorted(found))


def unallotted_protocols(entries: Iterable[TrailEntry]) -> tuple[TrailEntry, ...]:
    """Entries about a protocol that no earlier entry allotted."""
    known: set[str] = set()
    found = []
    for entry in entries:
        if entry.action == PROTOCOL_ALLOTTED:
            known.add(entry.subject)
        elif split_protocol(entry.subject) is not None and entry.subject not in known:
            found.append(entry)
    return tuple(found)


def next_protocol_number(entries: Iterable[TrailEntry], study: str) -> int:
    """The number that the next protocol of `study` gets: one more than the highest allotted."""
    highest = 0
    for entry in entries:
        protocol = split_protocol(entry.subject) if entry.action == PROTOCOL_ALLOTTED else None
        if protocol is not None and protocol[0] == study:
            highest = max(highest, protocol[1])
    return highest + 1


@dataclass(frozen=True, slots=True)
class RegisteredPlan:
    """A plan as the trail has it registered: when, the seal of its folio, the digest of the plan.

    `actor` is the person, or the account where the laboratory has no person for it; `definition` the digest
    of the study definition's bytes; `amends` the number of the protocol it amends, None for the first;
    `reason` why.
    """

    study: str
    number: int
    time: str
    seq: int
    actor: str
    seal: str
    plan: str
    definition: str
    amends: int | None
    reason: str | None

    @property
    def name(self) -> str:
        """The protocol's folder name."""
        return protocol_name(self.number)


def registered_plans(entries: Iterable[TrailEntry], study: str) -> tuple[RegisteredPlan, ...]:
    """The plans that were registered for `study`, in the order of their registration."""
    found = []
    for entry in entries:
        protocol = split_protocol(entry.subject)
        if entry.action == REGISTERED and protocol is not None and protocol[0] == study:
            plan = _registered(entry, *protocol)
            if plan is not None:
                found.append(plan)
    return tuple(found)


def _registered(entry: TrailEntry, study: str, number: int) -> RegisteredPlan | None:
    """None where the entry is malformed, which `verify` names."""
    seal, plan, definition = (entry.details.get(key) for key in ("seal", "plan", "study_definition"))
    amends = entry.details.get("amends")
    if not (is_digest(seal) and is_digest(plan) and is_digest(definition)):
        return None
    if amends is not None and (not isinstance(amends, int) or isinstance(amends, bool)):
        return None
    return RegisteredPlan(
        study,
        number,
        entry.time,
        entry.seq,
        _person(entry) or entry.actor,
        str(seal),
        str(plan),
        str(definition),
        amends,
        entry.reason,
    )


def _person(entry: TrailEntry) -> str | None:
    by = entry.details.get("by")
    person = by.get("person") if isinstance(by, Mapping) else None
    return person if isinstance(person, str) else None
