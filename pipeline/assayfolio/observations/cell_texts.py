"""The cells of a sheet as text: numbers by their shortest decimal, texts as typed, dates in ISO 8601."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field

from assayfolio.observations.faults import cell_name
from assayfolio.observations.rows import MAX_CELL
from assayfolio.observations.sheet_cells import StoredCell
from assayfolio.observations.workbook_numbers import NotTakenError, moment, shortest
from assayfolio.observations.workbook_parts import Shown

_LISTED_CELLS = 5


@dataclass(slots=True)
class CellTexts:
    """Turns stored cells into text, and remembers which of them look otherwise in a spreadsheet program.

    `mark` is the decimal mark that the plan declares; numbers are given with it.
    """

    shared: list[str]
    formats: list[Shown]
    from_1904: bool
    mark: str
    formulas: list[str] = field(default_factory=list)
    percents: list[str] = field(default_factory=list)

    def of(self, cell: StoredCell, row: int, column: int) -> str:
        """The text of a cell. Raises NotTakenError where it cannot be taken."""
        if cell.text is None:
            advice = (
                "open and save the workbook in a spreadsheet program, or put the value in the formula's place"
            )
            raise NotTakenError("a formula without a stored value", advice)
        if cell.formula:
            self.formulas.append(cell_name(row, column))
        text = self._plain(cell, cell.text, row, column)
        if len(text) > MAX_CELL:
            found = f"a cell of {len(text):,} characters, more than {MAX_CELL:,}"
            raise NotTakenError(found, "shorten it or delete the column")
        return text

    def notices(self) -> Iterator[str]:
        """What was taken otherwise than it looks."""
        if self.formulas:
            yield f"formulas were taken by their stored values: {_cells(self.formulas)}"
        if self.percents:
            yield f"numbers shown in percent were taken as stored, 0.05 for 5 %: {_cells(self.percents)}"

    def _plain(self, cell: StoredCell, text: str, row: int, column: int) -> str:
        if cell.kind == "n":
            return self._number(cell, text, row, column) if text else ""
        if cell.kind == "s":
            if not (text.isascii() and text.isdigit() and len(text) < 9 and int(text) < len(self.shared)):
                raise NotTakenError("a text that the workbook does not hold", "type it again")
            return _unescaped(self.shared[int(text)])
        if cell.kind in {"str", "inlineStr"}:
            return _unescaped(text)
        return {"1": "TRUE", "0": "FALSE"}.get(text, text) if cell.kind == "b" else text

    def _number(self, cell: StoredCell, text: str, row: int, column: int) -> str:
        shown = self.formats[cell.style] if cell.style < len(self.formats) else "number"
        if shown not in {"number", "percent"}:
            return moment(text, shown, self.from_1904)
        if shown == "percent":
            self.percents.append(cell_name(row, column))
        return shortest(text).replace(".", self.mark)


def _cells(names: Sequence[str]) -> str:
    more = len(names) - _LISTED_CELLS
    return ", ".join(names[:_LISTED_CELLS]) + (f" and {more:,} more" if more > 0 else "")


def _unescaped(text: str) -> str:
    """`text` with the workbook's way of writing control characters (_x000D_) undone."""
    if "_x" not in text:
        return text
    from openpyxl.utils.escape import unescape

    return str(unescape(text))
