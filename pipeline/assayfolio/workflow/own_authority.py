"""The laboratory's own certificate authority: founded once, opened with its passphrase."""

from collections.abc import Mapping
from dataclasses import dataclass
from datetime import UTC, datetime, timedelta

from assayfolio.canonical import Json, sha256_hex
from assayfolio.errors import InputError
from assayfolio.evidence.keyring import SIGNERS_FOLDER, Keyring, pem_parts, pem_text
from assayfolio.evidence.signers import AUTHORITY, AUTHORITY_FOUNDED, Signers
from assayfolio.evidence.signing.authority import Revocation, found_authority, revocation_list
from assayfolio.evidence.signing.identities import (
    KeyIdentity,
    certificate_facts,
    fingerprint,
    open_identity,
    sealed_identity,
)
from assayfolio.evidence.trail import TrailWriter
from assayfolio.study.laboratory import Laboratory
from assayfolio.workflow.dialogue import Dialogue, new_passphrase
from assayfolio.workflow.signer_keys import SHARED, moment_now, opened, read_signer_file, write_signer_file
from assayfolio.workflow.workspace import Workspace

CONFIRM = "signer --confirm"
AUTHORITY_YEARS = 20


@dataclass(frozen=True, slots=True)
class OwnAuthority:
    """The authority, opened; `founding` are the files of one that has just been founded."""

    identity: KeyIdentity
    founding: Mapping[str, bytes]

    @property
    def fingerprint(self) -> str:
        """The fingerprint of its certificate."""
        return fingerprint(self.identity.certificate)


def open_authority(
    workspace: Workspace, signers: Signers, keyring: Keyring, laboratory: Laboratory, dialogue: Dialogue
) -> OwnAuthority:
    """The laboratory's authority, opened with its passphrase; founded where there is none."""
    if signers.authority is None:
        dialogue.tell("The laboratory's certificate authority is founded now; its key gets a passphrase.")
        passphrase = new_passphrase(dialogue, "the certificate authority", [laboratory.name])
        identity = found_authority(laboratory.name, moment_now().replace(microsecond=0), AUTHORITY_YEARS)
        stem = f"authority-{fingerprint(identity.certificate)[:12]}"
        first = next_list(identity, 1, ())
        founding = {
            f"{stem}.p12": sealed_identity(identity, passphrase),
            f"{stem}.pem": pem_text("certificate", identity.certificate),
            "revocations-0001.crl": pem_text("revocation list", first),
        }
        return OwnAuthority(identity, founding)
    if signers.authority not in keyring.certificates:
        raise InputError(f"The authority's certificate {signers.authority} is not in {SIGNERS_FOLDER}.")
    name = f"authority-{signers.authority[:12]}.p12"
    content = read_signer_file(workspace.root / SIGNERS_FOLDER, name)
    identity = opened(
        workspace, dialogue, f"the {AUTHORITY}", CONFIRM, lambda secret: open_identity(content, secret)
    )
    if fingerprint(identity.certificate) != signers.authority:
        raise InputError(f"{SIGNERS_FOLDER}/{name} is not the authority's key: the file was replaced.")
    return OwnAuthority(identity, {})


def next_list(authority: KeyIdentity, number: int, revoked: tuple[Revocation, ...]) -> bytes:
    """A revocation list that is due as late as the authority lives: the trail says which is the newest."""
    now = moment_now().replace(microsecond=0)
    left = certificate_facts(authority.certificate).not_after - now
    return revocation_list(authority, number, revoked, now, left // timedelta(days=1))


def enter_founding(workspace: Workspace, trail: TrailWriter, authority: OwnAuthority) -> None:
    """Write the files of an authority that has just been founded, and pin it by an entry."""
    for name, content in authority.founding.items():
        write_signer_file(workspace, name, content, SHARED)
    facts = certificate_facts(authority.identity.certificate)
    first = next(iter(_lists_among(authority.founding)))
    details: dict[str, Json] = {
        "certificate": facts.fingerprint,
        "not_after": stated_time(facts.not_after),
        "revocation_list": {"number": 1, "sha256": sha256_hex(first)},
    }
    trail.append(AUTHORITY_FOUNDED, AUTHORITY, None, details)


def _lists_among(files: Mapping[str, bytes]) -> list[bytes]:
    return [
        part
        for name, content in files.items()
        if name.endswith(".crl")
        for part in pem_parts(content, "revocation list")
    ]


def stated_time(moment: datetime) -> str:
    """`moment` as entries have it: UTC, whole seconds."""
    return moment.astimezone(UTC).strftime("%Y-%m-%dT%H:%M:%SZ")
