"""Check 2.10: the signers' certificates and revocation lists, as the audit trail pins them.

Every certificate that was enrolled and the authority's are there unchanged; every revocation list is there,
numbered without a gap, signed by the authority, and forgets nobody; each enrolment, renewal and withdrawal
was proposed by one person and entered by another, unless the laboratory had one person.
"""

from collections.abc import Sequence

from assayfolio.errors import StudyError
from assayfolio.evidence.entries import TrailEntry
from assayfolio.evidence.keyring import SIGNERS_FOLDER, Keyring
from assayfolio.evidence.outcomes import CheckOutcome, Tally
from assayfolio.evidence.settings import EnteredSettings, entered_settings
from assayfolio.evidence.signers import DEEDS, Signers, read_proposal
from assayfolio.evidence.signing.authority import RevocationList, read_revocation_list, succession_faults
from assayfolio.evidence.signing.identities import certificate_facts
from assayfolio.evidence.signing.refusals import SigningRefusedError
from assayfolio.study.laboratory import Laboratory, People
from assayfolio.study.settings_document import settings_of

NUMBER, TITLE = "2.10", "signers' certificates and revocation lists as entered"


class SettingsOverTime:
    """The settings that were in force at any entry of a trail."""

    def __init__(self, entries: Sequence[TrailEntry]) -> None:
        found = (entered_settings(entry) for entry in entries if entry.action == "settings")
        self.all: tuple[EnteredSettings, ...] = tuple(each for each in found if each is not None)

    def at(self, seq: int) -> tuple[Laboratory, People | None] | None:
        """What was in force when entry `seq` was made; None where nothing was, or it cannot be read."""
        before = [each for each in self.all if each.entry.seq < seq]
        return _read(before[-1]) if before else None

    def ever(self) -> tuple[Laboratory, ...]:
        """Every laboratory's settings that were ever in force."""
        return tuple(read[0] for each in self.all if (read := _read(each)) is not None)


def _read(settings: EnteredSettings) -> tuple[Laboratory, People | None] | None:
    try:
        return settings_of(settings.texts)
    except StudyError:
        return None


def check_signers(
    entries: Sequence[TrailEntry], signers: Signers, keyring: Keyring, settings: SettingsOverTime
) -> CheckOutcome:
    """Check 2.10, for a trail that knows signers."""
    tally = Tally(unchecked=list(keyring.troubles))
    for each in signers.enrolled:
        for fingerprint, what in (
            (each.certificate, each.person),
            (each.anchor, f"the anchor of {each.person}"),
        ):
            if fingerprint not in keyring.certificates:
                tally.failed.append(
                    f"missing: the certificate {fingerprint} of {what} (entry {each.seq}) is not in "
                    f"{SIGNERS_FOLDER}, or was changed"
                )
    _check_lists(signers, keyring, tally)
    _check_two_persons(entries, settings, tally)
    standing = sum(each.ended is None for each in signers.enrolled)
    tally.remarks.append(f"{standing} in force of {len(signers.enrolled)} that were enrolled")
    return tally.outcome(NUMBER, TITLE, "signers")


def _check_lists(signers: Signers, keyring: Keyring, tally: Tally) -> None:
    authority = keyring.certificates.get(signers.authority or "")
    if signers.authority is not None and authority is None:
        tally.failed.append(f"missing: the authority's certificate {signers.authority}, or it was changed")
    before: RevocationList | None = None
    for place, pinned in enumerate(signers.lists, start=1):
        der = keyring.lists.get(pinned.sha256)
        if pinned.number != place:
            tally.failed.append(
                f"entry {pinned.seq} pins revocation list {pinned.number} where {place} is next"
            )
        if der is None:
            tally.failed.append(
                f"missing: revocation list {pinned.number} (entry {pinned.seq}) is not in {SIGNERS_FOLDER}, "
                "or was changed"
            )
            before = None
            continue
        if authority is None:
            continue
        try:
            read = read_revocation_list(der, authority)
        except SigningRefusedError as error:
            tally.failed.append(f"revocation list {pinned.number}: {error}")
            before = None
            continue
        if before is not None:
            tally.failed.extend(
                f"revocation list {read.number}: {why}" for why in succession_faults(before, read)
            )
        before = read
    if before is not None:
        _check_revoked(signers, keyring, before, tally)


def _check_revoked(signers: Signers, keyring: Keyring, newest: RevocationList, tally: Tally) -> None:
    listed = {each.serial for each in newest.revoked}
    for each in signers.enrolled:
        der = keyring.certificates.get(each.certificate)
        if each.revoked is None or each.anchor != signers.authority or der is None:
            continue
        if certificate_facts(der).serial not in listed:
            tally.failed.append(
                f"entry {each.revoked} withdraws the certificate of {each.person}; revocation list "
                f"{newest.number} does not name it"
            )


def _check_two_persons(entries: Sequence[TrailEntry], settings: SettingsOverTime, tally: Tally) -> None:
    by_seq = {entry.seq: entry for entry in entries if read_proposal(entry) is not None}
    for entry in entries:
        if entry.action not in DEEDS:
            continue
        stated = entry.details.get("proposed")
        seq = stated.get("seq") if isinstance(stated, dict) else None
        known = by_seq.get(seq) if isinstance(seq, int) else None
        proposal = None if known is None else read_proposal(known)
        in_force = settings.at(entry.seq)
        one_person = in_force is not None and in_force[0].one_person
        if proposal is None or proposal.entry.seq > entry.seq:
            tally.failed.append(f"entry {entry.seq} ({entry.action}) follows no proposal")
        elif (proposal.account, proposal.deed) != (entry.details.get("account"), DEEDS[entry.action]):
            tally.failed.append(f"entry {entry.seq} is not what entry {proposal.entry.seq} proposes")
        elif proposal.entry.actor == entry.actor and not one_person:
            tally.failed.append(
                f"entry {entry.seq} ({entry.action}) was made by {entry.actor} alone; it needs two persons"
            )
