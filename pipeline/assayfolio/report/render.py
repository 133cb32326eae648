"""The one entry: from the input of a report to its PDF and its figures."""

from dataclasses import dataclass

from assayfolio.errors import RenderingError
from assayfolio.report.compose import compose
from assayfolio.report.content import ReportContent
from assayfolio.report.facts import ReportInput
from assayfolio.report.pages import first_pages_of, html_of
from assayfolio.report.pdf import LaidOut, Look, lay_out, write

_MOST_CARDS = 6
_USUALLY_FIT = 4
_FIRST_PAGE_FULL = (
    "the first page cannot hold title, sign-off and cautions; shorten the title, the laboratory's address "
    "or the meanings of the signatures"
)


@dataclass(frozen=True, slots=True)
class RenderedReport:
    """The PDF, and the figures in it as SVG files by name, in the order of the pages."""

    pdf: bytes
    figures: tuple[tuple[str, bytes], ...]


def render_report(content: ReportInput) -> RenderedReport:
    """The report on `content`: the same bytes for the same input, everywhere.

    Raises RenderingError where the report cannot be set exactly as written.
    """
    composed = compose(content)
    pictures = {picture.name: picture.svg for picture in composed.pictures}
    laid_out = _lay_out_whole(composed, pictures, Look(content.laboratory.paper, content.laboratory.accent))
    pdf = write(laid_out, content.attachments, content.run.started_utc)
    return RenderedReport(pdf, tuple(pictures.items()))


def _lay_out_whole(composed: ReportContent, pictures: dict[str, bytes], look: Look) -> LaidOut:
    """The whole report with as many cards on the first page as it holds."""
    total = len(composed.cards)
    if total <= _USUALLY_FIT:
        laid_out = lay_out(html_of(composed, total), pictures, look)
        if laid_out.first_page_fits:
            return laid_out
    for count in range(min(total, _MOST_CARDS), -1, -1):
        # The pages of answers alone tell how many cards fit, at a tenth of the time.
        if lay_out(first_pages_of(composed, count), pictures, look).first_page_fits:
            laid_out = lay_out(html_of(composed, count), pictures, look)
            if laid_out.first_page_fits:
                return laid_out
    raise RenderingError(_FIRST_PAGE_FULL)
