"""The worksheet on paper: the measuring order with room to write by hand."""

from dataclasses import dataclass

from assayfolio.report.pages import html_from
from assayfolio.report.pdf import PAPERS, Look, lay_out, write
from assayfolio.study.plan import Laboratory
from assayfolio.worksheet.columns import Role, Sheet

_TEMPLATE = "worksheet.html.j2"
_ATTACHES_NOTHING = "1980-01-01T00:00:00Z"  # the date of attachments, of which a worksheet has none
_WANTED_MM: dict[Role, float] = {
    "position": 15,
    "block": 21,
    "item": 22,
    "level": 34,
    "replicate": 16,
    "result": 30,
    "unit": 18,
    "fact": 26,
}
_MARGINS_MM = 26.0 + 20.0  # as in the template
_TAKES_THE_REST: tuple[Role, ...] = ("level", "result", "fact")


@dataclass(frozen=True, slots=True)
class WorksheetPage:
    """What the paper says: who, what, how the order came about, and the sheet itself.

    `block_starts` are the rows (from zero) with which a block begins.
    """

    study: str
    title: str
    laboratory: Laboratory
    facts: tuple[str, ...]
    sheet: Sheet
    block_starts: frozenset[int]
    order_sha256: str
    generator: str


@dataclass(frozen=True, slots=True)
class _Head:
    """The head of one column."""

    name: str
    unit: str | None
    width: str
    blank: bool


def worksheet_pdf(page: WorksheetPage) -> bytes:
    """The worksheet as a PDF file: the same bytes for the same input, everywhere.

    Raises RenderingError where it cannot be set exactly as written.
    """
    look = Look(page.laboratory.paper, page.laboratory.accent)
    narrow, wide = (side - _MARGINS_MM for side in PAPERS[look.paper])
    upright = sum(_WANTED_MM[column.role] for column in page.sheet.columns) <= narrow
    widths = _widths(page.sheet, narrow if upright else wide)
    html = html_from(
        _TEMPLATE,
        page=page,
        orientation="portrait" if upright else "landscape",
        heads=[
            _Head(column.name, column.unit, f"{width:.2f}mm", column.to_fill_in)
            for column, width in zip(page.sheet.columns, widths, strict=True)
        ],
    )
    return write(lay_out(html, {}, look), (), _ATTACHES_NOTHING)


def _widths(sheet: Sheet, room: float) -> list[float]:
    """The width of each column in millimetres: together the room there is, more of it for what is written."""
    wanted = [_WANTED_MM[column.role] for column in sheet.columns]
    spare = room - sum(wanted)
    if spare < 0:
        return [width * room / sum(wanted) for width in wanted]
    growing = sum(
        width for column, width in zip(sheet.columns, wanted, strict=True) if column.role in _TAKES_THE_REST
    )
    return [
        width + (spare * width / growing if column.role in _TAKES_THE_REST else 0)
        for column, width in zip(sheet.columns, wanted, strict=True)
    ]
