"""Tables with their layout worked out: widths from content, figures on the decimal point."""

import re
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

from assayfolio.report.notation import split_at_point
from assayfolio.report.prose import Prose, Words, as_prose, plain
from assayfolio.report.typeface import POINTS_PER_MM, figures_width, text_width

TEXT_WIDTH_MM = 164.0
_HEAD = 0.9  # of the size of the body
_GAP = 3.4
_EASY_TEXT = 34.0
_LEAST_TEXT = 24.0
_NARROWEST = 12.0
_MOST_SPARED = 36.0
_COMFORTABLE = 7.5
_COMFORTABLE_SIZES = (8.4, 8.0, 7.6)
_UNBROKEN_SIZES = (*_COMFORTABLE_SIZES, 7.2)
_SMALL_SIZES = (7.2, 6.8, 6.4, 6.0, 5.6)
_ZEBRA_FROM = 9
UNBROKEN_TO = 5

Kind = Literal["text", "number", "words"]


@dataclass(frozen=True, slots=True)
class Column:
    """A column as asked for: its head, the unit under the head, what it holds.

    "text" may wrap and gets what room is left, "words" never wraps, "number" stands on its decimal point.
    """

    head: Words
    unit: str = ""
    kind: Kind = "number"


@dataclass(frozen=True, slots=True)
class LaidOutColumn:
    """A column as it is set: its head, and its width in millimetres with the gap before it."""

    head: Prose
    unit: str
    kind: Kind
    width: str


@dataclass(frozen=True, slots=True)
class Cell:
    """A cell: its words, and how far a figure is moved from the right edge (a CSS length, or empty)."""

    words: Prose
    shift: str = ""


@dataclass(frozen=True, slots=True)
class Table:
    """A table ready to be set; the first column names the row.

    `groups` are heads above the heads, each over a number of columns; empty where there are none.
    """

    label: str
    caption: Prose
    columns: tuple[LaidOutColumn, ...]
    rows: tuple[tuple[Cell, ...], ...]
    notes: tuple[Prose, ...]
    width: str
    size: str
    zebra: bool
    unbroken: bool
    groups: tuple[tuple[Prose, int], ...] = ()


def lay_out(
    label: str,
    caption: Words,
    columns: Sequence[Column],
    rows: Sequence[Sequence[Words]],
    notes: Sequence[Words] = (),
    groups: Sequence[tuple[Words, int]] = (),
) -> Table:
    """The table of these rows, as wide as it needs and no wider than the text column.

    A table that is too wide for its column is set smaller, its text columns wrapping first. `groups` are
    heads over several columns each, from the left.
    """
    size, widths = _widths(columns, rows)
    cells = [_cells(column, [row[index] for row in rows], size) for index, column in enumerate(columns)]
    laid_out = tuple(
        LaidOutColumn(as_prose(column.head), column.unit, column.kind, _mm(width))
        for column, width in zip(columns, widths, strict=True)
    )
    return Table(
        label=label,
        caption=as_prose(caption),
        columns=laid_out,
        rows=tuple(zip(*cells, strict=True)),
        notes=tuple(as_prose(note) for note in notes),
        width=_mm(sum(widths)),
        size=f"{size:.2f}pt",
        zebra=len(rows) >= _ZEBRA_FROM,
        unbroken=len(rows) <= UNBROKEN_TO,
        groups=tuple((as_prose(words), span) for words, span in groups),
    )


def _mm(width: float) -> str:
    return f"{width:.2f}mm"


def fits(columns: Sequence[Column], rows: Sequence[Sequence[Words]], smallest: float = _COMFORTABLE) -> bool:
    """Whether a table of these rows fits in more than `smallest` points, text columns wrapped if need be."""
    return _widths(columns, rows)[0] > smallest


