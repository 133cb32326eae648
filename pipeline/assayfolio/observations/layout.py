"""From the rows of one file to values as received, whatever the layout."""

from collections.abc import Callable, Iterator, Sequence
from operator import itemgetter

from assayfolio.errors import DataError
from assayfolio.observations.faults import FaultList, Faults, refusal
from assayfolio.observations.received import Columns, Received, SheetRow
from assayfolio.observations.rows import Broken
from assayfolio.observations.sheets import Sheet
from assayfolio.study.faults import shown
from assayfolio.study.plan import DataPlan, MeasurementFact

MOST_FAULTS = 10_000
"""In one file; what has more is another kind of file, and reading all of it would take long."""

MOST_LEVELS = 5_000
"""In one file; a column with more holds something else."""

Picker = Callable[[list[str]], tuple[str, ...]]


def extras_of(names: Sequence[str], plan: DataPlan) -> tuple[str, ...]:
    """The columns of a file that are carried along: neither value nor level nor measuring order."""
    wide = plan.layout == "wide"
    named = {*(plan.levels or ())} if wide else {*plan.response, plan.factor}
    return tuple(name for name in names if name not in named and name != plan.order)


def received_rows(
    file: int,
    sheet: Sheet,
    plan: DataPlan,
    measurement: Sequence[MeasurementFact],
    extra_columns: Sequence[str],
    faults: Faults,
) -> Iterator[Received]:
    """The values of one file as received, in its order; adds to `faults` what is no row.

    In the wide layout they come row by row, and within a row in the order of the declared levels; blank cells
    below the last value of a level are none of its values.
    """
    at = {name: index for index, name in enumerate(sheet.names)}

    def position(name: str | None) -> int | None:
        return None if name is None else at[name]

    extras = _picker([at.get(name) for name in extra_columns])
    body = _sound_rows(sheet, faults, faults.of[file])
    if plan.layout == "wide":
        levels = [(level, Columns((at[level],), None)) for level in plan.levels or ()]
        return _wide(body, levels, file, extras, sheet, faults.of[file])
    columns = Columns(
        responses=tuple(at[name] for name in plan.response),
        level=at[plan.factor],
        order=position(plan.order),
        unit=position(plan.unit_column),
        replicate_unit=position(plan.replicate_unit),
        measurement=tuple(at[fact.column] for fact in measurement if fact.column is not None),
    )
    return _long(body, columns, file, extras, sheet, faults.of[file])


def too_many_levels(file: str, column: str, line: int, at: int) -> DataError:
    """The refusal of a level beyond the first 5,000, which stands at that line and column."""
    found = f"column {shown(column)} holds more than {MOST_LEVELS:,} levels"
    return refusal(file, found, "name the column that holds the levels", line, at)


def _long(
    body: Iterator[SheetRow],
    columns: Columns,
    file: int,
    extras: Picker | None,
    sheet: Sheet,
    faults: FaultList,
) -> Iterator[Received]:
    level, order, unit, together = columns.level, columns.order, columns.unit, columns.replicate_unit
    first, texts, facts = columns.responses[0], _picker(columns.responses[1:]), _picker(columns.measurement)
    column, loose = first + 1, sheet.loose is not None
    levels: set[str] = set()
    for row in body:
        if loose:
            _refuse_loose(row, columns, sheet, faults)
        cells = row.cells
        name = cells[level or 0]
        if name not in levels:
            levels.add(name)
            if len(levels) > MOST_LEVELS:
                raise too_many_levels(faults.file, sheet.names[level or 0], *row.spot(level or 0))
        yield Received(
            file,
            row.line,
            column,
            name,
            (cells[first], *texts(cells)) if texts else (cells[first],),
            extras(cells) if extras else (),
            None if order is None else cells[order],
            None if unit is None else cells[unit],
            None if together is None else cells[together],
            facts(cells) if facts else (),
            row,
            columns,
        )


