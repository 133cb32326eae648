"""Signing a report: one incremental update with a PAdES signature (ETSI EN 319 142-1; from memory).

Level B-B by default, B-T with a time-stamp authority, B-LT where certificates and revocation lists are put in
as well; these go into the same update, so that the newest signature covers the whole document at every level.
The first signature certifies: after it nothing but further signatures may be added. Apart from the signature
value and the time stamp, the update depends on the document and the statement alone.
"""

import hashlib
import io
from dataclasses import dataclass
from typing import Any

from assayfolio.evidence.signing.appearance import stamp_style
from assayfolio.evidence.signing.identities import SigningIdentity, certificate_facts, fingerprint
from assayfolio.evidence.signing.records import Level, SignOffRecord, file_facts
from assayfolio.evidence.signing.refusals import SigningRefusedError
from assayfolio.evidence.signing.stamping import TimeStampAuthority, ValidationMaterial, time_stamper
from assayfolio.evidence.signing.statement import Statement, reason_text

SEAL_KEY = "/XXFolioSeal"  # the prefix of private names that need no registration (ISO 32000-1, annex E)
DIGEST = "sha256"
_ROOM, _ROOM_FOR_STAMP = 4096, 12288


@dataclass(frozen=True, slots=True)
class LongTerm:
    """What raises a signature above B-B: who stamps the time, and what is put in for later checks."""

    stamps: TimeStampAuthority
    material: ValidationMaterial | None = None


@dataclass(frozen=True, slots=True)
class SignedReport:
    """The report with one signature more, and that signature's record."""

    pdf: bytes
    record: SignOffRecord


def sign(
    pdf: bytes,
    unsigned: bytes,
    statement: Statement,
    identity: SigningIdentity,
    above: LongTerm | None = None,
) -> SignedReport:
    """`pdf` with one signature more in the field that `statement` names. `unsigned` is the report before any.

    Raises SigningRefusedError where the field is not there or filled, the certificate is not valid at the
    time or names somebody else, or `pdf` does not begin with `unsigned`; StampUnavailableError where no time
    stamp can be had. Nothing is changed then.
    """
    facts = certificate_facts(identity.certificate)
    if not facts.valid_at(statement.time):
        raise SigningRefusedError(
            f"the certificate of {facts.person} is valid from {facts.not_before:%Y-%m-%d} to "
            f"{facts.not_after:%Y-%m-%d}, not at the time of signing"
        )
    if facts.person != statement.person:
        raise SigningRefusedError(f"the certificate is that of {facts.person}, not of {statement.person}")
    if not pdf.startswith(unsigned):
        raise SigningRefusedError("the report to be signed does not begin with the unsigned report")
    signed = _signed(pdf, statement, identity, above)
    if not signed.startswith(pdf):  # what the whole scheme rests on
        raise SigningRefusedError("the update would have changed the report")
    level: Level = "B-B" if above is None else "B-T" if above.material is None else "B-LT"
    number = signatures_in(pdf) + 1
    record = SignOffRecord(
        number, statement, fingerprint(identity.certificate), level, file_facts(unsigned), file_facts(signed)
    )
    return SignedReport(signed, record)


def signatures_in(pdf: bytes) -> int:
    """How many of its signature fields are filled. Raises SigningRefusedError for what is no PDF."""
    return sum(1 for _, filled in _fields(pdf) if filled)


def open_fields(pdf: bytes) -> tuple[str, ...]:
    """The names of its empty signature fields, in their order."""
    return tuple(name for name, filled in _fields(pdf) if not filled)


def _fields(pdf: bytes) -> list[tuple[str, bool]]:
    from pyhanko.pdf_utils.misc import PdfError
    from pyhanko.pdf_utils.reader import PdfFileReader
    from pyhanko.sign.fields import enumerate_sig_fields

    try:
        found = enumerate_sig_fields(PdfFileReader(io.BytesIO(pdf)))
        return [(name, value is not None) for name, value, _ in found]
    except PdfError as error:
        raise SigningRefusedError(f"the report cannot be read as a PDF: {error}") from error


