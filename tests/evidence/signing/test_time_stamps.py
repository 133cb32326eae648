"""Signatures with time stamps, from a real authority by RFC 3161 on the loopback address."""

import asyncio
import io
from dataclasses import replace
from datetime import UTC, datetime, timedelta

import pytest
from asn1crypto.x509 import Certificate
from pyhanko.pdf_utils.reader import PdfFileReader
from pyhanko.sign.validation import async_validate_pdf_signature
from pyhanko.sign.validation.dss import DocumentSecurityStore

from assayfolio.evidence.signing import pades
from assayfolio.evidence.signing.authority import Revocation
from assayfolio.evidence.signing.identities import certificate_facts
from assayfolio.evidence.signing.pades import LongTerm, signatures_in
from assayfolio.evidence.signing.refusals import StampUnavailableError
from assayfolio.evidence.signing.stamping import TimeStampAuthority, ValidationMaterial
from evidence.signing.office import office, signed_by, signed_in_turn, unsigned_report
from evidence.signing.stamps import StampHouse, serving

pytestmark = pytest.mark.needs("openssl")


@pytest.fixture(scope="module")
def house(tmp_path_factory):
    return StampHouse(tmp_path_factory.mktemp("stamps"))


def now() -> datetime:
    return datetime.now(UTC).replace(microsecond=0)


def believing(on_file, house, **trust):
    """`on_file` looked at tomorrow by somebody who trusts the time-stamp authority."""
    trusted = replace(on_file.trust, stamp_anchors=(house.root,), **trust)
    return replace(on_file, trust=trusted, when=now() + timedelta(days=1))


@pytest.fixture(scope="module")
def stamped(house):
    with serving(house.answer) as address:
        return signed_in_turn("author", "reviewer", above=LongTerm(TimeStampAuthority(address)), start=now())


@pytest.fixture(scope="module")
def lasting(house):
    material = ValidationMaterial(
        (office().authority.certificate, house.root, house.own), (office().list_of(1), house.revocation_list)
    )
    with serving(house.answer) as address:
        return signed_in_turn(
            "author", "reviewer", above=LongTerm(TimeStampAuthority(address), material), start=now()
        )


def time_words(findings) -> list[tuple[str, str]]:
    return [
        (each.outcome, each.words)
        for found in findings.signatures
        for each in found.findings
        if each.check == "time"
    ]


@pytest.mark.requirement("SIGN-4")
def test_a_stamped_signature_is_checked_without_a_network(stamped, house):
    findings = believing(stamped, house).findings()
    assert findings.outcome == "passed", findings.failures
    assert all("time stamp of Invented time stamps" in words for _, words in time_words(findings))
    assert b'"level":"B-T"' in stamped.report.records["1-author.json"]


def test_a_stamp_of_an_authority_that_is_not_trusted_proves_nothing(stamped):
    findings = replace(stamped, when=now() + timedelta(days=1)).findings()
    assert findings.outcome == "not checkable"
    assert {outcome for outcome, _ in time_words(findings)} == {"not checkable"}


def test_a_lasting_signature_carries_what_its_check_needs(lasting, house):
    bare = believing(lasting, house, revocation_lists=())
    findings = bare.findings()
    assert findings.outcome == "passed", findings.failures
    assert b'"level":"B-LT"' in lasting.report.records["2-reviewer.json"]


def test_without_a_list_inside_or_outside_revocation_cannot_be_checked(stamped, house):
    bare = believing(stamped, house, revocation_lists=())
    assert bare.findings().outcome == "not checkable"


def test_the_newest_signature_covers_the_whole_document_at_every_level(stamped, lasting):
    for on_file in (stamped, lasting):
        last = PdfFileReader(io.BytesIO(on_file.report.pdf)).embedded_signatures[-1]
        assert last.byte_range[2] + last.byte_range[3] == len(on_file.report.pdf)


def test_another_validator_finds_the_lasting_signatures_valid(lasting, house):
    roots = [Certificate.load(office().authority.certificate), Certificate.load(house.root)]
    reader = PdfFileReader(io.BytesIO(lasting.report.pdf))
    for embedded in reader.embedded_signatures:
        context = DocumentSecurityStore.read_dss(reader).as_validation_context(
            {"trust_roots": roots, "allow_fetching": False, "revocation_mode": "require"}
        )
        status = asyncio.run(async_validate_pdf_signature(embedded, context))
        assert status.bottom_line, status.pretty_print_details()
        assert status.timestamp_validity.trusted


