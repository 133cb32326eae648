"""The whole check of a signed report: document, every signature, and the records beside it.

The unsigned report, the anchors, the enrolled certificates and the moment of checking come in; nothing is
fetched. Every finding says whether a statement holds, fails or cannot be checked, and why.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime
from typing import Any

from assayfolio.evidence.signing.block_reading import block_problems
from assayfolio.evidence.signing.identities import certificate_facts, fingerprint
from assayfolio.evidence.signing.pades import SEAL_KEY
from assayfolio.evidence.signing.records import FileFacts, Level, SignOffRecord, file_facts, read_record
from assayfolio.evidence.signing.refusals import SigningRefusedError
from assayfolio.evidence.signing.results import Gathered, ReportFindings, SignatureFindings
from assayfolio.evidence.signing.revisions import SignedRevision, signed_revisions
from assayfolio.evidence.signing.statement import Statement
from assayfolio.evidence.signing.trust import (
    Stamp,
    Trust,
    chain_of,
    judge_enrolment,
    judge_revocation,
    judge_time,
    judge_trust,
    judge_validity,
    proven_time,
    read_stamp,
    stamp_token,
)

_SUBFILTER = "/ETSI.CAdES.detached"


@dataclass(frozen=True, slots=True)
class ReportOnFile:
    """A report as it lies in its folder.

    `pdf` is the signed report, `unsigned` the sealed one before any signature, `seal` that of its folder,
    `records` the sign-off records by file name.
    """

    pdf: bytes
    unsigned: bytes
    seal: str
    records: Mapping[str, bytes]


@dataclass(frozen=True, slots=True)
class _Case:
    """What all signatures of one report are judged by."""

    pdf: bytes
    seal: str
    unsigned: FileFacts
    records: Mapping[int, SignOffRecord]
    trust: Trust
    stored: tuple[tuple[Any, ...], tuple[bytes, ...]]
    when: datetime
    last: int


def validate(report: ReportOnFile, trust: Trust, when: datetime) -> ReportFindings:
    """Everything that can be said about a signed report at the moment `when`.

    Never raises for what it is given.
    """
    gathered, pdf, unsigned = Gathered(), report.pdf, report.unsigned
    if pdf.startswith(unsigned):
        gathered.holds(
            "begins with the unsigned report", f"its first {len(unsigned)} bytes are the sealed report"
        )
    else:
        gathered.fails("begins with the unsigned report", "it is not the sealed report with additions")
    read = _read_records(report.records, gathered)
    try:
        revisions, problems = signed_revisions(pdf, unsigned)
        stored = _stored(revisions)
    except Exception as error:  # noqa: BLE001 - hostile bytes raise whatever they like in a PDF library
        gathered.fails("readable", f"it cannot be read as a PDF: {_reason(error)}")
        return ReportFindings(tuple(gathered.findings), ())
    gathered.holds("readable", f"{len(revisions)} signature(s)")
    _judge_tail(gathered, problems, len(revisions))
    _judge_count(gathered, revisions, read)
    case = _Case(pdf, report.seal, file_facts(unsigned), read, trust, stored, when, len(revisions))
    found, earlier = [], None
    for number, revision in enumerate(revisions, 1):
        one = _judge(case, number, revision, earlier)
        found.append(one)
        earlier = one.statement.time if one.statement is not None else earlier
    return ReportFindings(tuple(gathered.findings), tuple(found))


def _reason(error: Exception) -> str:
    return f"{error}" or type(error).__name__


def _read_records(records: Mapping[str, bytes], gathered: Gathered) -> dict[int, SignOffRecord]:
    read: dict[int, SignOffRecord] = {}
    for name, content in sorted(records.items()):
        try:
            record = read_record(name, content)
        except ValueError as error:
            gathered.fails("signatures and records match", f"record {name}: {error}")
            continue
        if record.number in read:
            gathered.fails("signatures and records match", f"two records have number {record.number}")
        read[record.number] = record
    return read


def _judge_tail(gathered: Gathered, problems: Sequence[str], count: int) -> None:
    if problems:
        gathered.fails("nothing after the last signature", "; ".join(problems))
    elif count:
        gathered.holds("nothing after the last signature", "the last signature covers the whole document")
    else:
        gathered.holds("nothing after the last signature", "nobody has signed it")


def _judge_count(
    gathered: Gathered, revisions: Sequence[SignedRevision], records: Mapping[int, SignOffRecord]
) -> None:
    numbers = set(range(1, len(revisions) + 1))
    lost = [
        f"record {records[number].name} has no signature in the report (removed or cut off)"
        for number in sorted(set(records) - numbers)
    ]
    strange = [
        f"signature {number} ({revisions[number - 1].name}) has no record"
        for number in sorted(numbers - set(records))
    ]
    if lost or strange:
        gathered.fails("signatures and records match", "; ".join((*lost, *strange)))
    else:
        gathered.holds("signatures and records match", f"{len(numbers)} of each")


def _stored(revisions: Sequence[SignedRevision]) -> tuple[tuple[Any, ...], tuple[bytes, ...]]:
    """Certificates (asn1crypto) and revocation lists (DER) in the document's own security store."""
    from pyhanko.sign.validation.dss import DocumentSecurityStore

    if not revisions or "/DSS" not in revisions[0].embedded.reader.root:
        return (), ()
    store = DocumentSecurityStore.read_dss(revisions[0].embedded.reader)
    return tuple(store.load_certs()), tuple(ref.get_object().data for ref in store.crls)


