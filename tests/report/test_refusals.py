"""A report is issued exactly as written or not at all."""

import logging
import warnings
from dataclasses import replace

import pytest

from assayfolio.errors import MachineError, RenderingError
from assayfolio.report import fetching, pages, pdf, render
from assayfolio.report.content import ReportContent
from assayfolio.report.fetching import make_fetcher
from report.cases import CASES

LOOK = pdf.Look("A4", "#0f5b66")


def lay_out(body: str, pictures: dict[str, bytes] | None = None) -> pdf.LaidOut:
    html = f'<html lang="en"><head><title>x</title></head><body>{body}</body></html>'
    return pdf.lay_out(html, pictures or {}, LOOK)


@pytest.mark.parametrize(
    "address",
    [
        "https://example.org/logo.png",
        "http://127.0.0.1/logo.png",
        "file:///etc/passwd",
        "data:image/png;base64,AAAA",
        "figure:another.svg",
        "font:../../../etc/passwd",
        "font:Inter-Regular.ttf.bak",
        "ftp://example.org/x",
    ],
)
def test_the_renderer_gets_nothing_but_the_reports_own_parts(address):
    with pytest.raises(RenderingError, match="is not part of it"):
        make_fetcher({"one.svg": b"<svg/>"}).fetch(address)


@pytest.mark.parametrize(
    "body",
    [
        '<img src="file:///etc/hostname" alt="x">',
        '<img src="https://example.org/x.png" alt="x">',
        '<link rel="stylesheet" href="https://example.org/x.css">',
        '<p style="background: url(https://example.org/x.png)">x</p>',
        "<style>@font-face { font-family: X; src: url(file:///usr/share/fonts/x.ttf) }</style><p>x</p>",
    ],
)
def test_a_page_that_asks_for_something_else_is_not_set(body):
    with pytest.raises(RenderingError):
        lay_out(body)


def test_the_shipped_fonts_and_the_pictures_are_served():
    fetcher = make_fetcher({"one.svg": b"<svg/>"})
    assert fetcher.fetch("figure:one.svg").read() == b"<svg/>"
    assert fetcher.fetch("font:Inter-Regular.ttf").read()[:4] == b"\x00\x01\x00\x00"


def test_a_line_that_the_renderer_logs_fails_the_rendering(monkeypatch):
    whole = render.lay_out

    def logging_lay_out(*arguments):
        with pdf.strict():
            logging.getLogger("weasyprint").warning("something was left out")
        return whole(*arguments)

    monkeypatch.setattr(render, "lay_out", logging_lay_out)
    with pytest.raises(RenderingError, match="something was left out"):
        render.render_report(CASES["without scatter"]())


def test_a_warning_fails_the_rendering():
    with pytest.raises(RenderingError, match="something is odd"), pdf.strict():
        warnings.warn("something is odd", UserWarning, stacklevel=1)


def test_a_property_that_the_renderer_does_not_know_fails_the_rendering():
    with pytest.raises(RenderingError, match="exactly as written"):
        lay_out('<p style="colour: red">x</p>')


def test_the_loggers_are_left_as_they_were():
    logger = logging.getLogger("weasyprint")
    before = (list(logger.handlers), logger.propagate, logger.level)
    lay_out("<p>x</p>")
    assert (list(logger.handlers), logger.propagate, logger.level) == before


@pytest.mark.requirement("RERUN-5")
def test_a_character_that_the_font_lacks_fails_the_rendering():
    with pytest.raises(RenderingError, match=r"U\+4E2D"):
        pdf.write(lay_out("<p>中</p>"), (), "2026-11-30T09:58:31Z")


def test_a_machine_without_the_font_subsetter_is_told_what_to_install(monkeypatch):
    from weasyprint.pdf import fonts

    monkeypatch.setattr(fonts, "harfbuzz_subset", None)
    with pytest.raises(MachineError, match="apt install libharfbuzz-subset0"):
        render.render_report(CASES["without scatter"]())


def test_an_accent_that_is_no_colour_is_refused():
    content = CASES["without scatter"]()
    laboratory = replace(content.laboratory, accent="red; } body { display: none")
    with pytest.raises(RenderingError, match="not a colour"):
        render.render_report(replace(content, laboratory=laboratory))


def test_findings_about_other_data_are_refused():
    content = CASES["balanced"]()
    fewer = replace(content.observations[0], rows=content.observations[0].rows[1:])
    with pytest.raises(RenderingError, match="do not count the same values"):
        render.render_report(replace(content, observations=(fewer,)))


def test_observations_of_another_response_are_refused():
    content = CASES["two responses"]()
    swapped = tuple(reversed(content.observations))
    with pytest.raises(RenderingError, match="not about the same response"):
        render.render_report(replace(content, observations=swapped))


def test_a_response_without_its_observations_is_refused():
    content = CASES["two responses"]()
    with pytest.raises(RenderingError, match="findings are on 2 responses, the observations on 1"):
        render.render_report(replace(content, observations=content.observations[:1]))


def test_a_first_page_that_cannot_hold_what_it_must_is_refused():
    content = CASES["without scatter"]()
    study = replace(content.study, title="A title that never ends " * 60)
    with pytest.raises(RenderingError, match="first page cannot hold"):
        render.render_report(replace(content, study=study))


def test_a_name_with_template_code_is_not_run_as_code():
    content = CASES["long names"]()
    html = pages.html_of(render.compose(content), 2)
    assert "{{ 7 * 7 }}" in html
    assert "&lt;script&gt;" in html
    assert "<script" not in html


def test_a_template_that_asks_for_what_is_not_there_is_a_rendering_error():
    with pytest.raises(RenderingError, match="template is faulty"):
        pages.html_of(_Hollow(), 1)  # type: ignore[arg-type]


class _Hollow(ReportContent):
    """Content without anything in it."""

    def __init__(self) -> None:
        object.__setattr__(self, "cards", ())
        object.__setattr__(self, "sections", ())

    def __getattr__(self, name: str) -> object:
        raise AttributeError(name)


def test_fonts_are_declared_by_name_alone():
    assert "file:" not in fetching.font_faces()
