"""The cells of one sheet of a workbook, as stored, and what a person who looks at it cannot see.

openpyxl's read-only mode tells neither hidden rows nor merged cells, nor a formula beside its stored value,
nor how a number is stored; so the part is gone through here.
"""

import re
from dataclasses import dataclass, field

from assayfolio.errors import DataError
from assayfolio.observations.faults import column_letters, refusal
from assayfolio.observations.rows import MAX_CELL, MAX_COLUMNS
from assayfolio.observations.workbook_package import Package
from assayfolio.observations.workbook_parts import is_true
from assayfolio.observations.workbook_xml import End, Start, walk
from assayfolio.study.faults import shown

LAST_ROW = 1_048_576
LAST_COLUMN = 16_384
MOST_MERGED = 10_000

_REFERENCE = re.compile(r"\$?([A-Z]{1,3})\$?([0-9]{1,7})\Z")
_WHOLE = re.compile(r"[0-9]{1,7}\Z")


@dataclass(slots=True)
class StoredCell:
    """A cell as stored: its type, the number of its style, its text, whether a formula stands behind it.

    `text` is None where a formula has no stored value.
    """

    kind: str
    style: int
    text: str | None
    formula: bool


@dataclass(slots=True)
class StoredSheet:
    """The cells of a sheet that hold anything, by row and column, and what is hidden or merged.

    `merged` holds first row, first column, last row, last column of each merged area, `hidden_columns` first
    and last column of each hidden stretch. All count from one.
    """

    rows: dict[int, dict[int, StoredCell]] = field(default_factory=dict)
    hidden_rows: set[int] = field(default_factory=set)
    hidden_columns: list[tuple[int, int]] = field(default_factory=list)
    merged: list[tuple[int, int, int, int]] = field(default_factory=list)


def read_sheet(package: Package, part: str, file: str) -> StoredSheet:
    """The cells of the sheet in `part`.

    Raises DataError where the part is damaged, holds a value beyond column 2,000 or a cell of more than
    10,000 characters, or hides rows unless they say otherwise.
    """
    reader = _Reader(package, file)
    walk(package, part, reader.starts(), reader.ends(), reader.text)
    return reader.sheet


class _Reader:
    """Takes the events of a sheet's XML."""

    def __init__(self, package: Package, file: str) -> None:
        self.sheet = StoredSheet()
        self._package = package
        self._file = file
        self._row = 0
        self._row_digits = "0"
        self._column = 0
        self._columns: dict[str, int] = {}
        self._cells: dict[int, StoredCell] = {}
        self._kind = ""
        self._style = ""
        self._parts: list[str] = []
        self._size = 0
        self._formula = False
        self._taking = False
        self._phonetic = False

    def starts(self) -> dict[str, Start]:
        """What to do where an element begins."""
        return {
            "c": self._start_cell,
            "v": self._start_value,
            "t": self._start_text,
            "f": self._start_formula,
            "row": self._start_row,
            "rPh": self._start_hint,
            "mergeCell": self._take_merged,
            "col": self._take_column,
            "sheetFormatPr": self._take_format,
        }

    def ends(self) -> dict[str, End]:
        """What to do where an element ends."""
        return {"c": self._end_cell, "v": self._end_text, "t": self._end_text, "rPh": self._end_hint}

    def text(self, text: str) -> None:
        """A stretch of text."""
        if self._taking:
            self._size += len(text)
            if self._size > MAX_CELL:
                found = f"a cell of more than {MAX_CELL:,} characters"
                raise self._refused(found, "shorten it or delete the column")
            self._parts.append(text)

    def _start_value(self, _: dict[str, str]) -> None:
        self._taking = True

    def _start_text(self, _: dict[str, str]) -> None:
        self._taking = self._kind == "inlineStr" and not self._phonetic

    def _end_text(self) -> None:
        self._taking = False

    def _start_formula(self, _: dict[str, str]) -> None:
        self._formula = True

    def _start_hint(self, _: dict[str, str]) -> None:
        self._phonetic = True

    def _end_hint(self) -> None:
        self._phonetic = False

    def _take_format(self, given: dict[str, str]) -> None:
        if is_true(given.get("zeroHeight")):
            found = "the rows of this sheet are hidden unless they say otherwise"
            raise refusal(self._file, found, "show all rows and save the workbook again")

    def _start_row(self, given: dict[str, str]) -> None:
        number = given.get("r")
        row = self._row + 1 if number is None else self._whole(number)
        if not self._row < row <= LAST_ROW:
            raise self._package.damaged(f"row {row} below row {self._row}")
        self._row, self._column, self._row_digits = row, 0, str(row)
        self._cells = {}
        if is_true(given.get("hidden")) or _is_nought(given.get("ht")):
            self.sheet.hidden_rows.add(row)

    def _start_cell(self, given: dict[str, str]) -> None:
        reference = given.get("r")
        column = self._column + 1 if reference is None else self._column_of(reference)
        if not self._column < column <= LAST_COLUMN:
            raise self._package.damaged(f"cell {reference} behind column {self._column}")
        self._column = column
        self._kind, self._style = given.get("t", "n"), given.get("s", "0")
        self._parts, self._size, self._formula = [], 0, False

    def _end_cell(self) -> None:
        text = "".join(self._parts)
        if not text and not self._formula:
            return
        if self._column > MAX_COLUMNS:
            raise self._refused(
                f"more than {MAX_COLUMNS:,} columns", "leave out columns that the study does not need"
            )
        if not self._cells:
            self.sheet.rows[self._row] = self._cells
        stored = text if text or self._kind == "str" else None  # only a text can be stored as nothing
        cell = StoredCell(self._kind, self._whole(self._style), stored, self._formula)
        self._cells[self._column] = cell

    def _column_of(self, reference: str) -> int:
        """The column of a cell of the present row."""
        letters = reference.removesuffix(self._row_digits)
        column = self._columns.get(letters)
        if column is None:
            column, row = self._position(reference)
            if row != self._row:
                raise self._package.damaged(f"cell {shown(reference)} in row {self._row}")
            self._columns[letters] = column
        return column

    def _take_merged(self, given: dict[str, str]) -> None:
        first, _, last = given.get("ref", "").partition(":")
        (left, top), (right, bottom) = self._position(first), self._position(last or first)
        if len(self.sheet.merged) == MOST_MERGED:
            raise self._package.damaged(f"more than {MOST_MERGED:,} merged areas")
        self.sheet.merged.append((top, left, bottom, right))

    def _take_column(self, given: dict[str, str]) -> None:
        if is_true(given.get("hidden")) or _is_nought(given.get("width")):
            stretch = self._whole(given.get("min", "")), self._whole(given.get("max", ""))
            self.sheet.hidden_columns.append(stretch)

    def _position(self, reference: str) -> tuple[int, int]:
        """Column and row, from one, of a reference such as C4."""
        match = _REFERENCE.match(reference)
        if match is None:
            raise self._package.damaged(f"{shown(reference)} is no cell")
        column = 0
        for letter in match[1]:
            column = column * 26 + ord(letter) - ord("A") + 1
        return column, int(match[2])

    def _whole(self, text: str) -> int:
        if not _WHOLE.match(text):
            raise self._package.damaged(f"{shown(text)} where a number is wanted")
        return int(text)

    def _refused(self, found: str, advice: str) -> DataError:
        place = f"cell {column_letters(self._column)}{self._row}: {found}"
        return refusal(self._file, place, advice, self._row, self._column)


def _is_nought(measure: str | None) -> bool:
    """Whether a height or width is nought."""
    return measure is not None and not measure.strip("0.")