def _writer(pdf: bytes) -> Any:
    """A writer of updates that leaves the metadata alone and takes the new identifier from the bytes."""
    from pyhanko.pdf_utils.generic import ArrayObject, ByteStringObject
    from pyhanko.pdf_utils.incremental_writer import IncrementalPdfFileWriter

    class Writer(IncrementalPdfFileWriter):
        """The same update for the same input."""

        @classmethod
        def _handle_id(cls, prev: Any) -> Any:
            first = prev.trailer["/ID"][0]
            original = getattr(first, "original_bytes", first)
            changed = hashlib.sha256(pdf).digest()[:16]
            return ArrayObject([ByteStringObject(original), ByteStringObject(changed)])

        def _update_meta(self) -> None:
            return

    return Writer(io.BytesIO(pdf))


def _signed(pdf: bytes, statement: Statement, identity: SigningIdentity, above: LongTerm | None) -> bytes:
    from pyhanko.pdf_utils.misc import PdfError
    from pyhanko.sign.general import SigningError
    from pyhanko.sign.signers.cms_embedder import PdfCMSEmbedder, SigIOSetup

    fields = dict(_fields(pdf))
    if statement.field not in fields:
        raise SigningRefusedError(f"the report has no signature field {statement.field}")
    if fields[statement.field]:
        raise SigningRefusedError(f"the field {statement.field} is signed already")
    try:
        writer = _writer(pdf)
        if above is not None and above.material is not None:
            _put_in(writer, above.material)
        update = PdfCMSEmbedder().write_cms(statement.field, writer, existing_fields_only=True)
        next(update)
        first = not any(fields.values())
        update.send(_setup(statement, _room(identity, above), first))
        prepared, output = update.send(SigIOSetup(md_algorithm=DIGEST))
        update.send(_cms(identity, prepared.document_digest, above))
    except (PdfError, SigningError) as error:
        raise SigningRefusedError(f"the report cannot be signed: {error}") from error
    content: bytes = output.getvalue()
    return content


def _room(identity: SigningIdentity, above: LongTerm | None) -> int:
    """How many hexadecimal digits to leave for the signature."""
    certificates = sum(len(der) for der in (identity.certificate, *identity.chain))
    return 2 * (_ROOM + certificates + (_ROOM_FOR_STAMP if above is not None else 0))


def _setup(statement: Statement, room: int, first: bool) -> Any:
    from pyhanko.pdf_utils.generic import NameObject, TextStringObject
    from pyhanko.sign.fields import MDPPerm, SigSeedSubFilter
    from pyhanko.sign.signers.cms_embedder import SigAppearanceSetup, SigMDPSetup, SigObjSetup
    from pyhanko.sign.signers.pdf_byterange import SignatureObject

    held = SignatureObject(
        timestamp=statement.time,
        name=statement.person,
        reason=reason_text(statement),
        subfilter=SigSeedSubFilter.PADES,
        bytes_reserved=room,
    )
    held[NameObject(SEAL_KEY)] = TextStringObject(statement.seal)
    rights = MDPPerm.FILL_FORMS if first else None
    return SigObjSetup(
        sig_placeholder=held,
        mdp_setup=SigMDPSetup(md_algorithm=DIGEST, certify=first, docmdp_perms=rights),
        appearance_setup=SigAppearanceSetup(
            style=stamp_style(statement), timestamp=statement.time, name=statement.person
        ),
    )


def _cms(identity: SigningIdentity, digest: bytes, above: LongTerm | None) -> Any:
    import asyncio

    stamps = time_stamper(above.stamps) if above is not None else None
    signing = identity.signer().async_sign(
        digest, digest_algorithm=DIGEST, use_pades=True, timestamper=stamps
    )
    return asyncio.run(signing)


def _put_in(writer: Any, material: ValidationMaterial) -> None:
    """Add certificates and revocation lists to the document's security store (EN 319 142-1, 5.4)."""
    from asn1crypto.crl import CertificateList
    from asn1crypto.x509 import Certificate
    from pyhanko.sign.validation.dss import DocumentSecurityStore

    DocumentSecurityStore.supply_dss_in_writer(
        writer,
        None,
        certs=[Certificate.load(der) for der in material.certificates],
        crls=[CertificateList.load(der) for der in material.revocation_lists],
    )
