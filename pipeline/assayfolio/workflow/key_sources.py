"""Where a person's key comes from at enrolment: made here, a file that he has, or a token."""

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime
from pathlib import Path

from assayfolio.canonical import sha256_hex
from assayfolio.errors import InputError
from assayfolio.evidence.files import read_regular
from assayfolio.evidence.keyring import Keyring, pem_parts, pem_text
from assayfolio.evidence.signers import KeyPlace
from assayfolio.evidence.signing.authority import certificate_request, interim_identity
from assayfolio.evidence.signing.identities import (
    KeyIdentity,
    certificate_facts,
    fitness_faults,
    identity_from_pem,
    new_key,
    open_identity,
    sealed_identity,
)
from assayfolio.evidence.signing.refusals import SigningRefusedError, WrongPassphraseError
from assayfolio.evidence.signing.token import open_token
from assayfolio.evidence.signing.trust import chain_of
from assayfolio.workflow.dialogue import Dialogue, new_passphrase
from assayfolio.workflow.signer_keys import PRIVATE, SHARED, token_place


@dataclass(frozen=True, slots=True)
class KeySource:
    """A key that is there already: in a `file`, or on a token; neither means that one is made.

    `anchor` is a file with the certificates above that of the person, where they are not in `file`.
    """

    file: Path | None = None
    token: KeyPlace | None = None
    anchor: Path | None = None

    @property
    def is_new(self) -> bool:
        """Whether a key is to be made here, to be certified by the laboratory's authority."""
        return self.file is None and self.token is None


@dataclass(frozen=True, slots=True)
class Candidate:
    """A key that is to be enrolled: where it lies, the files for it by name with their modes.

    `request` asks the laboratory's authority for a certificate, by its file's name; or `chain` is the
    certificate from elsewhere with those above it, the anchor last. `public_key` is the SHA-256 of the key's
    public half.
    """

    key: KeyPlace
    public_key: str
    files: Mapping[str, tuple[bytes, int]]
    request: str | None = None
    chain: tuple[bytes, ...] = ()


def candidate(
    who: tuple[str, str], source: KeySource, keyring: Keyring, now: datetime, dialogue: Dialogue
) -> Candidate:
    """The key that the person named by `who` (person, account) wants to sign with.

    Raises InputError where a file cannot be read or its certificate will not do; WrongPassphraseError and
    TokenUnavailableError as opening it does.
    """
    if source.is_new:
        return _made_here(who, now, dialogue)
    found = _from_file(who, source, dialogue) if source.file is not None else _from_token(source, dialogue)
    _require_fit(found, who[0], keyring, now)
    return found


def file_stem(account: str, public_key: str) -> str:
    """What the files of a signer are called: by account and key, in characters that every disk takes."""
    return f"{re.sub(r'[^A-Za-z0-9_-]', '_', account)[:40]}-{public_key[:12]}"


def _made_here(who: tuple[str, str], now: datetime, dialogue: Dialogue) -> Candidate:
    person, account = who
    passphrase = new_passphrase(dialogue, f"the key of {person}", who)
    key = new_key()
    interim = interim_identity(person, account, key, now)
    request, public = certificate_request(person, account, key), public_key_digest(interim.certificate)
    stem = file_stem(account, public)
    files = {
        f"{stem}.p12": (sealed_identity(interim, passphrase), PRIVATE),
        f"{stem}.csr": (request, SHARED),
    }
    return Candidate(KeyPlace(file=f"{stem}.p12"), public, files, request=f"{stem}.csr")


def _from_file(who: tuple[str, str], source: KeySource, dialogue: Dialogue) -> Candidate:
    assert source.file is not None, "the key lies in a file"
    content = _read(source.file)
    identity = _opened(content, dialogue)
    chain = _whole_chain((identity.certificate, *identity.chain), source)
    passphrase = new_passphrase(dialogue, f"the key of {who[0]} as it is kept here", who)
    public = public_key_digest(identity.certificate)
    stem = file_stem(who[1], public)
    files = {
        f"{stem}.p12": (sealed_identity(KeyIdentity(chain[0], chain[1:], identity.key), passphrase), PRIVATE),
        f"{stem}.pem": (pem_text("certificate", *chain), SHARED),
    }
    return Candidate(KeyPlace(file=f"{stem}.p12"), public, files, chain=chain)


def _opened(content: bytes, dialogue: Dialogue) -> KeyIdentity:
    if b"-----BEGIN " not in content:
        return open_identity(content, dialogue.secret("Passphrase of the file"))
    try:
        return identity_from_pem(content, None)
    except WrongPassphraseError:
        return identity_from_pem(content, dialogue.secret("Passphrase of the file"))


def _from_token(source: KeySource, dialogue: Dialogue) -> Candidate:
    assert source.token is not None, "the key lies on a token"
    place = token_place(source.token)
    with open_token(place, dialogue.secret(f"PIN of the token {place.token}")) as token:
        chain = _whole_chain((token.certificate,), source)
    public = public_key_digest(chain[0])
    stem = file_stem(place.label, public)
    files = {f"{stem}.pem": (pem_text("certificate", *chain), SHARED)}
    return Candidate(source.token, public, files, chain=chain)


def _whole_chain(found: Sequence[bytes], source: KeySource) -> tuple[bytes, ...]:
    """The certificates from the person's up to the anchor."""
    more = pem_parts(_read(source.anchor), "certificate") if source.anchor is not None else ()
    chain = tuple(dict.fromkeys((*found, *more)))
    top = certificate_facts(chain[-1])
    if len(chain) == 1 and top.issuer != top.person:
        raise InputError(
            f"The certificate was issued by {top.issuer}; give the issuer's certificate with --anchor."
        )
    return chain


def _require_fit(found: Candidate, person: str, keyring: Keyring, now: datetime) -> None:
    from asn1crypto.x509 import Certificate

    faults = list(fitness_faults(found.chain[0], person, now))
    others = [Certificate.load(der) for der in found.chain[1:]]
    built = chain_of(Certificate.load(found.chain[0]), others, (found.chain[-1],), "signing")
    faults.extend([built.problem] if built.problem and len(found.chain) > 1 else [])
    for der in keyring.certificates.values():
        owner = certificate_facts(der).person
        if owner != person and public_key_digest(der) == found.public_key:
            faults.append(f"its key is already that of {owner}")
    if faults:
        raise SigningRefusedError(f"The certificate cannot be enrolled: {'; '.join(faults)}.")


def public_key_digest(certificate: bytes) -> str:
    """The SHA-256 of the public key (SubjectPublicKeyInfo, DER) of a certificate."""
    from cryptography import x509
    from cryptography.hazmat.primitives.serialization import Encoding, PublicFormat

    key = x509.load_der_x509_certificate(certificate).public_key()
    return sha256_hex(key.public_bytes(Encoding.DER, PublicFormat.SubjectPublicKeyInfo))


def _read(path: Path) -> bytes:
    try:
        return read_regular(path)
    except OSError as error:
        raise InputError(f"{path} cannot be read: {error.strerror}.") from error
