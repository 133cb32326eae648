"""Signing identities: a person's key and certificate, kept as PKCS#12 under a passphrase.

Keys are made here on the curve P-256 (FIPS 186-5); a certificate from elsewhere may carry RSA of 3072 bits
or more, or one of the curves P-256, P-384 and P-521. Citations from memory.
"""

import hashlib
import hmac
import re
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime
from typing import TYPE_CHECKING, Any, Protocol

from assayfolio.evidence.signing.refusals import SigningRefusedError, WrongPassphraseError

if TYPE_CHECKING:
    from cryptography import x509
    from cryptography.hazmat.primitives.asymmetric.ec import EllipticCurvePrivateKey
    from cryptography.hazmat.primitives.asymmetric.rsa import RSAPrivateKey

    PrivateKey = EllipticCurvePrivateKey | RSAPrivateKey

_ROUNDS = 300_000  # of PBKDF2 between passphrase and key
_LEAST_LENGTH, _LEAST_DIFFERENT = 12, 6
_ROWS = (
    "abcdefghijklmnopqrstuvwxyz",
    "01234567890",
    "qwertyuiop",
    "asdfghjkl",
    "zxcvbnm",
    "qwertzuiop",
    "azertyuiop",
)
_LEAST_RSA_BITS = 3072
_CURVES = ("secp256r1", "secp384r1", "secp521r1")


class SigningIdentity(Protocol):
    """What `pades.sign` signs with, wherever the key lies."""

    @property
    def certificate(self) -> bytes:
        """The signer's certificate (DER)."""

    @property
    def chain(self) -> tuple[bytes, ...]:
        """The certificates above it (DER), as far as they are to travel with the signature."""

    def signer(self) -> Any:
        """The signing library's object for it."""


@dataclass(frozen=True, slots=True)
class CertificateFacts:
    """What a certificate says. `fingerprint` is the SHA-256 of its DER form in hexadecimal."""

    der: bytes
    person: str
    issuer: str
    serial: int
    not_before: datetime
    not_after: datetime
    fingerprint: str

    def valid_at(self, time: datetime) -> bool:
        """Whether `time` lies between the ends of its validity, both included."""
        return self.not_before <= time <= self.not_after


@dataclass(frozen=True, slots=True)
class KeyIdentity:
    """An identity whose key is in memory; it shows nothing of the key."""

    certificate: bytes
    chain: tuple[bytes, ...]
    key: "PrivateKey"

    def __repr__(self) -> str:
        return f"KeyIdentity({fingerprint(self.certificate)})"

    def signer(self) -> Any:
        """The signing library's object for this key."""
        from asn1crypto.keys import PrivateKeyInfo
        from asn1crypto.x509 import Certificate
        from cryptography.hazmat.primitives.serialization import Encoding, NoEncryption, PrivateFormat
        from pyhanko.sign.signers import SimpleSigner
        from pyhanko_certvalidator.registry import SimpleCertificateStore

        make: Any = SimpleCertificateStore
        store = make()
        store.register_multiple([Certificate.load(der) for der in self.chain])
        plain = self.key.private_bytes(Encoding.DER, PrivateFormat.PKCS8, NoEncryption())
        return SimpleSigner(
            signing_cert=Certificate.load(self.certificate),
            signing_key=PrivateKeyInfo.load(plain),
            cert_registry=store,
        )


def fingerprint(certificate: bytes) -> str:
    """The SHA-256 of a certificate's DER form, in hexadecimal."""
    return hashlib.sha256(certificate).hexdigest()


def certificate_facts(der: bytes) -> CertificateFacts:
    """What the certificate says. Raises SigningRefusedError for what is none, or one without a name."""
    from cryptography import x509

    try:
        found = x509.load_der_x509_certificate(der)
        return CertificateFacts(
            der=der,
            person=_common_name(found.subject),
            issuer=_common_name(found.issuer),
            serial=found.serial_number,
            not_before=found.not_valid_before_utc,
            not_after=found.not_valid_after_utc,
            fingerprint=fingerprint(der),
        )
    except (ValueError, IndexError) as error:
        raise SigningRefusedError(f"this is no certificate that can be used: {error}") from error


def _common_name(name: "x509.Name") -> str:
    from cryptography.x509.oid import NameOID

    return str(name.get_attributes_for_oid(NameOID.COMMON_NAME)[0].value)


