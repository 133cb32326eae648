"""The signers' files in `configs/signers/`, as verification and signing read them.

Certificates lie in PEM texts, the signer's before those above it; revocation lists in `.crl` files. What lies
there proves nothing by itself: a certificate counts where an entry of the audit trail pins its fingerprint.
"""

import base64
import binascii
import re
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

from assayfolio.canonical import sha256_hex
from assayfolio.evidence.files import plain_reason, read_regular

SIGNERS_FOLDER = "configs/signers"
_PEM = re.compile(rb"-----BEGIN (CERTIFICATE|X509 CRL)-----\s*([A-Za-z0-9+/=\s]+?)-----END \1-----", re.ASCII)
_KINDS = {b"CERTIFICATE": "certificate", b"X509 CRL": "revocation list"}
_LARGEST = 1 << 24


@dataclass(frozen=True, slots=True)
class Keyring:
    """Certificates by their fingerprints and revocation lists by their SHA-256, all in DER.

    `troubles` tells of each file that could not be read.
    """

    certificates: Mapping[str, bytes]
    lists: Mapping[str, bytes]
    troubles: tuple[str, ...] = ()


def pem_parts(content: bytes, kind: str) -> tuple[bytes, ...]:
    """The DER form of everything of `kind` ("certificate" or "revocation list") in a PEM text, in its order.

    A file that is no PEM text is taken for DER itself. What is neither gives nothing, or a part that no
    reader of certificates takes.
    """
    if b"-----BEGIN " not in content:
        return (content,) if content[:1] == b"\x30" else ()
    found = []
    for match in _PEM.finditer(content):
        if _KINDS[match[1]] != kind:
            continue
        try:
            found.append(base64.b64decode(b"".join(match[2].split()), validate=True))
        except binascii.Error:
            continue
    return tuple(found)


def pem_text(kind: str, *parts: bytes) -> bytes:
    """The parts (DER) as PEM texts one after the other (RFC 7468)."""
    label = next(word for word, named in _KINDS.items() if named == kind)
    texts = []
    for der in parts:
        code = base64.b64encode(der)
        lines = [code[place : place + 64] for place in range(0, len(code), 64)]
        texts.append(b"\n".join((b"-----BEGIN %s-----" % label, *lines, b"-----END %s-----" % label, b"")))
    return b"".join(texts)


def read_keyring(workspace: Path) -> Keyring:
    """Everything in the signers' folder of a workspace; nothing where there is none."""
    certificates: dict[str, bytes] = {}
    lists: dict[str, bytes] = {}
    troubles: list[str] = []
    folder = workspace / SIGNERS_FOLDER
    try:
        paths = sorted(folder.iterdir()) if folder.is_dir() else []
    except OSError as error:
        return Keyring({}, {}, (f"{SIGNERS_FOLDER}: {plain_reason(error)}",))
    for path in paths:
        if path.suffix not in (".pem", ".crl"):
            continue
        try:
            content = read_regular(path)[:_LARGEST]
        except OSError as error:
            troubles.append(f"{SIGNERS_FOLDER}/{path.name}: {plain_reason(error)}")
            continue
        if path.suffix == ".pem":
            certificates |= {sha256_hex(der): der for der in pem_parts(content, "certificate")}
        else:
            lists |= {sha256_hex(der): der for der in pem_parts(content, "revocation list")}
    return Keyring(certificates, lists, tuple(troubles))
