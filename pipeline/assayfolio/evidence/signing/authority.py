"""The laboratory's certificate authority: its certificate, those of persons, and the list of revoked ones.

A person makes key and request himself and hands in the request alone, so whoever runs the authority never
holds a person's key. Certificates follow RFC 5280, as far as readers of signed PDF files ask for.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime, timedelta
from typing import TYPE_CHECKING, Any

from assayfolio.evidence.signing.identities import KeyIdentity, certificate_facts, fingerprint, new_key
from assayfolio.evidence.signing.refusals import SigningRefusedError

if TYPE_CHECKING:
    from cryptography import x509

_YEAR = timedelta(days=365.25)


@dataclass(frozen=True, slots=True)
class Enrolment:
    """One certificate that stands for one person, by its fingerprint; `withdrawn` once it does no longer."""

    person: str
    account: str
    fingerprint: str
    withdrawn: bool = False


@dataclass(frozen=True, slots=True)
class Revocation:
    """A certificate withdrawn from `when` on; `reason` is a flag of RFC 5280 such as `keyCompromise`."""

    serial: int
    when: datetime
    reason: str


@dataclass(frozen=True, slots=True)
class RevocationList:
    """What a revocation list says, its entries sorted by serial number."""

    issuer: str
    number: int
    this_update: datetime
    next_update: datetime
    revoked: tuple[Revocation, ...]


def enrolment_clashes(new: Enrolment, enrolled: Sequence[Enrolment]) -> tuple[str, ...]:
    """Why `new` cannot stand beside those `enrolled`: one certificate a person, one person a certificate."""
    clashes = []
    for old in enrolled:
        if old.fingerprint == new.fingerprint:
            clashes.append(f"this certificate is already enrolled for {old.person}")
        elif old.withdrawn:
            continue
        elif new.person == old.person:
            clashes.append(f"{old.person} already has a certificate; it has to be withdrawn first")
        elif new.account == old.account:
            clashes.append(f"the account {old.account} already stands for {old.person}")
    return tuple(clashes)


def _name(common: str, account: str | None = None) -> "x509.Name":
    from cryptography import x509
    from cryptography.x509.oid import NameOID

    attributes = [x509.NameAttribute(NameOID.COMMON_NAME, common)]
    if account is not None:
        attributes.append(x509.NameAttribute(NameOID.USER_ID, account))
    return x509.Name(attributes)


def _usage(*purposes: str) -> "x509.KeyUsage":
    """The extension that allows these uses of a key and no others."""
    from cryptography import x509

    every = (
        "digital_signature",
        "content_commitment",
        "key_encipherment",
        "data_encipherment",
        "key_agreement",
        "key_cert_sign",
        "crl_sign",
        "encipher_only",
        "decipher_only",
    )
    return x509.KeyUsage(**{use: use in purposes for use in every})


def found_authority(laboratory: str, now: datetime, years: int) -> KeyIdentity:
    """A new authority that signs its own certificate, valid from `now`. Its key is for sealing away."""
    from cryptography import x509
    from cryptography.hazmat.primitives import hashes
    from cryptography.hazmat.primitives.serialization import Encoding

    key, name = new_key(), _name(f"{laboratory}: certificate authority")
    certificate = (
        x509.CertificateBuilder()
        .subject_name(name)
        .issuer_name(name)
        .public_key(key.public_key())
        .serial_number(x509.random_serial_number())
        .not_valid_before(now)
        .not_valid_after(now + years * _YEAR)
        .add_extension(x509.BasicConstraints(ca=True, path_length=0), critical=True)
        .add_extension(_usage("key_cert_sign", "crl_sign"), critical=True)
        .add_extension(x509.SubjectKeyIdentifier.from_public_key(key.public_key()), critical=False)
        .sign(key, hashes.SHA256())
    )
    return KeyIdentity(certificate.public_bytes(Encoding.DER), (), key)


def interim_identity(person: str, account: str, key: Any, now: datetime) -> KeyIdentity:
    """`key` with a certificate that it signs itself, to be sealed away until the authority certifies it."""
    from cryptography import x509
    from cryptography.hazmat.primitives import hashes
    from cryptography.hazmat.primitives.serialization import Encoding

    name = _name(person, account)
    certificate = (
        x509.CertificateBuilder()
        .subject_name(name)
        .issuer_name(name)
        .public_key(key.public_key())
        .serial_number(x509.random_serial_number())
        .not_valid_before(now)
        .not_valid_after(now + _YEAR)
        .add_extension(x509.BasicConstraints(ca=False, path_length=None), critical=True)
        .sign(key, hashes.SHA256())
    )
    return KeyIdentity(certificate.public_bytes(Encoding.DER), (), key)


def certificate_request(person: str, account: str, key: Any) -> bytes:
    """What a person hands in to be certified (PKCS#10, DER); it proves that he holds `key`."""
    from cryptography import x509
    from cryptography.hazmat.primitives import hashes
    from cryptography.hazmat.primitives.serialization import Encoding

    builder = x509.CertificateSigningRequestBuilder().subject_name(_name(person, account))
    return builder.sign(key, hashes.SHA256()).public_bytes(Encoding.DER)


def certify(
    authority: KeyIdentity, request: bytes, enrolment: tuple[str, str], span: tuple[datetime, int]
) -> bytes:
    """A certificate (DER) for a request. `enrolment` is person and account, `span` start and days.

    Raises SigningRefusedError for a request that is not signed with its key, names somebody else, or for a
    certificate that would outlive the authority's.
    """
    from cryptography import x509
    from cryptography.exceptions import UnsupportedAlgorithm
    from cryptography.hazmat.primitives import hashes
    from cryptography.hazmat.primitives.serialization import Encoding

    try:
        asked = x509.load_der_x509_csr(request)
        genuine = asked.is_signature_valid
    except (ValueError, UnsupportedAlgorithm) as error:
        raise SigningRefusedError(f"this is no request for a certificate: {error}") from error
    if not genuine:
        raise SigningRefusedError("the request is not signed with the key that it names")
    if asked.subject != _name(*enrolment):
        raise SigningRefusedError(f"the request does not name {enrolment[0]} with account {enrolment[1]}")
    issuer = x509.load_der_x509_certificate(authority.certificate)
    start, end = span[0], span[0] + timedelta(days=span[1])
    if not (issuer.not_valid_before_utc <= start and end <= issuer.not_valid_after_utc):
        raise SigningRefusedError("the certificate would be valid outside the authority's own time")
    certificate = (
        x509.CertificateBuilder()
        .subject_name(asked.subject)
        .issuer_name(issuer.subject)
        .public_key(asked.public_key())
        .serial_number(x509.random_serial_number())
        .not_valid_before(start)
        .not_valid_after(end)
        .add_extension(x509.BasicConstraints(ca=False, path_length=None), critical=True)
        .add_extension(_usage("digital_signature", "content_commitment"), critical=True)
        .add_extension(x509.SubjectKeyIdentifier.from_public_key(asked.public_key()), critical=False)
        .add_extension(_authority_key(issuer), critical=False)
        .sign(authority.key, hashes.SHA256())
    )
    return certificate.public_bytes(Encoding.DER)


def _authority_key(issuer: "x509.Certificate") -> "x509.AuthorityKeyIdentifier":
    from cryptography import x509

    own = issuer.extensions.get_extension_for_class(x509.SubjectKeyIdentifier).value
    return x509.AuthorityKeyIdentifier.from_issuer_subject_key_identifier(own)


def renewal_faults(old: bytes, new: bytes) -> tuple[str, ...]:
    """Why certificate `new` does not renew `old`, in words: same person, later end, another key."""
    from cryptography import x509

    before, after = x509.load_der_x509_certificate(old), x509.load_der_x509_certificate(new)
    faults = []
    if certificate_facts(old).person != certificate_facts(new).person:
        faults.append("it names another person")
    if after.not_valid_after_utc <= before.not_valid_after_utc:
        faults.append("it does not last longer")
    if after.public_key() == before.public_key():
        faults.append("it keeps the old key")
    return tuple(faults)


def revocation_list(
    authority: KeyIdentity, number: int, revoked: Sequence[Revocation], now: datetime, days: int
) -> bytes:
    """The revocation list (DER) with this number, issued `now`, the next due within `days`."""
    from cryptography import x509
    from cryptography.hazmat.primitives import hashes
    from cryptography.hazmat.primitives.serialization import Encoding

    issuer = x509.load_der_x509_certificate(authority.certificate)
    builder = (
        x509.CertificateRevocationListBuilder()
        .issuer_name(issuer.subject)
        .last_update(now)
        .next_update(now + timedelta(days=days))
        .add_extension(x509.CRLNumber(number), critical=False)
        .add_extension(_authority_key(issuer), critical=False)
    )
    for each in sorted(revoked, key=lambda entry: entry.serial):
        entry = x509.RevokedCertificateBuilder().serial_number(each.serial).revocation_date(each.when)
        flag = x509.CRLReason(x509.ReasonFlags(each.reason))
        builder = builder.add_revoked_certificate(entry.add_extension(flag, critical=False).build())
    return builder.sign(authority.key, hashes.SHA256()).public_bytes(Encoding.DER)


def read_revocation_list(der: bytes, issuer_certificate: bytes) -> RevocationList:
    """What the list says. Raises SigningRefusedError unless it is one, numbered, and signed by the issuer."""
    from cryptography import x509

    issuer = x509.load_der_x509_certificate(issuer_certificate)
    try:
        found = x509.load_der_x509_crl(der)
        number = found.extensions.get_extension_for_class(x509.CRLNumber).value.crl_number
        key: Any = issuer.public_key()
        genuine = found.issuer == issuer.subject and found.is_signature_valid(key)
    except (ValueError, TypeError, x509.ExtensionNotFound) as error:
        raise SigningRefusedError(f"this is no numbered revocation list: {error}") from error
    if not genuine or found.next_update_utc is None:
        raise SigningRefusedError("the revocation list is not one of this authority")
    revoked = [Revocation(r.serial_number, r.revocation_date_utc, _reason(r)) for r in found]
    return RevocationList(
        issuer=certificate_facts(issuer_certificate).person,
        number=number,
        this_update=found.last_update_utc,
        next_update=found.next_update_utc,
        revoked=tuple(sorted(revoked, key=lambda entry: entry.serial)),
    )


def _reason(entry: "x509.RevokedCertificate") -> str:
    from cryptography import x509

    try:
        return str(entry.extensions.get_extension_for_class(x509.CRLReason).value.reason.value)
    except x509.ExtensionNotFound:
        return "unspecified"


def succession_faults(older: RevocationList, newer: RevocationList) -> tuple[str, ...]:
    """Why `newer` does not rightly follow `older`: its number goes up by one and it forgets nobody."""
    faults = []
    if newer.issuer != older.issuer:
        faults.append("it is another authority's")
    if newer.number != older.number + 1:
        faults.append(f"number {newer.number} follows number {older.number}")
    if newer.this_update < older.this_update:
        faults.append("it is dated before the list that it follows")
    kept = {(entry.serial, entry.when) for entry in newer.revoked}
    faults.extend(
        f"certificate {entry.serial:x}, revoked {entry.when:%Y-%m-%d}, is missing or has another date"
        for entry in older.revoked
        if (entry.serial, entry.when) not in kept
    )
    return tuple(faults)


def certified_identity(authority: KeyIdentity, certificate: bytes, key: Any) -> KeyIdentity:
    """Key and certificate of a person joined, with the authority's certificate above them.

    Raises SigningRefusedError where they do not belong together.
    """
    from cryptography import x509

    if x509.load_der_x509_certificate(certificate).public_key() != key.public_key():
        raise SigningRefusedError(f"the certificate {fingerprint(certificate)} is for another key")
    return KeyIdentity(certificate, (authority.certificate,), key)
