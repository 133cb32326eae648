"""One sheet of a workbook as a table of text.

What a person who looks at the sheet cannot see is told: hidden rows with values and merged cells in the table
are refused; formulas, hidden columns, percent formats and hidden sheets stand in the notices.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field

from assayfolio.canonical import sha256_hex
from assayfolio.observations.cell_texts import CellTexts
from assayfolio.observations.faults import (
    FaultList,
    cell_name,
    column_letters,
    listed,
    raise_in_files,
    refusal,
)
from assayfolio.observations.header import check_columns
from assayfolio.observations.rows import Broken
from assayfolio.observations.sheet_cells import StoredCell, StoredSheet, read_sheet
from assayfolio.observations.sheets import Sheet
from assayfolio.observations.values import RawFile
from assayfolio.observations.workbook_numbers import NotTakenError
from assayfolio.observations.workbook_package import Package
from assayfolio.observations.workbook_parts import (
    Book,
    named_sheet,
    read_book,
    read_formats,
    read_shared_strings,
)
from assayfolio.study.faults import shown
from assayfolio.study.plan import DataPlan

_ERROR_LABEL = "an error value of the spreadsheet program"


@dataclass(frozen=True, slots=True)
class CellRow:
    """One row of a sheet: its number and its cells as text."""

    line: int
    cells: list[str]

    def spot(self, index: int) -> tuple[int, int]:
        """Row and column, counted from one, of the cell number `index` (from zero)."""
        return self.line, index + 1


def spreadsheet_sheet(content: bytes, plan: DataPlan, wanted: Sequence[str], faults: FaultList) -> Sheet:
    """The table in `content`, a workbook (.xlsx): the sheet and the header row that the plan declares.

    Adds to `faults` what is wrong with columns that are not wanted. Raises DataError where the file is no
    workbook that can be read, the sheet or its header cannot be told, or a wanted column is missing.
    """
    package = Package(content, faults.file)
    book = read_book(package)
    sheet_name, part = _sheet_of(package, book, plan, faults.file)
    stored = read_sheet(package, part, faults.file)
    texts = CellTexts(
        shared=read_shared_strings(package, book),
        formats=read_formats(package, book),
        from_1904=book.from_1904,
        mark="," if plan.decimal_mark == "comma" else ".",
    )
    grid = _Grid(stored, texts, plan.header_row)
    metadata = grid.metadata()
    names = grid.header(wanted, faults)
    values = (plan.levels or ()) if plan.layout == "wide" else plan.response
    body = grid.body(len(names), {names.index(name) for name in wanted if name not in values})
    raw = RawFile(
        file=faults.file,
        size=len(content),
        sha256=sha256_hex(content),
        form="spreadsheet",
        separator=None,
        sheet=sheet_name,
        header_row=plan.header_row,
        metadata=metadata,
        notices=(*texts.notices(), *grid.hidden_columns(names), *_hidden_sheets(book)),
    )
    return Sheet(raw, names, iter(body))


def _sheet_of(package: Package, book: Book, plan: DataPlan, file: str) -> tuple[str, str]:
    """The name of the sheet that is meant, and the part with its cells."""
    sheet = named_sheet(book, plan.sheet)
    if isinstance(sheet, str):
        there = listed([entry.name for entry in book.sheets if not entry.hidden])
        raise refusal(file, sheet, f"state in the study's data which `sheet` holds the values, of {there}")
    if sheet.part is None or sheet.part not in package:
        found = f"sheet {shown(sheet.name)} holds no cells"
        raise refusal(file, found, "name the sheet that holds the values")
    return sheet.name, sheet.part


def _hidden_sheets(book: Book) -> Iterator[str]:
    hidden = [entry.name for entry in book.sheets if entry.hidden]
    if hidden:
        yield f"hidden sheets were not read: {listed(hidden)}"


@dataclass(slots=True)
class _Grid:
    """The stored cells of a sheet as the rows above the header, the header, and the rows below it."""

    stored: StoredSheet
    texts: CellTexts
    header_row: int
    merged_at: dict[int, list[tuple[int, str]]] = field(default_factory=dict)

    def metadata(self) -> tuple[tuple[str, ...], ...]:
        """The cells of the rows above the header; one that cannot be taken is blank."""
        return tuple(self._cells_above(row) for row in range(1, self.header_row))

    def header(self, wanted: Sequence[str], faults: FaultList) -> tuple[str, ...]:
        """The names of the columns. Raises DataError where they cannot be told."""
        at = self.header_row
        if at not in self.stored.rows:
            advice = "put `header-row` of the study right, or give the columns their names there"
            raise refusal(faults.file, f"row {at} holds no column names", advice, at, 1)
        row = self._row(at, frozenset())
        if isinstance(row, CellRow):
            while not row.cells[-1].strip() and len(row.cells) > 1:
                row.cells.pop()
            self._find_merged(len(row.cells))
            row = self._row(at, frozenset()) if at in self.merged_at else row
        if not isinstance(row, CellRow):
            for broken in row:
                faults.add(broken.line, broken.column, broken.found, broken.advice)
            raise_in_files([[faults]])
            return ()
        check_columns(row, wanted, faults)
        return tuple(row.cells)

    def body(self, width: int, labels: set[int]) -> list[CellRow | Broken]:
        """The rows below the header, all of them at least `width` cells wide.

        `labels` are the positions of cells that name something, where an error value cannot stand.
        """
        found: list[CellRow | Broken] = []
        last = self.header_row
        for at in sorted(row for row in self.stored.rows if row > self.header_row):
            row = self._row(at, labels)
            if isinstance(row, CellRow):
                if not any(cell.strip() for cell in row.cells):
                    continue
                row.cells.extend([""] * (width - len(row.cells)))
            if at > last + 1:
                found.append(_blank_rows(last + 1, at - 1))
            found.extend([row] if isinstance(row, CellRow) else row)
            last = at
        return found

    def hidden_columns(self, names: Sequence[str]) -> Iterator[str]:
        """A notice of each column of the table that is hidden."""
        for at, name in enumerate(names, start=1):
            if any(first <= at <= last for first, last in self.stored.hidden_columns):
                yield f"column {column_letters(at)} ({shown(name)}) is hidden in the sheet and was read"

    def _cells_above(self, at: int) -> tuple[str, ...]:
        stored = self.stored.rows.get(at, {})
        cells = []
        for column in range(1, max(stored, default=0) + 1):
            cell = stored.get(column)
            try:
                cells.append("" if cell is None else self.texts.of(cell, at, column))
            except NotTakenError:
                cells.append("")
        return tuple(cells)

    def _row(self, at: int, labels: set[int] | frozenset[int]) -> CellRow | list[Broken]:
        """The cells of a row as text, or what keeps it from being one, by column."""
        stored = self.stored.rows[at]
        broken = []
        if at in self.stored.hidden_rows:
            advice = "show it, and name it in the file of exclusions where it is not to count"
            broken.append(Broken(at, min(stored), "a hidden row that holds values", advice))
        for column, area in self.merged_at.get(at, ()):
            broken.append(Broken(at, column, f"merged cells ({area})", "take them apart and fill each cell"))
        cells = []
        for column in range(1, max(stored) + 1):
            cell = stored.get(column)
            try:
                cells.append("" if cell is None else self._text(cell, at, column, labels))
            except NotTakenError as error:
                broken.append(Broken(at, column, str(error), error.advice))
        return sorted(broken, key=lambda one: one.column) if broken else CellRow(at, cells)

    def _text(self, cell: StoredCell, at: int, column: int, labels: set[int] | frozenset[int]) -> str:
        text = self.texts.of(cell, at, column)
        if cell.kind == "e" and column - 1 in labels:
            raise NotTakenError(f"{_ERROR_LABEL}, {shown(text)}", "put the cell right")
        return text

    def _find_merged(self, width: int) -> None:
        """Note each merged area that reaches into the table, at the first row where it does."""
        for top, left, bottom, right in self.stored.merged:
            if bottom >= self.header_row and left <= width:
                area = f"{cell_name(top, left)}:{cell_name(bottom, right)}"
                self.merged_at.setdefault(max(top, self.header_row), []).append((left, area))


def _blank_rows(first: int, last: int) -> Broken:
    if first == last:
        return Broken(first, 1, "a blank row between the rows", "delete it", False)
    return Broken(first, 1, f"{last - first + 1} blank rows between the rows", "delete them", False)
