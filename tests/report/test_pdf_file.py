"""The PDF as a file: conformity, fonts, signature fields, attachments."""

import io
import re
import subprocess
from dataclasses import replace

import pikepdf
import pytest

from assayfolio.report.render import render_report
from pdfa.verapdf import validate
from report.cases import CASES
from report.samples import single_values


@pytest.fixture
def opened(rendered):
    def open_report(case: str) -> pikepdf.Pdf:
        return pikepdf.open(io.BytesIO(rendered(case).pdf))

    return open_report


@pytest.mark.needs("verapdf")
@pytest.mark.parametrize("case", CASES)
def test_a_report_is_archival_and_accessible(case, report_file):
    assert validate(report_file(case), profiles=("3a", "ua1")) == []


@pytest.mark.needs("qpdf")
@pytest.mark.parametrize("case", ["balanced", "single values"])
def test_the_syntax_is_clean(case, report_file):
    ended = subprocess.run(["qpdf", "--check", report_file(case)], capture_output=True, check=False)
    assert ended.returncode == 0, ended.stdout


@pytest.mark.needs("pdffonts")
def test_all_fonts_are_embedded_subsets_of_the_one_family(report_file):
    listed = subprocess.run(["pdffonts", report_file("balanced")], capture_output=True, text=True, check=True)
    rows = [line.split() for line in listed.stdout.splitlines()[2:]]
    assert len(rows) == 4
    assert all("+Inter" in row[0] for row in rows)
    assert all(row[-5:-2] == ["yes", "yes", "yes"] for row in rows)


def test_the_document_has_title_language_and_bookmarks(opened):
    with opened("balanced") as pdf:
        assert str(pdf.docinfo["/Title"]) == "Nitrate in drinking water by four methods (WTR-017, run-0001)"
        assert str(pdf.docinfo["/CreationDate"]) == "D:20261130095831Z"
        assert str(pdf.Root.Lang) == "en"
        assert bool(pdf.Root.MarkInfo.Marked)
        with pdf.open_outline() as outline:
            (top,) = outline.root
            titles = [child.title for child in top.children]
        assert top.title == "Nitrate in drinking water by four methods"
        assert titles[0] == "Answers"
        assert titles[-1] == "9 Data listing"


def test_there_is_an_empty_signature_field_for_each_planned_role(opened):
    with opened("balanced") as pdf:
        form = pdf.Root.AcroForm
        assert [str(field.T) for field in form.Fields] == ["author", "reviewer", "approver"]
        assert "/NeedAppearances" not in form
        assert "/DR" not in form
        for field in form.Fields:
            assert field.FT == "/Sig"
            assert "/V" not in field
            assert field.P.objgen == pdf.pages[0].objgen
            assert int(field.F) == 4


def test_the_fields_stand_level_and_are_equally_large(opened):
    with opened("balanced") as pdf:
        boxes = [[float(end) for end in field.Rect] for field in pdf.Root.AcroForm.Fields]
    sizes = {(round(right - left, 2), round(top - bottom, 2)) for left, bottom, right, top in boxes}
    assert len(sizes) == 1
    assert len({round(bottom, 2) for _, bottom, _, _ in boxes}) == 1
    width, height = sizes.pop()
    assert width > 130
    assert height > 40


def test_an_empty_field_says_not_signed_by_its_own_appearance(opened):
    with opened("balanced") as pdf:
        for field in pdf.Root.AcroForm.Fields:
            appearance = field.AP.N
            (name,) = appearance.Resources.Font.keys()
            font = appearance.Resources.Font[name]
            unicode_of = glyph_texts(font.ToUnicode.read_bytes().decode())
            glyphs = appearance.read_bytes().decode().split("<")[1].split(">")[0]
            words = "".join(unicode_of[glyphs[place : place + 4]] for place in range(0, len(glyphs), 4))
            assert words == "not signed"
            embedded = font.DescendantFonts[0].FontDescriptor
            assert "/FontFile2" in embedded


def glyph_texts(cmap: str) -> dict[str, str]:
    pairs = re.findall(r"<([0-9a-f]{4})> <([0-9a-f]+)>", cmap.lower().split("endcodespacerange")[1])
    return {glyph: bytes.fromhex(text).decode("utf-16-be") for glyph, text in pairs}


def test_signature_fields_are_tagged_so_that_signing_keeps_the_tags(opened):
    with opened("balanced") as pdf:
        forms = [
            item for item in pdf.objects if isinstance(item, pikepdf.Dictionary) and item.get("/S") == "/Form"
        ]
        assert len(forms) == 3
        for form in forms:
            assert form.K.Type == "/OBJR"
            assert form.K.Obj.FT == "/Sig"


def test_the_cross_reference_is_a_plain_table_and_content_is_compressed(rendered):
    content = rendered("balanced").pdf
    assert b"/ObjStm" not in content
    assert b"\nxref\n" in content
    assert b"/Filter /FlateDecode" in content
    assert len(content) < 600_000


def test_study_data_and_findings_are_attached_with_fixed_dates(opened):
    wanted = {file.name: file for file in CASES["balanced"]().attachments}
    with opened("balanced") as pdf:
        assert list(pdf.attachments) == sorted(wanted)
        for name, spec in pdf.attachments.items():
            attached = spec.get_file()
            assert attached.read_bytes() == wanted[name].content
            assert attached.mime_type == wanted[name].media_type
            assert spec.obj.AFRelationship == f"/{wanted[name].relationship}"
            assert str(spec.obj.EF.F.Params.CreationDate) == "D:20261130095831Z"
            assert str(spec.obj.EF.F.Params.ModDate) == "D:20261130095831Z"
        assert len(pdf.Root.AF) == len(wanted)


def test_a_study_without_sign_off_has_no_fields(opened):
    with opened("single values") as pdf:
        assert "/AcroForm" not in pdf.Root


def test_a_role_that_signs_twice_has_two_fields():
    content = single_values()
    study = replace(content.study, sign_off=tuple(CASES["balanced"]().study.sign_off) * 2)
    with pikepdf.open(io.BytesIO(render_report(replace(content, study=study)).pdf)) as pdf:
        names = [str(field.T) for field in pdf.Root.AcroForm.Fields]
    assert names == ["author", "reviewer", "approver", "author-2", "reviewer-2", "approver-2"]


@pytest.mark.parametrize(("paper", "size"), [("A4", (595, 842)), ("Letter", (612, 792))])
def test_the_paper_is_the_laboratorys(paper, size):
    content = CASES["without scatter"]()
    laboratory = replace(content.laboratory, paper=paper)
    with pikepdf.open(io.BytesIO(render_report(replace(content, laboratory=laboratory)).pdf)) as pdf:
        box = [round(float(end)) for end in pdf.pages[0].mediabox]
    assert tuple(box[2:]) == size


def test_the_figures_beside_the_pdf_are_those_inside_it(rendered):
    names = [name for name, _ in rendered("balanced").figures]
    assert len(names) == len(set(names))
    assert {"values-1.svg", "residuals-order.svg", "residuals-mean.svg", "residuals-normal.svg"} <= set(names)
    assert all(svg.startswith(b"<svg xmlns=") for _, svg in rendered("balanced").figures)
