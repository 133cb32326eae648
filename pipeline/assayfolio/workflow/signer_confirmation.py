"""Confirming what was proposed about a signer: the second person, who holds the authority's passphrase.

The laboratory's certificate authority is founded by the first confirmation that needs it. Its key certifies
and withdraws, and is believed in nothing that the audit trail does not pin.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from datetime import datetime, timedelta

from assayfolio.canonical import Json, sha256_hex
from assayfolio.errors import InputError
from assayfolio.evidence.keyring import SIGNERS_FOLDER, Keyring, pem_text, read_keyring
from assayfolio.evidence.signers import (
    SIGNER_ENROLLED,
    SIGNER_RENEWED,
    SIGNER_REVOKED,
    Deed,
    Enrolled,
    Proposal,
    Signers,
    signer_subject,
    signers_of,
)
from assayfolio.evidence.signing.authority import (
    Enrolment,
    Revocation,
    certify,
    read_revocation_list,
    renewal_faults,
    succession_faults,
)
from assayfolio.evidence.signing.identities import (
    certificate_facts,
    fingerprint,
)
from assayfolio.evidence.signing.refusals import SigningRefusedError
from assayfolio.evidence.stamps import person_of
from assayfolio.evidence.trail import TrailEntry, TrailWriter
from assayfolio.study.laboratory import Laboratory
from assayfolio.workflow.authority import allowed, refused
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.dialogue import Dialogue
from assayfolio.workflow.enrolment import SignerOutcome, open_proposal, require_no_clash
from assayfolio.workflow.key_sources import file_stem, public_key_digest
from assayfolio.workflow.own_authority import (
    CONFIRM,
    OwnAuthority,
    enter_founding,
    next_list,
    open_authority,
    stated_time,
)
from assayfolio.workflow.recovery import found_trail
from assayfolio.workflow.settings_files import standing_settings
from assayfolio.workflow.signer_keys import (
    SHARED,
    moment_now,
    read_signer_file,
    why_locked,
    write_signer_file,
)
from assayfolio.workflow.workspace import Workspace

PERSON_DAYS = 730
Files = dict[str, bytes]


@dataclass(frozen=True, slots=True)
class _Act:
    """What is to be entered: reason and details, and the files that have to be there before."""

    reason: str | None
    details: dict[str, Json]
    files: Mapping[str, bytes]
    certificate: str


def confirm_proposal(workspace: Workspace, account: str, deed: Deed, dialogue: Dialogue) -> SignerOutcome:
    """Make what was proposed for `account` so.

    Raises NotAllowedError, after an entry of the attempt, for the person who proposed it and for one who may
    not; InputError where nothing is proposed, or files are not those proposed; SigningLockedError after three
    wrong passphrases of the authority.
    """
    standing = standing_settings(workspace)
    laboratory, wait = standing.laboratory, standing.laboratory.wait_seconds
    with trail_book(workspace, wait) as trail:
        found_trail(workspace, trail)
        proposal = _confirmable(workspace, trail, account, deed, laboratory)
        signers = signers_of(trail.entries)
    for line in _words(proposal):
        dialogue.tell(line)
    keyring = read_keyring(workspace.root)
    authority = None
    if _needs_authority(proposal, signers):
        authority = open_authority(workspace, signers, keyring, laboratory, dialogue)
    act = _act(workspace, proposal, (signers, keyring), authority)
    with trail_book(workspace, wait) as trail:
        if _confirmable(workspace, trail, account, deed, laboratory).entry.seq != proposal.entry.seq:
            raise InputError(f"Something else was proposed for {account} meanwhile; look at it again.")
        if signers_of(trail.entries).authority != signers.authority:
            raise InputError("The certificate authority was founded by somebody else meanwhile; try again.")
        if authority is not None and authority.founding:
            enter_founding(workspace, trail, authority)
        for name, content in act.files.items():
            write_signer_file(workspace, name, content, SHARED)
        entry = _enter(trail, proposal, act)
    states = {"enrol": "enrolled", "renew": "renewed", "revoke": "withdrawn"}
    return SignerOutcome(deed, states[deed], proposal.person, account, act.certificate, entry)


def _enter(trail: TrailWriter, proposal: Proposal, act: _Act) -> TrailEntry:
    subject = signer_subject(proposal.account)
    if proposal.deed == "enrol":
        return trail.append(SIGNER_ENROLLED, subject, act.reason, act.details)
    if proposal.deed == "renew":
        return trail.append(SIGNER_RENEWED, subject, act.reason, act.details)
    return trail.append(SIGNER_REVOKED, subject, act.reason, act.details)


def _confirmable(
    workspace: Workspace, trail: TrailWriter, account: str, deed: Deed, laboratory: Laboratory
) -> Proposal:
    actor = allowed(workspace, trail, CONFIRM)
    why = why_locked(trail.entries, actor.account)
    if why is not None:
        raise refused(trail, CONFIRM, why, "an account that is not locked")
    proposal = open_proposal(trail, account, deed)
    by = proposal.entry.actor
    same = by == actor.account or account == actor.account
    person = person_of(proposal.entry)
    if not laboratory.one_person and (same or (person is not None and person == actor.person)):
        why = f"entry {proposal.entry.seq} was proposed by or for {actor.account}; it needs a second person"
        raise refused(trail, CONFIRM, why, "a second person")
    return proposal


def _words(proposal: Proposal) -> list[str]:
    lines = [
        f"{proposal.deed} {proposal.person}, account {proposal.account}",
        f"  proposed        entry {proposal.entry.seq}, {proposal.entry.time[:10]}, {proposal.entry.actor}",
    ]
    for label, key in (("key", "public_key"), ("identity check", "identity_check"), ("cause", "cause")):
        text = proposal.text(key)
        lines.extend([] if text is None else [f"  {label:<15} {text}"])
    lines.extend([] if proposal.entry.reason is None else [f"  {'reason':<15} {proposal.entry.reason}"])
    return lines


def _needs_authority(proposal: Proposal, signers: Signers) -> bool:
    if proposal.deed != "revoke":
        return proposal.entry.details.get("request") is not None
    withdrawn = _withdrawn(proposal, signers)
    return withdrawn.anchor == signers.authority


def _withdrawn(proposal: Proposal, signers: Signers) -> Enrolled:
    certificate = proposal.text("replaces")
    return next(each for each in signers.enrolled if each.certificate == certificate)


def _act(
    workspace: Workspace,
    proposal: Proposal,
    known: tuple[Signers, Keyring],
    authority: OwnAuthority | None,
) -> _Act:
    if proposal.deed == "revoke":
        return _revocation(proposal, known, authority)
    return _enrolment(workspace, proposal, known, authority)


def _enrolment(
    workspace: Workspace,
    proposal: Proposal,
    known: tuple[Signers, Keyring],
    authority: OwnAuthority | None,
) -> _Act:
    signers, keyring = known
    files: Files = {}
    if authority is not None:
        certificate = _certified(workspace, proposal, authority)
        chain: tuple[bytes, ...] = (certificate, authority.identity.certificate)
        stem = file_stem(proposal.account, public_key_digest(certificate))
        files[f"{stem}.pem"] = pem_text("certificate", *chain)
    else:
        chain = _from_elsewhere(proposal, keyring)
    facts, replaced = certificate_facts(chain[0]), signers.of(proposal.account)
    if proposal.deed == "renew":
        _require_renewal(replaced, keyring, chain[0])
    enrolment = Enrolment(proposal.person, proposal.account, facts.fingerprint)
    require_no_clash(enrolment, signers, replaced if proposal.deed == "renew" else None)
    details: dict[str, Json] = {
        "person": proposal.person,
        "account": proposal.account,
        "certificate": facts.fingerprint,
        "anchor": fingerprint(chain[-1]),
        "not_after": stated_time(facts.not_after),
        "key": proposal.entry.details["key"],
        "replaces": None if replaced is None else replaced.certificate,
        "identity_check": proposal.text("identity_check"),
        "proposed": {"seq": proposal.entry.seq, "actor": proposal.entry.actor},
    }
    return _Act(None, details, files, facts.fingerprint)


def _certified(workspace: Workspace, proposal: Proposal, authority: OwnAuthority) -> bytes:
    """The certificate that the authority gives for the request that was proposed, and no other."""
    stated = proposal.entry.details["request"]
    assert isinstance(stated, Mapping), "a request is named by file and digest"
    request = read_signer_file(workspace.root / SIGNERS_FOLDER, str(stated["file"]))
    if sha256_hex(request) != stated["sha256"]:
        raise SigningRefusedError(f"{SIGNERS_FOLDER}/{stated['file']} is not the request that was proposed.")
    start = moment_now().replace(microsecond=0)
    return certify(authority.identity, request, (proposal.person, proposal.account), (start, PERSON_DAYS))


def _from_elsewhere(proposal: Proposal, keyring: Keyring) -> tuple[bytes, ...]:
    stated = proposal.entry.details.get("certificates")
    fingerprints = [str(each) for each in stated] if isinstance(stated, list) else []
    missing = [each for each in fingerprints if each not in keyring.certificates]
    if missing or not fingerprints:
        raise InputError(
            f"The certificates that were proposed are not in {SIGNERS_FOLDER}: {', '.join(missing)}."
        )
    return tuple(keyring.certificates[each] for each in fingerprints)


def _require_renewal(replaced: Enrolled | None, keyring: Keyring, new: bytes) -> None:
    old = None if replaced is None else keyring.certificates.get(replaced.certificate)
    if old is None:
        raise InputError("The certificate that is to be renewed is not in force, or its file is gone.")
    faults = renewal_faults(old, new)
    if faults:
        raise SigningRefusedError(f"The new certificate does not renew the old one: {'; '.join(faults)}.")


def _revocation(proposal: Proposal, known: tuple[Signers, Keyring], authority: OwnAuthority | None) -> _Act:
    signers, _ = known
    withdrawn = _withdrawn(proposal, signers)
    files: Files = {}
    stated: Json = None
    if authority is not None:
        der, number = _longer_list(proposal, withdrawn, known, authority)
        files[f"revocations-{number:04d}.crl"] = pem_text("revocation list", der)
        stated = {"number": number, "sha256": sha256_hex(der)}
    details: dict[str, Json] = {
        "person": withdrawn.person,
        "account": withdrawn.account,
        "certificate": withdrawn.certificate,
        "cause": proposal.text("cause"),
        "since": proposal.entry.time,
        "proposed": {"seq": proposal.entry.seq, "actor": proposal.entry.actor},
        "revocation_list": stated,
    }
    return _Act(proposal.entry.reason, details, files, withdrawn.certificate)


def _longer_list(
    proposal: Proposal, withdrawn: Enrolled, known: tuple[Signers, Keyring], authority: OwnAuthority
) -> tuple[bytes, int]:
    """The next revocation list with its number: the newest one, and the certificate that is withdrawn."""
    signers, keyring = known
    newest = signers.lists[-1]
    der, certificate = keyring.lists.get(newest.sha256), keyring.certificates.get(withdrawn.certificate)
    if der is None or certificate is None:
        raise InputError(f"The newest revocation list or the certificate is not in {SIGNERS_FOLDER}.")
    before = read_revocation_list(der, authority.identity.certificate)
    # Lists know whole seconds; what the person signed in the second of the proposal came before it.
    when = datetime.fromisoformat(proposal.entry.time).replace(microsecond=0) + timedelta(seconds=1)
    new = Revocation(certificate_facts(certificate).serial, when, proposal.text("cause") or "unspecified")
    longer = next_list(authority.identity, before.number + 1, (*before.revoked, new))
    faults = succession_faults(before, read_revocation_list(longer, authority.identity.certificate))
    if faults:
        raise SigningRefusedError(f"The revocation list cannot be continued: {'; '.join(faults)}.")
    return longer, before.number + 1
