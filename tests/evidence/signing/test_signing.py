"""Making a signature: what is added to the report, what is refused, what others' programs say."""

import io
import re
import subprocess
from dataclasses import replace
from datetime import datetime, timedelta

import pikepdf
import pytest
from pyhanko.pdf_utils.reader import PdfFileReader
from pyhanko.sign.diff_analysis import DEFAULT_DIFF_POLICY, ModificationLevel
from pyhanko.sign.fields import MDPPerm

from assayfolio.evidence.signing.identities import KeyIdentity, certificate_facts, certificate_pem
from assayfolio.evidence.signing.pades import open_fields, sign, signatures_in
from assayfolio.evidence.signing.refusals import SigningRefusedError
from evidence.signing.office import (
    PEOPLE,
    SEAL,
    SIGNED,
    office,
    signed_by,
    signed_in_turn,
    signed_report,
    statement,
    unsigned_report,
)
from pdfa.verapdf import validate as verapdf


@pytest.fixture(scope="module")
def signed_file(tmp_path_factory):
    path = tmp_path_factory.mktemp("signed") / "report.pdf"
    path.write_bytes(signed_report().report.pdf)
    return path


# --- what is added


def test_the_unsigned_report_begins_every_signed_one():
    for pdf in signed_report().kept:
        assert pdf.startswith(unsigned_report())
    first, second, third = signed_report().kept
    assert second.startswith(first)
    assert third.startswith(second)


def test_a_signature_fills_its_field_and_leaves_the_others_open():
    assert open_fields(unsigned_report()) == ("author", "reviewer", "approver")
    first, second, third = signed_report().kept
    assert open_fields(first) == ("reviewer", "approver")
    assert (signatures_in(first), signatures_in(second), signatures_in(third)) == (1, 2, 3)
    assert open_fields(third) == ()


def test_apart_from_the_signature_value_the_same_statement_adds_the_same_bytes():
    pdf = unsigned_report()
    value = re.compile(rb"/Contents <[0-9A-Fa-f]+>")
    first, second = (value.sub(b"", signed_by(pdf, "author").pdf) for _ in range(2))
    assert first == second


@pytest.mark.requirement("SIGN-1", "SIGN-16")
def test_the_signature_itself_says_who_when_in_which_role_and_what_it_means():
    found = PdfFileReader(io.BytesIO(signed_report().report.pdf)).embedded_signatures
    for embedded, (role, (name, _, meaning)) in zip(found, PEOPLE.items(), strict=True):
        held = embedded.sig_object
        assert held["/Name"] == name
        assert held["/Reason"] == f"{role}: {meaning}"
        assert re.fullmatch(r"D:2026120110050[0-9]\+01'00'|D:20261201\d{6}\+01'00'", held["/M"])
        assert held["/XXFolioSeal"] == SEAL
        assert held["/SubFilter"] == "/ETSI.CAdES.detached"
        attributes = [each["type"].native for each in embedded.signer_info["signed_attrs"]]
        assert "signing_certificate_v2" in attributes
        assert "signing_time" not in attributes


def test_the_first_signature_allows_further_signatures_and_nothing_else():
    with pikepdf.open(io.BytesIO(signed_report().report.pdf)) as pdf:
        certified = pdf.Root.Perms.DocMDP
        assert int(certified.Reference[0].TransformParams.P) == 2
        assert certified.objgen == pdf.Root.AcroForm.Fields[0].V.objgen
        assert "/Reference" not in pdf.Root.AcroForm.Fields[1].V
        assert int(pdf.Root.AcroForm.SigFlags) == 3


def test_the_record_gives_length_and_digest_of_the_report_with_that_signature():
    pdf, made = unsigned_report(), None
    for role in PEOPLE:
        made = signed_by(pdf, role)
        assert made.record.pdf.length == len(made.pdf)
        assert made.record.unsigned.length == len(unsigned_report())
        assert made.record.certificate == certificate_facts(office().people[role].certificate).fingerprint
        pdf = made.pdf
    assert made.record.name == "3-approver.json"