def certificate_pem(der: bytes) -> bytes:
    """The certificate in the text form that other programs take."""
    from cryptography import x509
    from cryptography.hazmat.primitives.serialization import Encoding

    return x509.load_der_x509_certificate(der).public_bytes(Encoding.PEM)


def new_key() -> "EllipticCurvePrivateKey":
    """A fresh private key on the curve P-256."""
    from cryptography.hazmat.primitives.asymmetric import ec

    return ec.generate_private_key(ec.SECP256R1())


def sealed_identity(identity: KeyIdentity, passphrase: str) -> bytes:
    """`identity` as a PKCS#12 file (RFC 7292) under `passphrase`: AES-256, PBKDF2 with SHA-256."""
    from cryptography import x509
    from cryptography.hazmat.primitives import hashes
    from cryptography.hazmat.primitives.serialization import PrivateFormat, pkcs12

    encryption = (
        PrivateFormat.PKCS12.encryption_builder()
        .kdf_rounds(_ROUNDS)
        .key_cert_algorithm(pkcs12.PBES.PBESv2SHA256AndAES256CBC)
        .hmac_hash(hashes.SHA256())
        .build(passphrase.encode("utf-8"))
    )
    certificate = x509.load_der_x509_certificate(identity.certificate)
    sealed = pkcs12.serialize_key_and_certificates(
        certificate_facts(identity.certificate).person.encode("utf-8"),
        identity.key,
        certificate,
        [x509.load_der_x509_certificate(der) for der in identity.chain],
        encryption,
    )
    return _with_slow_check(sealed, passphrase)


def _with_slow_check(content: bytes, passphrase: str) -> bytes:
    """The same PKCS#12 file with as many rounds before its check value as before its key.

    Libraries write 2,048 there, so that guessing by the check value would be a hundred times quicker than by
    the key. The derivation is that of RFC 7292, appendix B.2, for a key no longer than the digest.
    """
    from asn1crypto.pkcs12 import Pfx

    file = Pfx.load(content)
    check = file["mac_data"]
    salt = check["mac_salt"].native
    secret = passphrase.encode("utf-16-be") + b"\0\0"
    key = hashlib.sha256(b"\3" * 64 + _filled(salt) + _filled(secret)).digest()
    for _ in range(_ROUNDS - 1):
        key = hashlib.sha256(key).digest()
    content_checked = file["auth_safe"]["content"].contents
    check["mac"]["digest"] = hmac.digest(key, content_checked, "sha256")
    check["iterations"] = _ROUNDS
    slow: bytes = file.dump(force=True)
    return slow