def _wide(
    body: Iterator[SheetRow],
    levels: Sequence[tuple[str, Columns]],
    file: int,
    extras: Picker | None,
    sheet: Sheet,
    faults: FaultList,
) -> Iterator[Received]:
    kept = list(body)
    positions = [columns.responses[0] for _, columns in levels]
    last = [_last_filled(kept, at) for at in positions]
    for number, row in enumerate(kept):
        carried = extras(row.cells) if extras else ()
        for (level, columns), at, end in zip(levels, positions, last, strict=True):
            if number > end:
                continue
            if sheet.loose is not None:
                _refuse_loose(row, columns, sheet, faults)
            text = row.cells[at]
            yield Received(
                file, row.line, at + 1, level, (text,), carried, None, None, None, (), row, columns
            )


def _last_filled(rows: Sequence[SheetRow], at: int) -> int:
    """The number of the last row that holds anything at position `at`, or -1."""
    return next((number for number in reversed(range(len(rows))) if rows[number].cells[at].strip()), -1)


def _picker(positions: Sequence[int | None]) -> Picker | None:
    """A function that takes the cells at `positions` out of a row, a blank for None; None for no position."""
    known = [at for at in positions if at is not None]
    if not positions:
        return None
    if len(known) < len(positions):
        return lambda cells: tuple("" if at is None else cells[at] for at in positions)
    if len(known) == 1:
        only = known[0]
        return lambda cells: (cells[only],)
    return itemgetter(*known)


def _sound_rows(sheet: Sheet, faults: Faults, own: FaultList) -> Iterator[SheetRow]:
    """The rows that have a cell for each column; the others become faults. Ends behind 10,000 faults.

    Raises DataError where there is neither a row nor a fault in the file.
    """
    width, row = len(sheet.names), None
    for row in sheet.rows:
        if own.count > MOST_FAULTS:
            faults.lost_values = True
            found = f"more than {MOST_FAULTS:,} faults; what follows was not read"
            own.add(row.line, 1, found, "put those right first")
            return
        if isinstance(row, Broken):
            faults.lost_values |= row.loses_values
            own.add(row.line, row.column, row.found, row.advice)
        elif len(row.cells) != width:
            faults.lost_values = True
            _refuse_ragged(row, sheet, own)
        elif not row.cells[0].strip() and not any(cell.strip() for cell in row.cells):
            own.add(*row.spot(0), "a row without any entry", "delete it")
        else:
            yield row
    if row is None:
        raise refusal(own.file, "the file has column names but no rows", "add the values")


def _refuse_ragged(row: SheetRow, sheet: Sheet, faults: FaultList) -> None:
    given, wanted = len(row.cells), len(sheet.names)
    if sheet.raw.form == "spreadsheet":
        found = "a cell in a column that has no name"
        faults.add(*row.spot(given - 1), found, "give the column a name, or delete the cell")
        return
    found = f"this row has {given} {'cell' if given == 1 else 'cells'}, the header {wanted}"
    if given < wanted:
        faults.add(*row.spot(given - 1), found, "a separator or a value is missing")
        return
    advice = "put a cell that holds the separator in quotation marks"
    if sheet.raw.separator == "comma":
        advice += "; a decimal comma needs them too"
    faults.add(*row.spot(wanted), found, advice)


def _refuse_loose(row: SheetRow, columns: Columns, sheet: Sheet, faults: FaultList) -> None:
    """Refuse numbers without marks: there 1,5 could be one value or two cells that happen to fill the row."""
    for at in columns.responses:
        text = row.cells[at].strip(" \t")
        if text.strip("+-<>=").isdecimal() and sheet.loose is not None and sheet.loose(row, at):
            found = f"column {shown(sheet.names[at])} holds {shown(row.cells[at])} without quotation marks"
            advice = "with comma as separator and as decimal mark each value has to stand in quotation marks"
            faults.add(*row.spot(at), found, advice)