def test_a_back_dated_clock_is_betrayed_by_the_stamp(house):
    with serving(house.answer) as address:
        dated = signed_in_turn(
            "author", above=LongTerm(TimeStampAuthority(address)), start=now() - timedelta(hours=3)
        )
    findings = believing(dated, house).findings()
    assert any("the signer's clock said" in line for line in findings.failures)


def revoked(on_file, house, when):
    serial = certificate_facts(office().people["author"].certificate).serial
    newer = office().list_of(2, Revocation(serial, when, "keyCompromise"))
    return believing(on_file, house, revocation_lists=(newer,))


def revocation_of_author(findings):
    return next(each for each in findings.signatures[0].findings if each.check == "not revoked when signed")


@pytest.mark.requirement("SIGN-12")
def test_a_stamp_proves_that_a_signature_came_before_the_revocation(stamped, house):
    found = revocation_of_author(revoked(stamped, house, now() + timedelta(hours=2)).findings())
    assert found.outcome == "passed"
    assert "which is proven" in found.words


def test_a_stamp_after_the_revocation_convicts_a_clock_set_back_a_little(house):
    with serving(house.answer) as address:
        dated = signed_in_turn(
            "author", above=LongTerm(TimeStampAuthority(address)), start=now() - timedelta(minutes=4)
        )
    found = revocation_of_author(revoked(dated, house, now() - timedelta(minutes=2)).findings())
    assert found.outcome == "failed"
    assert "first proven for" in found.words


def test_a_stamp_moved_from_another_signature_is_found(house, stamped):
    honest = pades.time_stamper
    (token,) = [
        each["content"]
        for attribute in PdfFileReader(io.BytesIO(stamped.report.pdf))
        .embedded_signatures[0]
        .signer_info["unsigned_attrs"]
        for each in [attribute["values"][0]]
    ]

    def other_stamp(authority):
        stamper = honest(authority)

        async def stale(digest, algorithm):
            from asn1crypto.cms import ContentInfo

            return ContentInfo({"content_type": "signed_data", "content": token})

        stamper.async_timestamp = stale
        return stamper

    with pytest.MonkeyPatch.context() as patched:
        patched.setattr(pades, "time_stamper", other_stamp)
        moved = signed_in_turn(
            "author", above=LongTerm(TimeStampAuthority("http://127.0.0.1:9/")), start=now()
        )
    findings = believing(moved, house).findings()
    assert any("belongs to another signature" in line for line in findings.failures)


@pytest.mark.parametrize(
    ("answer", "words"),
    [
        (lambda query: b"", "no time stamp"),
        (lambda query: b"<html>maintenance</html>", "no time stamp"),
    ],
)
def test_an_answer_that_is_no_stamp_stops_the_signature(answer, words):
    with serving(answer) as address:
        above = LongTerm(TimeStampAuthority(address))
        with pytest.raises(StampUnavailableError, match=words):
            signed_by(unsigned_report(), "author", now(), above)


def test_a_stamp_for_something_else_stops_the_signature(house):
    kept = []

    def first_answer(query: bytes) -> bytes:
        kept.append(house.answer(query))
        return kept[0]

    with serving(first_answer) as address:
        above = LongTerm(TimeStampAuthority(address))
        signed_by(unsigned_report(), "author", now(), above)
        with pytest.raises(StampUnavailableError):
            signed_by(unsigned_report(), "author", now(), above)


def test_network_trouble_leaves_the_document_and_the_signature_can_be_repeated(house):
    pdf = unsigned_report()
    with serving(house.answer) as address:
        pass  # the server is gone again
    with pytest.raises(StampUnavailableError, match="no time stamp from"):
        signed_by(pdf, "author", now(), LongTerm(TimeStampAuthority(address, wait_seconds=2)))
    with serving(house.answer) as address:
        signed = signed_by(pdf, "author", now(), LongTerm(TimeStampAuthority(address)))
    assert signatures_in(pdf) == 0
    assert signatures_in(signed.pdf) == 1


@pytest.mark.parametrize("address", ["file:///etc/hostname", "ftp://stamps.invalid/", "stamps.invalid"])
def test_only_web_addresses_are_asked(address):
    with pytest.raises(StampUnavailableError, match="no web address"):
        signed_by(unsigned_report(), "author", now(), LongTerm(TimeStampAuthority(address)))
