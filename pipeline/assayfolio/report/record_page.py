"""A record of the laboratory on paper: what was done in a re-run, a sweep, a copy, and what came of it."""

from dataclasses import dataclass, replace

from assayfolio.characters import is_settable
from assayfolio.report.pages import html_from
from assayfolio.report.pdf import Look, lay_out, write

_TEMPLATE = "record.html.j2"
PLAIN = Look("A4", "#0f5b66")
"""The look of a record that no laboratory's settings go with."""


@dataclass(frozen=True, slots=True)
class RecordFact:
    """One line of facts: what, its value, and the SHA-256 that goes with it."""

    what: str
    value: str
    digest: str = ""


@dataclass(frozen=True, slots=True)
class RecordTable:
    """A table: (head, width in per cent) of each column, and rows of as many texts."""

    columns: tuple[tuple[str, int], ...]
    rows: tuple[tuple[str, ...], ...]


@dataclass(frozen=True, slots=True)
class RecordSection:
    """A section: its title, paragraphs, and what stands under them."""

    title: str
    paragraphs: tuple[str, ...] = ()
    facts: tuple[RecordFact, ...] = ()
    table: RecordTable | None = None


@dataclass(frozen=True, slots=True)
class RecordPage:
    """What the paper says. `created` is RFC 3339 in UTC; `laboratory` may be empty where none is known.

    `box` is the one thing to be read: what it came to. Characters that the font cannot set appear as their
    code, "[U+4E2D]".
    """

    kind: str
    title: str
    number: str
    laboratory: str
    created: str
    generator: str
    box: str
    box_notes: tuple[str, ...]
    sections: tuple[RecordSection, ...]
    foot: str
    look: Look = PLAIN


def record_pdf(page: RecordPage) -> bytes:
    """The record as a PDF file: the same bytes for the same input, everywhere.

    Raises RenderingError where it cannot be set exactly as written.
    """
    settable = replace(
        page,
        title=shown(page.title),
        number=shown(page.number),
        laboratory=shown(page.laboratory),
        box=shown(page.box),
        box_notes=tuple(shown(note) for note in page.box_notes),
        sections=tuple(_section(section) for section in page.sections),
        foot=shown(page.foot),
    )
    return write(lay_out(html_from(_TEMPLATE, page=settable), {}, page.look), (), page.created)


def _section(section: RecordSection) -> RecordSection:
    table = section.table
    return RecordSection(
        shown(section.title),
        tuple(shown(text) for text in section.paragraphs),
        tuple(RecordFact(shown(one.what), shown(one.value), one.digest) for one in section.facts),
        None
        if table is None
        else RecordTable(table.columns, tuple(tuple(shown(cell) for cell in row) for row in table.rows)),
    )


def shown(text: str) -> str:
    """`text` with every character that the font cannot set replaced by its code; line ends stay."""
    return "".join(one if one == "\n" or is_settable(one) else f"[U+{ord(one):04X}]" for one in text)