def _widths(columns: Sequence[Column], rows: Sequence[Sequence[Words]]) -> tuple[float, list[float]]:
    """The size of the type and the width of each column (gap included) in millimetres.

    First choice: no line breaks, set a little smaller if need be. Second: wrapped text. Last: ever smaller.
    """
    texts = [index for index, column in enumerate(columns) if column.kind == "text"]
    unbroken = [(size, float("inf")) for size in _UNBROKEN_SIZES]
    wrapped = [(size, _EASY_TEXT) for size in _COMFORTABLE_SIZES]
    crowded = [(size, _LEAST_TEXT) for size in _SMALL_SIZES]
    for size, least in (*unbroken, *wrapped, *crowded):
        widths = [
            _natural(column, [row[index] for row in rows], size) + (_GAP if index else 0.0)
            for index, column in enumerate(columns)
        ]
        room = TEXT_WIDTH_MM - sum(width for index, width in enumerate(widths) if index not in texts)
        wanted = sum(widths[index] for index in texts)
        if wanted <= room:
            return size, widths
        if room >= least * len(texts) or (size, least) == crowded[-1]:
            words = [_least(columns[index], [row[index] for row in rows], size) for index in texts]
            shares = _shared(room, [widths[index] for index in texts], words)
            for index, width in zip(texts, shares, strict=True):
                widths[index] = width
            return size, widths
    raise AssertionError("the last choice is always taken")


def _least(column: Column, cells: Sequence[Words], size: float) -> float:
    """The width below which a text column breaks words, gap included; very long words are not spared."""
    words = [word for cell in cells for word in re.split(r"[ \-–]", plain(cell))]
    widest = max((text_width(word, size) for word in words), default=0.0)
    head = _word_width(column.head, column.kind, size * _HEAD)
    return min(_MOST_SPARED, max(_NARROWEST, (max(widest, head) + 6.0) / POINTS_PER_MM + _GAP))


def _shared(room: float, wanted: list[float], least: list[float]) -> list[float]:
    """`room` shared in proportion to what is wanted, none narrower than its least, as far as it goes."""
    narrow = [False] * len(wanted)
    while True:
        rest = room - sum(width for width, is_narrow in zip(least, narrow, strict=True) if is_narrow)
        wide = sum(width for width, is_narrow in zip(wanted, narrow, strict=True) if not is_narrow)
        if not wide or rest <= 0:
            return [max(1.0, room / len(wanted))] * len(wanted)
        now = [
            is_narrow or width * rest / wide < at_least
            for width, is_narrow, at_least in zip(wanted, narrow, least, strict=True)
        ]
        if now == narrow:
            break
        narrow = now
    return [
        at_least if is_narrow else width * rest / wide
        for width, is_narrow, at_least in zip(wanted, narrow, least, strict=True)
    ]


def _natural(column: Column, cells: Sequence[Words], size: float) -> float:
    head_size = size * _HEAD
    head = max(_word_width(column.head, column.kind, head_size), text_width(column.unit, head_size))
    if column.kind == "number":
        parts = [split_at_point(plain(cell)) for cell in cells]
        whole = max((figures_width(before, size) for before, _ in parts), default=0.0)
        rest = max((figures_width(after, size) for _, after in parts), default=0.0)
        body = whole + rest
    else:
        body = max((text_width(plain(cell), size) for cell in cells), default=0.0)
    return (max(head, body) + 1.0) / POINTS_PER_MM


def _word_width(head: Words, kind: Kind, size: float) -> float:
    words = plain(head).split(" ") if kind != "words" else [plain(head)]
    return max(text_width(word, size, "semibold") for word in words)


def _cells(column: Column, cells: Sequence[Words], size: float) -> list[Cell]:
    if column.kind != "number":
        return [Cell(as_prose(cell)) for cell in cells]
    rests = [figures_width(split_at_point(plain(cell))[1], size) for cell in cells]
    widest = max(rests, default=0.0)
    return [
        Cell(as_prose(cell), f"{widest - rest:.2f}pt" if widest - rest > 0.05 and plain(cell) else "")
        for cell, rest in zip(cells, rests, strict=True)
    ]