@pytest.mark.parametrize("order", [("approver", "author"), ("reviewer", "approver", "author")])
def test_whoever_signs_first_certifies(order):
    assert signed_in_turn(*order).findings().signatures[0].field == order[0]


def test_the_whole_check_of_every_stage_passes():
    for count in range(4):
        on_file = signed_in_turn(*list(PEOPLE)[:count])
        assert on_file.findings().outcome == "passed", on_file.findings().failures


def test_the_library_s_own_analysis_of_changes_after_the_first_signature_agrees():
    reader = PdfFileReader(io.BytesIO(signed_report().report.pdf))
    found = DEFAULT_DIFF_POLICY.review_file(reader, 1, doc_mdp=MDPPerm.FILL_FORMS)
    assert found.modification_level <= ModificationLevel.FORM_FILLING
    assert found.changed_form_fields == {"reviewer", "approver"}


# --- the printed block


@pytest.mark.needs("pdftotext")
@pytest.mark.requirement("SIGN-1", "SIGN-2", "REPORT-22")
def test_the_page_shows_name_date_with_offset_role_and_meaning(signed_file):
    shown = subprocess.run(
        ["pdftotext", "-f", "1", "-l", "1", "-enc", "UTF-8", signed_file, "-"],
        capture_output=True,
        check=True,
    )
    text = " ".join(shown.stdout.decode().split())
    assert "not signed" not in text
    for hour, (role, (name, _, meaning)) in enumerate(PEOPLE.items(), 10):
        assert name in text
        assert f"2026-12-01 {hour}:05:07 +01:00" in text
        assert f"{role.capitalize()}:" in text
        assert meaning.split()[-1] in text


@pytest.mark.needs("pdffonts")
def test_every_font_of_the_signed_report_is_embedded(signed_file):
    listed = subprocess.run(["pdffonts", signed_file], capture_output=True, text=True, check=True)
    rows = [line.split() for line in listed.stdout.splitlines()[2:]]
    assert sum("SIGNED+Inter" in row[0] for row in rows) == 3
    assert all(row[-5:-2] == ["yes", "yes", "yes"] for row in rows)


def test_a_long_meaning_is_set_smaller():
    words = ("I performed this analysis as planned and reported every deviation; " * 3).strip()
    made = sign(
        unsigned_report(), unsigned_report(), statement("author", meaning=words), office().people["author"]
    )
    sizes = set(re.findall(rb"/F0 ([0-9.]+) Tf", signed_block(made.pdf)))
    assert len(sizes) == 1
    assert float(sizes.pop()) < 7.6


def signed_block(pdf: bytes) -> bytes:
    """What draws the author's block."""
    with pikepdf.open(io.BytesIO(pdf)) as opened:
        return opened.Root.AcroForm.Fields[0].AP.N.read_bytes()


def test_a_meaning_that_does_not_fit_the_block_is_refused():
    refused("too long for the sign-off block", meaning=("every deviation; " * 60).strip())


# --- what is refused


def refused(words, *, pdf=None, role="author", by=None, **changes):
    """Signing so is refused with these words."""
    identity = by or office().people[role]
    with pytest.raises(SigningRefusedError, match=words):
        sign(pdf or unsigned_report(), unsigned_report(), statement(role, **changes), identity)


def test_a_field_that_is_signed_cannot_be_signed_again():
    refused("is signed already", pdf=signed_report().kept[0])


def test_a_field_that_is_not_there_cannot_be_signed():
    refused("has no signature field author-2", field="author-2")


@pytest.mark.requirement("SIGN-10")
def test_nobody_signs_under_another_s_name():
    refused("is that of Björn Łęcki", by=office().people["reviewer"])
    refused("is that of Ada Meadow", person="Dora Hill")


@pytest.mark.parametrize("away", [timedelta(days=-400), timedelta(days=16 * 365)])
@pytest.mark.requirement("SIGN-11")
def test_a_certificate_signs_only_while_it_is_valid(away):
    refused("not at the time of signing", time=SIGNED + away)


def test_only_the_report_that_was_sealed_is_signed():
    identity = office().people["author"]
    with pytest.raises(SigningRefusedError, match="does not begin with the unsigned report"):
        sign(unsigned_report("single values"), unsigned_report(), statement("author"), identity)


