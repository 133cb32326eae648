"""The folder and the PDF of a fresh run, judged by tools that are not ours.

sha256sum (coreutils), bagit (Library of Congress), qpdf, pdffonts and pdfinfo (poppler), veraPDF for PDF/A-3a
(ISO 19005-3) and PDF/UA-1 (ISO 14289-1).
"""

import subprocess

import bagit
import pytest

from pdfa.verapdf import validate
from support.workspaces import Bench


@pytest.fixture(scope="module")
def folio(tmp_path_factory):
    """The folio of a fresh run."""
    return Bench(tmp_path_factory.mktemp("bench") / "w").run()


def tool(*arguments, cwd=None):
    return subprocess.run(arguments, cwd=cwd, capture_output=True, text=True, check=False)


@pytest.mark.needs("sha256sum")
@pytest.mark.parametrize("manifest", ["manifest-sha256.txt", "tagmanifest-sha256.txt"])
def test_sha256sum_agrees_with_the_manifests(folio, manifest):
    ended = tool("sha256sum", "--strict", "-c", manifest, cwd=folio)
    assert ended.returncode == 0, ended.stdout + ended.stderr


def test_an_independent_bagit_validator_agrees(folio, monkeypatch):
    monkeypatch.chdir(folio.parent)
    bag = bagit.Bag(str(folio))
    assert bag.version_info == (1, 0)
    bag.validate()


@pytest.mark.needs("qpdf")
def test_qpdf_finds_nothing_wrong(folio):
    ended = tool("qpdf", "--check", folio / "data/report.pdf")
    assert ended.returncode == 0, ended.stdout + ended.stderr


@pytest.mark.requirement("RERUN-5")
@pytest.mark.needs("pdffonts")
def test_all_fonts_are_embedded_and_of_one_family(folio):
    rows = tool("pdffonts", folio / "data/report.pdf").stdout.splitlines()[2:]
    assert rows
    for row in rows:
        name, embedded = row.split()[0], row[-24:].split()[0]
        assert embedded == "yes", row
        assert "Inter" in name


@pytest.mark.needs("pdfinfo")
def test_the_report_is_tagged_and_marked(folio):
    info = tool("pdfinfo", folio / "data/report.pdf").stdout
    assert "Tagged:          yes" in info
    assert "Title:" in info
    assert "A4" in info
    metadata = tool("pdfinfo", "-meta", folio / "data/report.pdf").stdout
    assert "pdfaid:part>3" in metadata or 'pdfaid:part="3"' in metadata
    assert "pdfuaid:part>1" in metadata or 'pdfuaid:part="1"' in metadata


@pytest.mark.requirement("REPORT-11")
@pytest.mark.needs("verapdf")
def test_the_report_conforms_to_pdf_a_3a_and_pdf_ua_1(folio):
    assert validate(folio / "data/report.pdf", ("3a", "ua1")) == []


@pytest.mark.needs("pdfdetach")
def test_study_data_and_findings_travel_inside_the_report(folio, tmp_path):
    tool("pdfdetach", "-saveall", "-o", tmp_path, folio / "data/report.pdf")
    for name, kept in (
        ("study.yaml", "study.yaml"),
        ("values.csv", "inputs/values.csv"),
        ("findings.json", "findings.json"),
    ):
        assert (tmp_path / name).read_bytes() == (folio / "data" / kept).read_bytes()
