"""What reading hands to the policies: each value as it was received, still text, with its place.

Reading (`reading`, `layout`) makes one `Received` of each row in the long layout and of each cell of a level
in the wide one. It has refused what is no row; it has looked at no number, unit, limit or order, and compared
no level with the plan. `assembling` does that, and adds to the same faults.
"""

from collections.abc import Iterator
from dataclasses import dataclass
from typing import NamedTuple, Protocol

Spot = tuple[int, int]


class SheetRow(Protocol):
    """One row of a table, of text or of a spreadsheet: the line it starts on, and its cells."""

    @property
    def line(self) -> int:
        """The line of a text or the row of a spreadsheet, from one."""

    @property
    def cells(self) -> list[str]:
        """The cells as typed, blanks included."""

    def spot(self, index: int) -> Spot:
        """Line and column, from one, of the cell number `index` (from zero), for a fault.

        The column is that of the first character in a text, and that of the cell in a spreadsheet.
        """


@dataclass(frozen=True, slots=True)
class Columns:
    """The positions (from zero) in a row of the cells that the plan names; None where it names none.

    `level` is None in the wide layout, where the header names the level. `responses` are in the order of the
    plan, `measurement` in the order of those facts that stand in a column.
    """

    responses: tuple[int, ...]
    level: int | None
    order: int | None = None
    unit: int | None = None
    replicate_unit: int | None = None
    measurement: tuple[int, ...] = ()


class Received(NamedTuple):
    """One row of values as received. A named tuple, since one is made for each of perhaps a million rows.

    `file` is the position of the file, `line` that of the row, `column` the number of the table's column that
    holds the first response, from one. `texts` holds the cell of each response and `measurement` that of each
    fact with a column, both as typed. `extras` is in the order of `ReceivedRows.extra_columns`. `row.spot` of
    a position in `columns` gives the place for a fault.
    """

    file: int
    line: int
    column: int
    level: str
    texts: tuple[str, ...]
    extras: tuple[str, ...]
    order: str | None
    unit: str | None
    replicate_unit: str | None
    measurement: tuple[str, ...]
    row: SheetRow
    columns: Columns

    @property
    def level_spot(self) -> Spot:
        """Where the level stands: its cell, or in the wide layout the cell of the value."""
        at = self.columns.level
        return self.row.spot(self.columns.responses[0] if at is None else at)

    def level_place(self) -> tuple[int, int, int]:
        """The file, and line and column of the level in it."""
        return self.file, *self.level_spot


@dataclass(frozen=True, slots=True)
class ReceivedRows:
    """All rows of all files, in their order, to be gone through once.

    `extra_columns` are the columns that are neither a response nor the factor nor the measuring order, each
    once, in order of first appearance in the files; a file without one of them has blanks there.
    """

    extra_columns: tuple[str, ...]
    rows: Iterator[Received]

    def __iter__(self) -> Iterator[Received]:
        """The rows, in the order of the files."""
        return self.rows
