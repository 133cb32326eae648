"""The content of a report: all words and digits final, in the order of the pages. Templates only loop."""

from dataclasses import dataclass
from typing import Literal

from assayfolio.report.figures import Picture
from assayfolio.report.prose import Prose
from assayfolio.report.tables import Table


@dataclass(frozen=True, slots=True)
class Paragraph:
    """A paragraph; `manner` is "body", "note" or "lead"."""

    words: Prose
    manner: str = "body"
    kind: Literal["paragraph"] = "paragraph"


@dataclass(frozen=True, slots=True)
class Heading:
    """A heading below that of the section."""

    words: Prose
    anchor: str = ""
    kind: Literal["heading"] = "heading"


@dataclass(frozen=True, slots=True)
class TableBlock:
    """A table."""

    table: Table
    kind: Literal["table"] = "table"


@dataclass(frozen=True, slots=True)
class FigureBlock:
    """Pictures side by side under one label and caption."""

    label: str
    pictures: tuple[Picture, ...]
    caption: Prose
    kind: Literal["figure"] = "figure"

    @property
    def half(self) -> bool:
        """Whether the one picture leaves room for its caption beside it."""
        return len(self.pictures) == 1 and self.pictures[0].width_mm < 82


@dataclass(frozen=True, slots=True)
class Entry:
    """One line of a list of facts: what, its value, and the SHA-256 that goes with it."""

    what: Prose
    value: Prose
    digest: str = ""


@dataclass(frozen=True, slots=True)
class Facts:
    """Facts as a two-column list."""

    entries: tuple[Entry, ...]
    kind: Literal["facts"] = "facts"


@dataclass(frozen=True, slots=True)
class Items:
    """A list of sentences or references."""

    items: tuple[Prose, ...]
    kind: Literal["items"] = "items"


@dataclass(frozen=True, slots=True)
class Quotient:
    """A fraction in a formula."""

    above: Prose
    below: Prose


@dataclass(frozen=True, slots=True)
class Formula:
    """A formula on its own line: prose and fractions in turn, and what it gives, at left."""

    what: Prose
    parts: tuple[tuple[Prose, Quotient | None], ...]
    kind: Literal["formula"] = "formula"


@dataclass(frozen=True, slots=True)
class ListingRow:
    """One row of the listing: the level (on its first row), and line number, value, shift for each value."""

    level: str
    count: str
    values: tuple[tuple[str, str, str], ...]
    gaps: int


@dataclass(frozen=True, slots=True)
class Listing:
    """The raw data: by level, in the order of the file, each value beside the number of its line."""

    label: str
    caption: Prose
    rows: tuple[ListingRow, ...]
    level_width: str
    value_width: str
    line_width: str
    per_row: int
    unbroken: bool
    kind: Literal["listing"] = "listing"


Block = Paragraph | Heading | TableBlock | FigureBlock | Facts | Items | Formula | Listing


@dataclass(frozen=True, slots=True)
class Section:
    """A numbered section of the report."""

    anchor: str
    number: int
    title: str
    blocks: tuple[Block, ...]


@dataclass(frozen=True, slots=True)
class Card:
    """One planned question with its answer. `picture` shows the estimates on a scale all cards share."""

    family: Prose
    question: Prose
    verdict: str
    lines: tuple[Prose, ...]
    caution: Prose
    picture: Picture | None
    section: int
    anchor: str


@dataclass(frozen=True, slots=True)
class SummaryLine:
    """One line under the answers, leading to its section."""

    what: str
    words: Prose
    section: int
    anchor: str


@dataclass(frozen=True, slots=True)
class SignatureBox:
    """Room for one signature: the name of its field, the role as printed, and what signing means."""

    field: str
    role: str
    meaning: str


@dataclass(frozen=True, slots=True)
class ReportContent:
    """A whole report."""

    title: str
    document_title: str
    laboratory: str
    address: str
    laboratory_note: str
    number: str
    created: str
    generator: str
    standing: str
    facts: tuple[Prose, ...]
    cards: tuple[Card, ...]
    summary: tuple[SummaryLine, ...]
    sign_off: tuple[SignatureBox, ...]
    sign_off_words: str
    meaning_height: str
    cautions: Prose
    head_left: str
    head_right: str
    foot_left: str
    registration: str
    is_calm: bool
    digest: str
    sections: tuple[Section, ...]
    end_mark: str

    @property
    def pictures(self) -> tuple[Picture, ...]:
        """All pictures in the order of the pages."""
        in_cards = [card.picture for card in self.cards if card.picture is not None]
        in_sections = [
            picture
            for section in self.sections
            for block in section.blocks
            if isinstance(block, FigureBlock)
            for picture in block.pictures
        ]
        return (*in_cards, *in_sections)
