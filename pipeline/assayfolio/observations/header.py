"""The header row: which separator a text uses, and whether every column stands in it that the plan names."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Literal

from assayfolio.observations.faults import FaultList, listed, raise_in_files, refusal
from assayfolio.observations.guard import guarded
from assayfolio.observations.labels import first_unsettable, unprintable
from assayfolio.observations.received import SheetRow
from assayfolio.observations.rows import Broken, Row, rows
from assayfolio.study.faults import shown
from assayfolio.study.suggestions import nearest

Separator = Literal["comma", "semicolon", "tab"]

COMPARED_NAMES = 200

CHARACTERS: dict[Separator, str] = {"comma": ",", "semicolon": ";", "tab": "\t"}


@dataclass(frozen=True, slots=True)
class Header:
    """The columns of a text file; its rows begin at `next_line`, counted from zero.

    `guarded` are those names that stand in the file with a guard.
    """

    separator: Separator
    names: tuple[str, ...]
    next_line: int
    guarded: tuple[str, ...] = ()


def find_header(lines: Sequence[str], at: int, wanted: Sequence[str], faults: FaultList) -> Header:
    """The header in line `at` (from zero), by the one separator under which it holds every `wanted` column.

    Adds to `faults` what is wrong with other columns. Raises DataError where the separator or one of the
    columns cannot be told.
    """
    file = faults.file
    if at >= len(lines):
        found = f"the file has {len(lines):,} lines; the column names are expected in line {at + 1:,}"
        raise refusal(file, found, "put `header-row` of the study right")
    if not lines[at] or lines[at].isspace():
        place = "the first line" if at == 0 else f"line {at + 1}"
        raise refusal(file, "a blank line", f"the column names are expected in {place}", at + 1, 1)
    read = {name: next(rows(lines, character, at)) for name, character in CHARACTERS.items()}
    found_rows = {name: _bare(row, wanted) for name, row in read.items() if isinstance(row, Row)}
    if not found_rows:
        broken = next(row for row in read.values() if isinstance(row, Broken))
        raise refusal(file, broken.found, broken.advice, broken.line, broken.column)
    fitting = [name for name, row in found_rows.items() if not _missing(row, wanted)]
    if not fitting:
        _refuse_missing_columns(found_rows, wanted, faults)
    if len(fitting) > 1:
        columns = "; ".join(f"by {name}: {listed(found_rows[name].cells)}" for name in fitting)
        advice = "rename a column so that only one separator gives them"
        raise refusal(file, f"more than one separator fits the header ({columns})", advice, at + 1, 1)
    header = found_rows[fitting[0]]
    check_names(header, wanted, faults)
    next_line = header.line + sum(cell.count("\n") for cell in header.cells)
    written = read[fitting[0]]
    guards = tuple(name for name in header.cells if isinstance(written, Row) and name not in written.cells)
    return Header(fitting[0], tuple(header.cells), next_line, guards)


def _bare(header: Row, wanted: Sequence[str]) -> Row:
    """The header with the guard taken off each wanted name that stands in it with a guard only."""
    guards = {guarded(name): name for name in wanted if guarded(name) != name and name not in header.cells}
    if guards.keys().isdisjoint(header.cells):
        return header
    spots = tuple(header.spot(index) for index in range(len(header.cells)))
    return Row(header.line, [guards.get(cell, cell) for cell in header.cells], spots)


def check_columns(header: SheetRow, wanted: Sequence[str], faults: FaultList) -> None:
    """Make sure that `header`, whose cells are certain, holds every wanted column.

    Adds to `faults` what is wrong with other columns. Raises DataError where a wanted one is missing or
    stands twice.
    """
    if _missing(header, wanted):
        _add_missing(header, wanted, listed(header.cells), faults)
        raise_in_files([[faults]])
    check_names(header, wanted, faults)


def check_names(header: SheetRow, wanted: Sequence[str], faults: FaultList) -> None:
    """Add a fault for each column without a name, with one that stands twice or cannot be printed.

    Raises DataError where a wanted name stands twice, since no row can be read then.
    """
    seen: dict[str, int] = {}
    twice: set[str] = set()
    for at, name in enumerate(header.cells):
        plain = name.strip()
        if not plain:
            advice = "give it a name, or delete it where the column is not needed"
            faults.add(*header.spot(at), f"column {at + 1} has no name", advice)
            continue
        bad = first_unsettable(name)
        if bad is not None:
            found, advice = unprintable(bad)
            faults.add(*header.spot(at), f"column name {shown(name)} holds {found}", advice)
        if plain in seen:
            found = f"column {at + 1} has the same name as column {seen[plain] + 1}: {shown(name)}"
            faults.add(*header.spot(at), found, "give each column its own name")
            twice.update((name, header.cells[seen[plain]]))
        seen.setdefault(plain, at)
    if twice.intersection(wanted):
        raise_in_files([[faults]])


def _missing(header: SheetRow, wanted: Sequence[str]) -> list[str]:
    there = set(header.cells)
    return [column for column in wanted if column not in there]


def _refuse_missing_columns(found: Mapping[Separator, Row], wanted: Sequence[str], faults: FaultList) -> None:
    """Raise DataError naming each missing column under the reading that comes closest, and its columns."""

    def closeness(name: Separator) -> tuple[int, int]:
        return -len(_missing(found[name], wanted)), len(found[name].cells)

    best = max(found, key=closeness)
    readings = "; ".join(
        f"by {name}: {listed(row.cells)}" for name, row in found.items() if len(row.cells) > 1 or name == best
    )
    _add_missing(found[best], wanted, readings, faults)
    raise_in_files([[faults]])


def _add_missing(header: SheetRow, wanted: Sequence[str], readings: str, faults: FaultList) -> None:
    for column in _missing(header, wanted):
        near = nearest(column, header.cells[:COMPARED_NAMES])
        line, at = header.spot(header.cells.index(near)) if near is not None else (header.line, 1)
        advice = "name the column in the study as it stands in the file"
        advice = f"the nearest name is {shown(near)}; {advice}" if near is not None else advice
        faults.add(line, at, f"no column {shown(column)} in the header ({readings})", advice)
