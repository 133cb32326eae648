"""The same results under two or more analyses, side by side, or one below the other where they are wide."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

from assayfolio.report.numbering import Numbering
from assayfolio.report.prose import Prose, Words, as_prose
from assayfolio.report.tables import Column, Table, fits, lay_out
from assayfolio.report.wording import BLANK

_SMALLEST = 7.0  # points: such tables are for looking up, and a row across both sides is worth small type


@dataclass(frozen=True, slots=True)
class Side:
    """One analysis: what it is called, and its cells in each row, by the label of the row."""

    name: str
    cells: Mapping[str, Sequence[Words]]


def side_by_side(
    numbering: Numbering,
    caption: Prose,
    first: Words,
    columns: Sequence[Column],
    sides: Sequence[Side],
    notes: Sequence[Words] = (),
) -> Table:
    """A table with the columns of each side next to one another, or a row a side where that is too wide.

    A row that a side does not have is a row of dashes there.
    """
    labels = list(dict.fromkeys(label for side in sides for label in side.cells))
    blank: list[Words] = [BLANK] * len(columns)
    head = Column(first, kind="text")
    rows: list[list[Words]] = [
        [label, *(cell for side in sides for cell in side.cells.get(label, blank))] for label in labels
    ]
    if len(columns) == 1:
        single = [head, *(replace(columns[0], head=side.name) for side in sides)]
        return lay_out(numbering.table(), caption, single, rows, notes)
    beside = [head, *(column for _ in sides for column in columns)]
    if fits(beside, rows, _SMALLEST):
        groups: list[tuple[Words, int]] = [("", 1), *((side.name, len(columns)) for side in sides)]
        return lay_out(numbering.table(), caption, beside, rows, notes, groups)
    below = [head, Column("Analysis", kind="words"), *columns]
    stacked: list[list[Words]] = [
        [label if not at else "", side.name, *side.cells.get(label, blank)]
        for label in labels
        for at, side in enumerate(sides)
    ]
    return lay_out(numbering.table(), caption, below, stacked, notes)


def by_analysis(
    numbering: Numbering, caption: Words, columns: Sequence[Column], sides: Sequence[tuple[str, list[Words]]]
) -> Table:
    """A table with a row for each analysis."""
    rows: list[list[Words]] = [[name, *cells] for name, cells in sides]
    return lay_out(numbering.table(), as_prose(caption), [Column("Analysis", kind="text"), *columns], rows)
