"""Proposing that a person signs with a certificate: he himself does, and two persons make it so.

The person chooses his passphrase himself and nobody else ever has it; what he proposes is a request for a
certificate, or a certificate from elsewhere. It counts when another person, an administrator or quality
assurance, has confirmed it (`workflow.signer_confirmation`).
"""

from collections.abc import Mapping
from dataclasses import dataclass

from assayfolio.canonical import Json, sha256_hex
from assayfolio.errors import InputError
from assayfolio.evidence.entries import TrailEntry
from assayfolio.evidence.keyring import read_keyring
from assayfolio.evidence.signers import (
    SIGNER_PROPOSED,
    Deed,
    Enrolled,
    Proposal,
    Signers,
    read_proposal,
    signer_subject,
    signers_of,
)
from assayfolio.evidence.signing.authority import Enrolment, enrolment_clashes
from assayfolio.evidence.signing.identities import fingerprint
from assayfolio.evidence.signing.refusals import SigningRefusedError
from assayfolio.evidence.trail import TrailWriter
from assayfolio.workflow.actors import Actor
from assayfolio.workflow.authority import allowed
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.dialogue import Dialogue
from assayfolio.workflow.key_sources import Candidate, KeySource, candidate
from assayfolio.workflow.recovery import found_trail
from assayfolio.workflow.settings_files import standing_settings
from assayfolio.workflow.signer_keys import moment_now, write_signer_file
from assayfolio.workflow.workspace import Workspace

MOST_CHARACTERS = 200


@dataclass(frozen=True, slots=True)
class SignerOutcome:
    """What was entered about a signer; `state` is what he is now, in a word or two."""

    deed: Deed
    state: str
    person: str
    account: str
    certificate: str | None
    entry: TrailEntry
    more: tuple[str, ...] = ()

    def lines(self) -> list[str]:
        """For people."""
        found = [f"{self.person} ({self.account}): {self.state}, entry {self.entry.seq}"]
        if self.certificate is not None:
            found.append(f"  certificate  {self.certificate}")
        return [*found, *(f"  {text}" for text in self.more)]

    def document(self) -> Mapping[str, Json]:
        """For programs."""
        return {
            "deed": self.deed,
            "state": self.state,
            "person": self.person,
            "account": self.account,
            "certificate": self.certificate,
            "seq": self.entry.seq,
            "more": list(self.more),
        }


@dataclass(frozen=True, slots=True)
class Asked:
    """What the person says of himself: his name where roles are not in use, how his identity was checked."""

    person: str | None = None
    identity_check: str | None = None


def propose_enrolment(
    workspace: Workspace, deed: Deed, asked: Asked, source: KeySource, dialogue: Dialogue
) -> SignerOutcome:
    """Propose that the person behind this account signs with a new certificate.

    Raises NotAllowedError, after an entry of the attempt, for an account that may not; InputError where it
    has a certificate (enrol) or none (renew), where the name is missing, and as `candidate` does.
    """
    command = f"signer {deed}"
    wait = standing_settings(workspace).laboratory.wait_seconds
    with trail_book(workspace, wait) as trail:
        found_trail(workspace, trail)
        actor = allowed(workspace, trail, command)
        person = _person(actor, asked, signers_of(trail.entries))
        _require_order(deed, actor, person, signers_of(trail.entries))
    keyring = read_keyring(workspace.root)
    found = candidate((person, actor.account), source, keyring, moment_now(), dialogue)
    for name, (content, mode) in sorted(found.files.items()):
        write_signer_file(workspace, name, content, mode)
    with trail_book(workspace, wait) as trail:
        signers = signers_of(trail.entries)
        _require_order(deed, allowed(workspace, trail, command), person, signers)
        before = signers.of(actor.account)
        details = _details(deed, (person, actor.account), found, before, asked)
        entry = trail.append(SIGNER_PROPOSED, signer_subject(actor.account), None, details)
    certificate = fingerprint(found.chain[0]) if found.chain else None
    more = (
        f"key          {found.public_key}",
        f"to be confirmed by another person: assayfolio signer {deed} --confirm {actor.account}",
    )
    return SignerOutcome(deed, "proposed", person, actor.account, certificate, entry, more)


def _person(actor: Actor, asked: Asked, signers: Signers) -> str:
    """The person's name: as the list of people has it, else as he was enrolled, else as he says."""
    known = signers.last_of(actor.account)
    name = actor.person if actor.in_use else asked.person or (known.person if known is not None else None)
    if name is None:
        raise InputError("Roles are not in use here, so nobody knows your name: give it with --person.")
    if asked.person is not None and asked.person != name:
        raise InputError(f"{actor.account} is {name} by the laboratory's list of people, not {asked.person}.")
    if not name.strip() or len(name) > MOST_CHARACTERS or "\n" in name:
        raise InputError("The name is one line of text, as it is to be printed beside signatures.")
    if asked.identity_check is not None and len(asked.identity_check) > MOST_CHARACTERS:
        raise InputError(f"The reference of the identity check has more than {MOST_CHARACTERS} characters.")
    return name


def _require_order(deed: Deed, actor: Actor, person: str, signers: Signers) -> None:
    standing, waiting = signers.of(actor.account), signers.proposals.get(actor.account)
    if waiting is not None and waiting.deed == "revoke":
        raise InputError(f"The certificate of {person} is to be withdrawn; that has to be confirmed first.")
    if deed == "renew" and standing is None:
        raise InputError(f"{person} has no certificate in force that could be renewed; enrol instead.")
    if deed == "enrol" and standing is not None:
        raise InputError(
            f"{person} has a certificate until {standing.not_after[:10]}; renew it, or have it withdrawn."
        )
    require_no_clash(Enrolment(person, actor.account, ""), signers, None if deed == "enrol" else standing)


def require_no_clash(new: Enrolment, signers: Signers, replaced: Enrolled | None) -> None:
    """Raise SigningRefusedError unless it stays one certificate a person and one person a certificate."""
    known = [
        Enrolment(each.person, each.account, each.certificate, each.ended is not None or each is replaced)
        for each in signers.enrolled
    ]
    clashes = enrolment_clashes(new, known)
    if clashes:
        raise SigningRefusedError(f"This cannot be enrolled: {'; '.join(clashes)}.")


def _details(
    deed: Deed, who: tuple[str, str], found: Candidate, before: Enrolled | None, asked: Asked
) -> dict[str, Json]:
    request: Json = None
    if found.request is not None:
        request = {"file": found.request, "sha256": sha256_hex(found.files[found.request][0])}
    return {
        "deed": deed,
        "person": who[0],
        "account": who[1],
        "key": found.key.value(),
        "public_key": found.public_key,
        "request": request,
        "certificates": [fingerprint(der) for der in found.chain],
        "replaces": None if before is None else before.certificate,
        "identity_check": asked.identity_check,
        "cause": None,
    }


def open_proposal(trail: TrailWriter, account: str, deed: Deed) -> Proposal:
    """The proposal about `account` that waits to be confirmed. Raises InputError where there is none."""
    proposal = signers_of(trail.entries).proposals.get(account)
    if proposal is None or proposal.deed != deed:
        raise InputError(f"Nothing is proposed for {account} that `signer {deed} --confirm` could confirm.")
    assert read_proposal(proposal.entry) == proposal, "a proposal is what its entry says"
    return proposal
