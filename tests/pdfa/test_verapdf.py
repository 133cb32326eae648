"""The validator that other tests rely on tells conforming files from others, profile by profile."""

import pytest

from pdfa.verapdf import validate

pytestmark = [pytest.mark.needs("verapdf"), pytest.mark.slow]

PAGE = """<!doctype html><html lang="en"><head><title>Control</title>
<style>@font-face {{ font-family: Inter; src: url({font}) }} body {{ font-family: Inter }}</style></head>
<body><h1>Control</h1><p>One paragraph.</p></body></html>"""


@pytest.fixture
def write_page(tmp_path, fonts_folder):
    from weasyprint import HTML

    def write(variant: str | None):
        path = tmp_path / "page.pdf"
        page = PAGE.format(font=(fonts_folder / "Inter-Regular.ttf").as_uri())
        HTML(string=page).write_pdf(path, pdf_variant=variant)
        return path

    return write


def profiles_failed(path) -> set[str]:
    return {failure.profile for failure in validate(path, profiles=("3a", "3b", "ua1"))}


def test_a_plain_file_fails_every_profile(write_page):
    assert profiles_failed(write_page(None)) == {"3a", "3b", "ua1"}


def test_an_untagged_archive_file_passes_3b_alone(write_page):
    assert profiles_failed(write_page("pdf/a-3b")) == {"3a", "ua1"}


def test_an_accessible_file_passes_ua1_alone(write_page):
    assert profiles_failed(write_page("pdf/ua-1")) == {"3a", "3b"}


def test_a_tagged_archive_file_lacks_only_the_ua_identifier(write_page):
    failures = validate(write_page("pdf/a-3a"))
    assert [(failure.profile, failure.rule) for failure in failures] == [("ua1", "5-1")]


def test_something_else_than_a_pdf_fails(tmp_path):
    path = tmp_path / "note.pdf"
    path.write_text("not a PDF\n")
    assert profiles_failed(path) == {"3a", "3b", "ua1"}
