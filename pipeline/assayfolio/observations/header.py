"""The header row: which separator the file uses and in which columns what the plan names stands."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

from assayfolio.observations.faults import FaultList, listed, raise_faults, refusal
from assayfolio.observations.labels import first_unsettable, unprintable
from assayfolio.observations.rows import Broken, Row, rows
from assayfolio.study.faults import shown
from assayfolio.study.plan import DataPlan
from assayfolio.study.suggestions import nearest

Separator = Literal["comma", "semicolon", "tab"]

COMPARED_NAMES = 200

CHARACTERS: dict[Separator, str] = {"comma": ",", "semicolon": ";", "tab": "\t"}


@dataclass(frozen=True, slots=True)
class Header:
    """The columns of a file.

    `responses`, `factor` and `order` (None where there is none) are positions in `names`; the rows begin at
    `next_line`, counted from zero.
    """

    separator: Separator
    names: tuple[str, ...]
    responses: tuple[int, ...]
    factor: int
    order: int | None
    next_line: int

    @property
    def extras(self) -> tuple[int, ...]:
        """The positions of the columns that are carried along."""
        named = {*self.responses, self.factor, self.order}
        return tuple(at for at in range(len(self.names)) if at not in named)


def find_header(lines: Sequence[str], plan: DataPlan, file: str, faults: FaultList) -> Header:
    """The header of `lines`, by the one separator under which it holds every column that `plan` names.

    Adds to `faults` what is wrong with other columns. Raises DataError where the separator or one of the
    columns cannot be told.
    """
    wanted = (*plan.response, plan.factor, *(() if plan.order is None else (plan.order,)))
    if lines[0] == "" or lines[0].isspace():
        raise refusal(file, "a blank line", "the column names are expected in the first line", 1, 1)
    read = {name: next(rows(lines, character)) for name, character in CHARACTERS.items()}
    found = {name: row for name, row in read.items() if isinstance(row, Row)}
    if not found:
        broken = next(row for row in read.values() if isinstance(row, Broken))
        raise refusal(file, broken.found, broken.advice, broken.line, broken.column)
    fitting = [name for name, row in found.items() if all(column in row.cells for column in wanted)]
    if not fitting:
        _refuse_missing_columns(found, wanted, file)
    if len(fitting) > 1:
        columns = "; ".join(f"by {name}: {listed(found[name].cells)}" for name in fitting)
        advice = "rename a column so that only one separator gives them"
        raise refusal(file, f"more than one separator fits the header ({columns})", advice, 1, 1)
    header = found[fitting[0]]
    _check_names(header, faults)
    if any(header.cells.count(name) > 1 for name in wanted):
        raise_faults(file, faults)
    return Header(
        separator=fitting[0],
        names=tuple(header.cells),
        responses=tuple(header.cells.index(response) for response in plan.response),
        factor=header.cells.index(plan.factor),
        order=None if plan.order is None else header.cells.index(plan.order),
        next_line=header.line + sum(cell.count("\n") for cell in header.cells),
    )


def _refuse_missing_columns(found: dict[Separator, Row], wanted: tuple[str, ...], file: str) -> None:
    """Raise DataError naming each missing column under the reading that comes closest, and its columns."""

    def closeness(name: Separator) -> tuple[int, int]:
        cells = found[name].cells
        return sum(column in cells for column in wanted), len(cells)

    best = max(found, key=closeness)
    header = found[best]
    readings = "; ".join(
        f"by {name}: {listed(row.cells)}" for name, row in found.items() if len(row.cells) > 1 or name == best
    )
    faults = FaultList(file)
    for column in wanted:
        if column in header.cells:
            continue
        near = nearest(column, header.cells[:COMPARED_NAMES])
        line, at = header.spot(header.cells.index(near)) if near is not None else (1, 1)
        advice = "name the column in the study as it stands in the file"
        advice = f"the nearest name is {shown(near)}; {advice}" if near is not None else advice
        faults.add(line, at, f"no column {shown(column)} in the header ({readings})", advice)
    raise_faults(file, faults)


def _check_names(header: Row, faults: FaultList) -> None:
    seen: dict[str, int] = {}
    for at, name in enumerate(header.cells):
        line, column = header.spot(at)
        plain = name.strip()
        if not plain:
            advice = "give it a name, or delete it where the column is not needed"
            faults.add(line, column, f"column {at + 1} has no name", advice)
            continue
        bad = first_unsettable(name)
        if bad is not None:
            found, advice = unprintable(bad)
            faults.add(line, column, f"column name {shown(name)} holds {found}", advice)
        if plain in seen:
            found = f"column {at + 1} has the same name as column {seen[plain] + 1}: {shown(name)}"
            faults.add(line, column, found, "give each column its own name")
        seen.setdefault(plain, at)
