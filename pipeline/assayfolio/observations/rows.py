"""Rows and cells of a text with separators and quotation marks, as RFC 4180 writes them.

Stricter than most readers: a quotation mark inside an unquoted cell and text after a closing mark are
faults, since two readers would take them for two different values.
"""

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

MAX_COLUMNS = 2_000
MAX_CELL = 10_000

_INSIDE = re.compile(r'(?:[^"]++|"")*+')  # possessive: never tried a second way, so never slow


@dataclass(frozen=True, slots=True)
class Row:
    """One row: the line it starts on and its cells.

    `spots` holds line and column of each cell, or is None for a row that stands on one line without any
    quotation mark, where they follow from the cells.
    """

    line: int
    cells: list[str]
    spots: tuple[tuple[int, int], ...] | None = None

    def spot(self, index: int) -> tuple[int, int]:
        """Line and column, counted from one, where the cell number `index` (from zero) starts."""
        if self.spots is not None:
            return self.spots[index]
        return self.line, 1 + sum(len(cell) + 1 for cell in self.cells[:index])


@dataclass(frozen=True, slots=True)
class Broken:
    """A stretch of lines that is no row; `loses_values` where values may stand in it."""

    line: int
    column: int
    found: str
    advice: str
    loses_values: bool = True


def rows(lines: Sequence[str], separator: str, first: int = 0) -> Iterator[Row | Broken]:
    """The rows from line number `first` (counted from zero) on; after a broken one, reading goes on below.

    Each line is looked at once, or within 10,000 characters below a mark that is never closed, so that the
    time is in proportion to the size of the text whatever it holds.
    """
    return (row for row, _ in rows_and_ends(lines, separator, first))


def rows_and_ends(lines: Sequence[str], separator: str, first: int = 0) -> Iterator[tuple[Row | Broken, int]]:
    """The rows as `rows` gives them, each with the number of the line on which reading goes on below it."""
    at = first
    while at < len(lines):
        line = lines[at]
        if not line or line.isspace():
            last = _last_blank(lines, at)
            row: Row | Broken = _blank_lines(at, last)
            at = last + 1
        elif '"' in line:
            row, at = _quoted_row(lines, at, separator)
        else:
            row = _plain_row(line, at, separator)
            at += 1
        yield row, at


def _plain_row(line: str, at: int, separator: str) -> Row | Broken:
    cells = line.split(separator, MAX_COLUMNS)
    if len(cells) > MAX_COLUMNS:
        return _too_many_columns(at)
    row = Row(at + 1, cells)
    if len(line) > MAX_CELL:
        for index, cell in enumerate(cells):
            if len(cell) > MAX_CELL:
                return _too_long(*row.spot(index), len(cell))
    return row


def _quoted_row(lines: Sequence[str], first: int, separator: str) -> tuple[Row | Broken, int]:
    cells: list[str] = []
    spots: list[tuple[int, int]] = []
    at, start = first, 0
    while True:
        spots.append((at + 1, start + 1))
        if lines[at].startswith('"', start):
            cell, end_at, end = _quoted_cell(lines, at, start + 1)
            if end < 0:
                return _unclosed(at, start, end_at == len(lines)), at + 1
            at = end_at
        else:
            end = lines[at].find(separator, start)
            end = len(lines[at]) if end < 0 else end
            cell = lines[at][start:end]
            if '"' in cell:
                return _stray_mark(at, start, cell), at + 1
        if len(cell) > MAX_CELL:
            return _too_long(*spots[-1], len(cell)), at + 1
        cells.append(cell)
        if end == len(lines[at]):
            return Row(first + 1, cells, tuple(spots)), at + 1
        if lines[at][end] != separator:
            return _text_after_mark(at, end, spots[-1]), at + 1
        if len(cells) == MAX_COLUMNS:
            return _too_many_columns(at), at + 1
        start = end + 1


def _quoted_cell(lines: Sequence[str], at: int, start: int) -> tuple[str, int, int]:
    """The cell whose opening mark stands before `start`, the line and the position behind its closing mark.

    The position is -1 if no mark closes it within the longest allowed cell; the line is then where the
    search ended.
    """
    parts: list[str] = []
    size = 0
    while at < len(lines) and size <= MAX_CELL:
        line = lines[at]
        end = _inside(line, start)
        parts.append(line[start:end].replace('""', '"'))
        if end < len(line):
            return "".join(parts), at, end + 1
        parts.append("\n")
        size += end - start + 1
        at, start = at + 1, 0
    return "", at, -1


def _inside(line: str, start: int) -> int:
    """Where the text inside marks ends that begins at `start`: at its closing mark or at the line's end."""
    match = _INSIDE.match(line, start)
    return match.end() if match else start


def _last_blank(lines: Sequence[str], at: int) -> int:
    while at + 1 < len(lines) and (not lines[at + 1] or lines[at + 1].isspace()):
        at += 1
    return at


def _blank_lines(first: int, last: int) -> Broken:
    if first == last:
        return Broken(first + 1, 1, "a blank line between the rows", "delete it", False)
    found = f"{last - first + 1} blank lines between the rows"
    return Broken(first + 1, 1, found, "delete them", False)


def _unclosed(at: int, start: int, at_end: bool) -> Broken:
    where = "before the end of the file" if at_end else f"within {MAX_CELL:,} characters"
    found = f"the quotation mark that opens here is not closed {where}"
    return Broken(at + 1, start + 1, found, "add the closing mark, or double a mark that belongs to the text")


def _stray_mark(at: int, start: int, cell: str) -> Broken:
    mark = cell.index('"')
    if not cell[:mark].strip():
        advice = "delete the blank before the mark"
    else:
        advice = "put the whole cell in quotation marks and double this one"
    return Broken(at + 1, start + mark + 1, "a quotation mark inside a cell without marks around it", advice)


def _text_after_mark(at: int, end: int, opened: tuple[int, int]) -> Broken:
    found = f"text after a closing quotation mark (opened at line {opened[0]}, column {opened[1]})"
    advice = "a mark closes a cell only before a separator or a line end; double one that belongs to the text"
    return Broken(at + 1, end + 1, found, advice)


def _too_long(line: int, column: int, size: int) -> Broken:
    found = f"a cell of {size:,} characters, more than {MAX_CELL:,}"
    return Broken(line, column, found, "shorten it or delete the column")


def _too_many_columns(at: int) -> Broken:
    found = f"more than {MAX_COLUMNS:,} columns"
    return Broken(at + 1, 1, found, "leave out columns that the study does not need")
