"""Proposing that a certificate is withdrawn: it signs nothing from the proposal on.

The person himself may, at once and without his passphrase; for another one an administrator or quality
assurance may. The revocation list is made when a second person confirms.
"""

from collections.abc import Mapping

from assayfolio.canonical import Json
from assayfolio.errors import InputError
from assayfolio.evidence.signers import SIGNER_PROPOSED, signer_subject, signers_of
from assayfolio.study.reasons import SHORTEST_REASON, emptiness
from assayfolio.workflow import surroundings
from assayfolio.workflow.authority import allowed
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.enrolment import SignerOutcome
from assayfolio.workflow.recovery import found_trail
from assayfolio.workflow.settings_files import standing_settings
from assayfolio.workflow.workspace import Workspace

CAUSES: Mapping[str, str] = {
    "key-lost": "keyCompromise",
    "left": "affiliationChanged",
    "superseded": "superseded",
    "no-longer-signs": "cessationOfOperation",
}
"""What may be given as the cause, and the flag of RFC 5280 that goes into the revocation list."""


def propose_revocation(workspace: Workspace, account: str, cause: str, reason: str) -> SignerOutcome:
    """Propose that the certificate of `account` is withdrawn.

    Raises NotAllowedError, after an entry of the attempt, for an account that may not; InputError for a
    reason that says nothing, and where `account` has no certificate in force.
    """
    reason = reason.strip()
    empty = emptiness(reason)
    if empty is not None or "\n" in reason:
        raise InputError(
            f"The reason is {empty or 'more than a line'}; say what happened, in {SHORTEST_REASON} "
            "characters or more."
        )
    with trail_book(workspace, standing_settings(workspace).laboratory.wait_seconds) as trail:
        found_trail(workspace, trail)
        if surroundings.account_name() != account:
            allowed(workspace, trail, "signer revoke")
        standing = signers_of(trail.entries).of(account)
        if standing is None:
            raise InputError(f"{account} has no certificate in force that could be withdrawn.")
        details: dict[str, Json] = {
            "deed": "revoke",
            "person": standing.person,
            "account": account,
            "key": standing.key.value(),
            "public_key": None,
            "request": None,
            "certificates": [],
            "replaces": standing.certificate,
            "identity_check": None,
            "cause": CAUSES[cause],
        }
        entry = trail.append(SIGNER_PROPOSED, signer_subject(account), reason, details)
    more = (
        "it signs nothing from now on",
        f"to be confirmed by another person: assayfolio signer revoke {account} --confirm",
    )
    return SignerOutcome("revoke", "suspended", standing.person, account, standing.certificate, entry, more)
