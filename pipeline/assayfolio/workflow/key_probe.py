"""Testing a person's key: it signs a probe, the enrolled certificate confirms it, and that is entered."""

import os
from contextlib import ExitStack
from datetime import UTC, datetime
from typing import Any

from assayfolio.canonical import Json
from assayfolio.errors import InputError, MachineError
from assayfolio.evidence.keyring import SIGNERS_FOLDER, read_keyring
from assayfolio.evidence.signers import SIGNER_TESTED, signer_subject, signers_of
from assayfolio.evidence.signing.identities import SigningIdentity
from assayfolio.workflow.authority import allowed, refused
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.dialogue import Dialogue
from assayfolio.workflow.enrolment import SignerOutcome
from assayfolio.workflow.recovery import found_trail
from assayfolio.workflow.settings_files import standing_settings
from assayfolio.workflow.signer_keys import opened, person_identity, why_locked
from assayfolio.workflow.workspace import Workspace

COMMAND = "signer test"


def check_key(workspace: Workspace, dialogue: Dialogue) -> SignerOutcome:
    """Sign a probe with the key of the person behind this account, and verify it.

    Raises InputError where he has no certificate in force, SigningLockedError after three wrong passphrases,
    MachineError where the signature is not one of the enrolled certificate.
    """
    laboratory = standing_settings(workspace).laboratory
    with trail_book(workspace, laboratory.wait_seconds) as trail:
        found_trail(workspace, trail)
        actor = allowed(workspace, trail, COMMAND)
        why = why_locked(trail.entries, actor.account)
        if why is not None:
            raise refused(trail, COMMAND, why, "an account that is not locked")
        enrolled = signers_of(trail.entries).of(actor.account)
    certificates = read_keyring(workspace.root).certificates
    if enrolled is None or enrolled.certificate not in certificates:
        raise InputError(f"No certificate that could be tested is in force for {actor.account}.")
    certificate = certificates[enrolled.certificate]
    with ExitStack() as held:
        place, chain = workspace.root / SIGNERS_FOLDER, (certificate,)
        identity = opened(
            workspace,
            dialogue,
            enrolled.person,
            COMMAND,
            lambda secret: person_identity(place, enrolled, chain, held, secret),
        )
        _require_own(identity, certificate)
    details: dict[str, Json] = {
        "person": enrolled.person,
        "account": enrolled.account,
        "certificate": enrolled.certificate,
        "outcome": "passed",
    }
    with trail_book(workspace, laboratory.wait_seconds) as trail:
        entry = trail.append(SIGNER_TESTED, signer_subject(enrolled.account), None, details)
    left = (datetime.fromisoformat(enrolled.not_after) - datetime.now(UTC)).days
    more = (f"the key signed a probe, and the certificate confirms it; it lasts {left} more days",)
    return SignerOutcome(
        "enrol", "key tested", enrolled.person, enrolled.account, enrolled.certificate, entry, more
    )


def _require_own(identity: SigningIdentity, certificate: bytes) -> None:
    """Raise MachineError unless `identity` makes signatures that `certificate` confirms."""
    import asyncio

    from pyhanko.sign.validation.generic_cms import validate_sig_integrity

    probe = os.urandom(32)
    cms: Any = asyncio.run(identity.signer().async_sign(probe, digest_algorithm="sha256", use_pades=True))
    signed = cms["content"]
    from asn1crypto.x509 import Certificate

    own = Certificate.load(certificate)
    intact, valid = validate_sig_integrity(signed["signer_infos"][0], own, "data", probe)
    if not (intact and valid):
        raise MachineError("The key made a signature that the enrolled certificate does not confirm.")