@pytest.mark.parametrize("content", [b"", b"no report", b"%PDF-1.7\n%%EOF\n"])
def test_what_is_no_report_cannot_be_signed(content):
    with pytest.raises(SigningRefusedError):
        sign(content, content, statement("author"), office().people["author"])


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"person": ""}, "the name is empty"),
        ({"meaning": " "}, "the meaning is empty"),
        ({"meaning": "a\nb"}, "cannot be printed"),
        ({"person": "Ada 中"}, "U\\+4E2D"),
        ({"person": "Ada\u202e"}, "U\\+202E"),
        ({"role": "author: or"}, "colon"),
        ({"role": "approver"}, "not one for the role approver"),
        ({"field": "Author 1"}, "no name of a signature field"),
        ({"seal": "5e"}, "seal"),
        ({"time": datetime(2026, 12, 1, 10, 5, 7)}, "offset"),  # noqa: DTZ001 - that it has none is the point
        ({"time": SIGNED.replace(microsecond=3)}, "whole seconds"),
    ],
)
def test_a_statement_that_cannot_be_printed_whole_is_refused(changes, words):
    with pytest.raises(SigningRefusedError, match=words):
        replace(statement("author"), **changes)


# --- checks by others


@pytest.mark.needs("pdfsig")
def test_poppler_finds_three_valid_signatures_the_last_over_the_whole_document(signed_file):
    said = subprocess.run(["pdfsig", signed_file], capture_output=True, text=True, check=True).stdout
    assert said.count("Signature is Valid.") == 3
    assert [line.strip(" -") for line in said.splitlines() if "ocument signed" in line] == [
        "Not total document signed",
        "Not total document signed",
        "Total document signed",
    ]
    for name, _, _ in PEOPLE.values():
        assert f"Signer Certificate Common Name: {name}" in said


@pytest.mark.needs("qpdf")
def test_the_syntax_stays_clean(signed_file):
    ended = subprocess.run(["qpdf", "--check", signed_file], capture_output=True, check=False)
    assert ended.returncode == 0, ended.stdout


@pytest.mark.needs("verapdf")
def test_the_signed_report_stays_archival_and_accessible(signed_file):
    assert verapdf(signed_file, profiles=("3a", "ua1")) == []


@pytest.mark.needs("openssl")
def test_openssl_verifies_each_extracted_signature(tmp_path):
    pdf = signed_report().report.pdf
    (tmp_path / "ca.pem").write_bytes(certificate_pem(office().authority.certificate))
    for embedded in PdfFileReader(io.BytesIO(pdf)).embedded_signatures:
        start, first, second, length = (int(end) for end in embedded.byte_range)
        (tmp_path / "covered").write_bytes(pdf[start:first] + pdf[second : second + length])
        (tmp_path / "signature").write_bytes(embedded.pkcs7_content)
        when = str(int(SIGNED.timestamp()))
        command = ["openssl", "cms", "-verify", "-binary", "-inform", "DER", "-in", tmp_path / "signature"]
        files = ["-content", tmp_path / "covered", "-CAfile", tmp_path / "ca.pem", "-out", tmp_path / "out"]
        ended = subprocess.run(
            [*command, *files, "-purpose", "any", "-attime", when],
            capture_output=True,
            text=True,
            check=False,
        )
        assert ended.returncode == 0, ended.stderr


def test_keys_of_other_kinds_sign_as_well():
    from cryptography.hazmat.primitives.asymmetric import ec, rsa

    from assayfolio.evidence.signing.authority import certificate_request, certify
    from evidence.signing.office import FOUNDED

    name, account, _ = PEOPLE["author"]
    for key in (rsa.generate_private_key(65537, 3072), ec.generate_private_key(ec.SECP384R1())):
        request = certificate_request(name, account, key)
        certificate = certify(office().authority, request, (name, account), (FOUNDED, 3000))
        identity = KeyIdentity(certificate, (office().authority.certificate,), key)
        made = sign(unsigned_report(), unsigned_report(), statement("author"), identity)
        assert signatures_in(made.pdf) == 1