def _judge(case: _Case, number: int, revision: SignedRevision, earlier: datetime | None) -> SignatureFindings:
    gathered, statement, certificate = Gathered(), None, ""
    whole = "the whole document" if number == case.last else "the document as it was then"
    try:
        certificate = fingerprint(revision.embedded.signer_cert.dump())
        gathered.conclude("intact", _integrity_problems(revision.embedded), "digest and signature agree")
        gathered.conclude("covers its document", revision.coverage, whole)
        gathered.conclude("adds only a signature", revision.changes, "no page, text or attachment is touched")
        statement = _statement(revision)
        _judge_person(case, gathered, revision, (number, statement, earlier))
        _judge_block(gathered, revision, statement)
        _judge_record(case, gathered, revision, (number, statement, certificate))
    except Exception as error:  # noqa: BLE001 - the same as for the document
        gathered.fails("readable", f"it cannot be read: {_reason(error)}")
    return SignatureFindings(number, revision.name, statement, certificate, tuple(gathered.findings))


def _judge_block(gathered: Gathered, revision: SignedRevision, statement: Statement) -> None:
    try:
        problems = block_problems(revision.field, statement)
    except Exception as error:  # noqa: BLE001 - a font program can be anything
        problems = [f"it cannot be read: {_reason(error)}"]
    gathered.conclude("printed block", problems, "prints what was signed")


def _integrity_problems(embedded: Any) -> list[str]:
    """Why the CMS signature (RFC 5652) is not one over the bytes that it covers."""
    from pyhanko.sign.validation.generic_cms import get_signing_cert_attr, validate_sig_integrity

    if embedded.sig_object.get("/SubFilter") != _SUBFILTER:
        return ["it is no PAdES signature"]
    if get_signing_cert_attr(embedded.signer_info["signed_attrs"]) is None:
        return ["it does not name its certificate among what is signed"]
    digest = embedded.compute_digest()
    intact, valid = validate_sig_integrity(embedded.signer_info, embedded.signer_cert, "data", digest)
    problems = [] if intact else ["the bytes that it covers have been changed"]
    return problems if valid else [*problems, "the signature value does not belong to the certificate"]


def _statement(revision: SignedRevision) -> Statement:
    """What the signature dictionary states. Raises ValueError where it is none of this program's."""
    from pyhanko.pdf_utils.generic import parse_pdf_date

    held = revision.embedded.sig_object
    role, colon, meaning = str(held["/Reason"]).partition(": ")
    if not colon:
        raise ValueError("its reason does not give role and meaning")
    time = parse_pdf_date(str(held["/M"]))
    try:
        return Statement(revision.name, role, str(held["/Name"]), meaning, time, str(held[SEAL_KEY]))
    except SigningRefusedError as error:
        raise ValueError(str(error)) from error


def _judge_person(
    case: _Case, gathered: Gathered, revision: SignedRevision, one: tuple[int, Statement, datetime | None]
) -> None:
    """Enter everything about the certificate and the time."""
    number, statement, earlier = one
    embedded, trust = revision.embedded, case.trust
    facts = certificate_facts(embedded.signer_cert.dump())
    others = (*embedded.other_embedded_certs, *case.stored[0])
    chain = chain_of(embedded.signer_cert, others, trust.anchors, "signing")
    stamp = read_stamp(embedded, trust)
    judge_trust(gathered, chain, trust)
    judge_enrolment(gathered, facts, statement.person, trust)
    judge_validity(gathered, facts, statement.person, statement.time)
    proven = proven_time(stamp, trust.proven_by.get(number))
    lists = (*trust.revocation_lists, *case.stored[1])
    judge_revocation(gathered, chain, lists, (statement.time, proven))
    judge_time(gathered, statement.time, stamp, (earlier, case.when))
    _judge_stamp_chain(gathered, stamp, lists)


def _judge_stamp_chain(gathered: Gathered, stamp: Stamp | None, lists: Sequence[bytes]) -> None:
    """Enter a time stamp whose own authority was revoked; silence where nothing says so."""
    if stamp is None or not stamp.chain.certificates:
        return
    own = Gathered()
    judge_revocation(own, stamp.chain, lists, (stamp.time, stamp.time))
    if own.findings[0].outcome == "failed":
        gathered.fails("time", f"the time stamp: {own.findings[0].words}")


def _judge_record(
    case: _Case, gathered: Gathered, revision: SignedRevision, one: tuple[int, Statement, str]
) -> None:
    """Enter whether record and signature say the same, of the same bytes."""
    number, statement, certificate = one
    record = case.records.get(number)
    if record is None:
        gathered.fails("record", "there is none")
        return
    problems = [
        f"{name}: the record says {said!r}, the signature {signed!r}"
        for name, said, signed in (
            ("field", record.statement.field, statement.field),
            ("role", record.statement.role, statement.role),
            ("person", record.statement.person, statement.person),
            ("meaning", record.statement.meaning, statement.meaning),
            ("time", record.statement.time.isoformat(), statement.time.isoformat()),
            ("seal", record.statement.seal, statement.seal),
            ("certificate", record.certificate, certificate),
            ("level", record.level, level_of(revision)),
        )
        if said != signed
    ]
    if statement.seal != case.seal:
        problems.append("it was signed for a folder with another seal")
    if record.pdf != file_facts(case.pdf[: revision.end]):
        problems.append("the report with this signature is not the one that was recorded")
    if record.unsigned != case.unsigned:
        problems.append("it was recorded for another unsigned report")
    gathered.conclude("record", problems, "says the same, of the same bytes")


def level_of(revision: SignedRevision) -> Level:
    """The PAdES level that the signature has by what is in the document at its revision."""
    embedded = revision.embedded
    if stamp_token(embedded) is None:
        return "B-B"
    resolver = embedded.reader.get_historical_resolver(embedded.signed_revision)
    return "B-LT" if "/DSS" in resolver.root else "B-T"
