"""A text with separators as a table: its lines by the declared encoding, header, rows, and guarded labels."""

from collections.abc import Iterator, Sequence
from dataclasses import replace

from assayfolio.canonical import sha256_hex
from assayfolio.observations.compressed import inflated
from assayfolio.observations.decoding import decoded_lines
from assayfolio.observations.faults import FaultList, listed, refusal
from assayfolio.observations.guard import guarded, unguarded
from assayfolio.observations.header import CHARACTERS, Header, find_header
from assayfolio.observations.received import SheetRow
from assayfolio.observations.rows import MAX_CELL, Broken, Row, rows
from assayfolio.observations.sheets import Sheet
from assayfolio.observations.values import RawFile
from assayfolio.study.plan import DataPlan

_APOSTROPHE = b"'"


def text_sheet(content: bytes, plan: DataPlan, wanted: Sequence[str], faults: FaultList) -> Sheet:
    """The table in `content`, text with separators, compressed where the file's name ends in .gz.

    Adds to `faults` what is wrong with columns that are not wanted; raises DataError where the text, the
    separator or a wanted column cannot be told.
    """
    file = faults.file
    packed = file.lower().endswith(".gz")
    text = inflated(content, file) if packed else content
    lines, has_mark = decoded_lines(text, file, plan.encoding)
    header = find_header(lines, plan.header_row - 1, wanted, faults)
    character = CHARACTERS[header.separator]
    body: Iterator[Row | Broken] = rows(lines, character, header.next_line)
    of_names = f"a guarding apostrophe was taken off the column names {listed(header.guarded)}"
    raw = RawFile(
        file=file,
        size=len(content),
        sha256=sha256_hex(content),
        form="gzip text" if packed else "text",
        separator=header.separator,
        encoding=plan.encoding,
        byte_order_mark=has_mark,
        header_row=plan.header_row,
        metadata=tuple(cells_above(lines, at, character, file) for at in range(plan.header_row - 1)),
        notices=(of_names,) if header.guarded else (),
    )
    if _APOSTROPHE in text and plan.layout == "long":
        body, notices = _without_guards(list(body), header, plan)
        raw = replace(raw, notices=(*raw.notices, *notices))

    def loose(row: SheetRow, at: int) -> bool:
        line, column = row.spot(at)
        return not lines[line - 1].startswith('"', column - 1)

    both_commas = plan.decimal_mark == "comma" and header.separator == "comma"
    return Sheet(raw, header.names, body, loose if both_commas else None)


def cells_above(lines: Sequence[str], at: int, character: str, file: str) -> tuple[str, ...]:
    """The cells of a line above the header, or the line as one cell where it is no row."""
    line = lines[at]
    if len(line) > MAX_CELL:
        found = f"a line of {len(line):,} characters above the column names, more than {MAX_CELL:,}"
        raise refusal(file, found, "shorten it or delete it", at + 1, 1)
    if not line.strip():
        return ()
    row = next(rows([line], character))
    return tuple(row.cells) if isinstance(row, Row) else (line,)


def _without_guards(
    body: list[Row | Broken], header: Header, plan: DataPlan
) -> tuple[Iterator[Row | Broken], tuple[str, ...]]:
    """The rows with the guard taken off their levels where all that need one have it, and a notice of it."""
    at = header.names.index(plan.factor)
    levels = {row.cells[at] for row in body if isinstance(row, Row) and at < len(row.cells)}
    guards = guarded_levels(levels, plan)
    if not guards:
        return iter(body), ()
    return (unguarded_row(row, at) for row in body), (guard_notice(guards),)


def guarded_levels(levels: set[str], plan: DataPlan) -> frozenset[str]:
    """Those of the `levels` of a file that bear a guard: none where any that would need one has none."""
    guards = frozenset(level for level in levels if unguarded(level) != level)
    bare = any(guarded(level) != level for level in levels - guards)
    return frozenset() if bare or not guards.isdisjoint(plan.levels or ()) else guards


def guard_notice(guards: frozenset[str]) -> str:
    """What a person should know of guards that were taken off."""
    return f"a guarding apostrophe was taken off the levels {listed(sorted(guards))}"


def unguarded_row(row: Row | Broken, at: int) -> Row | Broken:
    """The row with the guard taken off its cell number `at`."""
    if isinstance(row, Broken) or at >= len(row.cells):
        return row
    cells = [*row.cells[:at], unguarded(row.cells[at]), *row.cells[at + 1 :]]
    return Row(row.line, cells, tuple(row.spot(index) for index in range(len(cells))))