def _filled(text: bytes) -> bytes:
    """`text` repeated until it fills whole blocks of 64 bytes."""
    length = -(-len(text) // 64) * 64
    return (text * length)[:length] if text else b""


def open_identity(content: bytes, passphrase: str) -> KeyIdentity:
    """The identity in a PKCS#12 file, of this program or another.

    Raises WrongPassphraseError where the passphrase does not open it (a damaged file looks the same), and
    SigningRefusedError where there is no key with its certificate in it.
    """
    from cryptography.hazmat.primitives.serialization import Encoding, pkcs12

    try:
        found = pkcs12.load_pkcs12(content, passphrase.encode("utf-8"))
    except ValueError as error:
        raise WrongPassphraseError("the passphrase does not open the key, or the file is damaged") from error
    if found.key is None or found.cert is None:
        raise SigningRefusedError("the file holds no private key together with its certificate")
    chain = tuple(each.certificate.public_bytes(Encoding.DER) for each in found.additional_certs)
    return _identity(found.cert.certificate.public_bytes(Encoding.DER), chain, found.key)


def identity_from_pem(content: bytes, passphrase: str | None) -> KeyIdentity:
    """The identity in a PEM text: one private key, its certificate, and any certificates above that.

    Raises as `open_identity` does.
    """
    from cryptography import x509
    from cryptography.hazmat.primitives.serialization import Encoding, load_pem_private_key

    secret = passphrase.encode("utf-8") if passphrase is not None else None
    try:
        certificates = [c.public_bytes(Encoding.DER) for c in x509.load_pem_x509_certificates(content)]
    except ValueError as error:
        raise SigningRefusedError("the text holds no certificate") from error
    try:
        key = load_pem_private_key(content[max(content.find(_key_start(content)), 0) :], secret)
    except TypeError as error:
        raise WrongPassphraseError(f"the key and the passphrase do not go together: {error}") from error
    except ValueError as error:
        raise WrongPassphraseError("the passphrase does not open the key, or the text is damaged") from error
    return _identity(certificates[0], tuple(certificates[1:]), key)


def _key_start(content: bytes) -> bytes:
    match = re.search(rb"-----BEGIN [A-Z ]*PRIVATE KEY-----", content)
    if match is None:
        raise SigningRefusedError("the text holds no private key")
    return match.group()


def _identity(certificate: bytes, chain: tuple[bytes, ...], key: Any) -> KeyIdentity:
    from cryptography import x509
    from cryptography.hazmat.primitives.asymmetric import ec, rsa

    if not isinstance(key, ec.EllipticCurvePrivateKey | rsa.RSAPrivateKey):
        raise SigningRefusedError("the key is neither an elliptic-curve nor an RSA key")
    if x509.load_der_x509_certificate(certificate).public_key() != key.public_key():
        raise SigningRefusedError("the certificate does not belong to the key")
    return KeyIdentity(certificate, chain, key)


def passphrase_faults(passphrase: str, names: Sequence[str]) -> tuple[str, ...]:
    """Why `passphrase` is too weak, in words; nothing if it will do. `names` are those of person and account.

    Counts length (NIST SP 800-63B puts length before classes of characters), variety, and what is left when
    runs of the alphabet, of digits and of keyboard rows are taken for one character each.
    """
    faults = []
    low = passphrase.casefold()
    if len(passphrase) < _LEAST_LENGTH:
        faults.append(f"it has {len(passphrase)} characters; {_LEAST_LENGTH} are needed")
    if len(set(low)) < _LEAST_DIFFERENT:
        faults.append(f"it has {len(set(low))} different characters; {_LEAST_DIFFERENT} are needed")
    parts = {part for name in names for part in re.split(r"\W+", name.casefold()) if len(part) >= 3}
    faults.extend(f"it holds the name {part!r}" for part in sorted(parts) if part in low)
    if len(passphrase) >= _LEAST_LENGTH and _without_runs(low) < _LEAST_LENGTH - 2:
        faults.append("most of it is a run of neighbouring letters, digits or keys, or a repetition")
    return tuple(faults)


def _without_runs(text: str) -> int:
    """How many characters are no mere continuation of those before: next in a row, or said before."""
    steps = {row[place : place + 2] for row in _ROWS for place in range(len(row) - 1)}
    steps |= {step[::-1] for step in steps}
    count, place = 0, 0
    while place < len(text):
        longest = max((n for n in range(2, place + 1) if text[place : place + n] in text[:place]), default=0)
        if longest >= 3 and place + longest <= len(text):
            place += longest
            count += 1
            continue
        pair = text[place - 1 : place + 1]
        if place == 0 or (pair not in steps and pair[0] != pair[-1]):
            count += 1
        place += 1
    return count


def fitness_faults(der: bytes, person: str, now: datetime) -> tuple[str, ...]:
    """Why `person` cannot be enrolled with this certificate, in words; nothing if he can."""
    from cryptography import x509
    from cryptography.hazmat.primitives.asymmetric import ec, rsa

    facts, found = certificate_facts(der), x509.load_der_x509_certificate(der)
    faults = []
    if facts.person != person:
        faults.append(f"it names {facts.person!r}, not {person!r}")
    if not facts.valid_at(now):
        faults.append(f"it is valid from {facts.not_before:%Y-%m-%d} to {facts.not_after:%Y-%m-%d}, not now")
    key = found.public_key()
    if isinstance(key, rsa.RSAPublicKey):
        if key.key_size < _LEAST_RSA_BITS:
            faults.append(f"its RSA key has {key.key_size} bits; {_LEAST_RSA_BITS} are needed")
    elif not (isinstance(key, ec.EllipticCurvePublicKey) and key.curve.name in _CURVES):
        faults.append("its key is neither RSA nor on one of the curves P-256, P-384 and P-521")
    try:
        usage = found.extensions.get_extension_for_class(x509.KeyUsage).value
        if not (usage.digital_signature or usage.content_commitment):
            faults.append("its key is not meant for signatures")
    except x509.ExtensionNotFound:
        faults.append("it does not say what its key is meant for")
    try:
        if found.extensions.get_extension_for_class(x509.BasicConstraints).value.ca:
            faults.append("it is the certificate of an authority, not of a person")
    except x509.ExtensionNotFound:
        pass
    return tuple(faults)
