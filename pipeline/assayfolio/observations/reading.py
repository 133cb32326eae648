"""Raw data: from the bytes of a CSV or TSV file to exact decimals, each with the line it stands on.

The steps: bytes to lines (`decoding`), header and separator (`header`), lines to rows (`rows`), rows to
observations (here), levels and counts against the plan (`levels`). Nothing is guessed and nothing is put
right: what does not fit is refused, and every fault of the file is told in one pass.
"""

from collections.abc import Iterable
from dataclasses import dataclass, field, replace

from assayfolio.canonical import sha256_hex
from assayfolio.exact import Decimal10, NotADecimalError, parse_decimal
from assayfolio.observations.decoding import decoded_lines
from assayfolio.observations.faults import FaultList, raise_faults, refusal
from assayfolio.observations.header import CHARACTERS, Header, find_header
from assayfolio.observations.levels import LevelCount
from assayfolio.observations.rows import Broken, Row, rows
from assayfolio.observations.values import Observation, Observations
from assayfolio.study.faults import shown
from assayfolio.study.plan import DataPlan

MOST_ORDER_DIGITS = 9


def read_observations(content: bytes, plan: DataPlan, file: str) -> Observations:
    """The observations of the first response of `plan`; the columns of others are carried along.

    Reads as `read_all_observations` does, and raises DataError as it does.
    """
    return read_all_observations(content, replace(plan, response=plan.response[:1]), file)[0]


def read_all_observations(content: bytes, plan: DataPlan, file: str) -> tuple[Observations, ...]:
    """The observations in `content`, a CSV or TSV file that the user knows as `file`: one set a response.

    The sets are in the order of the plan and hold the same rows. Rows and cells follow RFC 4180, with comma,
    semicolon or tab as the separator, UTF-8 with or without a byte order mark, LF or CRLF; blank lines at
    the end do not count. A line end inside a quoted cell is carried along as LF. Blanks around a number are
    not part of it; a level is taken exactly as typed. Cells of columns that the plan does not name may hold
    any character, for the report does not print them. Blank cells and values against a limit are refused.
    The measuring order is made of whole numbers, no number twice.

    Raises DataError with all faults in the order of the file: the first 50, and how many more there are.
    Numbers of rows are compared with the plan only if every row could be read.
    """
    _refuse_shared_columns(plan, file)
    lines, has_mark = decoded_lines(content, file)
    faults = FaultList(file)
    header = find_header(lines, plan, file, faults)
    intake = _Intake(header, plan, lines, faults, LevelCount(plan))
    intake.take(rows(lines, CHARACTERS[header.separator], header.next_line))
    if not intake.row_count and not faults.count:
        raise refusal(file, "the file has column names but no rows", "add the values")
    of_levels, of_counts = FaultList(file), FaultList(file)
    intake.levels.add_name_faults(of_levels)
    if not intake.lost_values:
        intake.levels.add_count_faults(of_counts)
    raise_faults(file, faults, of_levels, of_counts)
    digest, levels = sha256_hex(content), intake.levels.in_order()
    extra_columns = tuple(header.names[at] for at in header.extras)
    return tuple(
        Observations(
            file=file,
            size=len(content),
            sha256=digest,
            separator=header.separator,
            byte_order_mark=has_mark,
            response=response,
            factor=plan.factor,
            levels=levels,
            extra_columns=extra_columns,
            rows=tuple(observed),
        )
        for response, observed in zip(plan.response, intake.observations, strict=True)
    )


def _refuse_shared_columns(plan: DataPlan, file: str) -> None:
    """Refuse a column that is to be two things; a study definition that was read has none."""
    uses = [(response, "response") for response in plan.response] + [(plan.factor, "factor")]
    uses += [] if plan.order is None else [(plan.order, "measuring order")]
    first: dict[str, str] = {}
    for column, use in uses:
        if column in first:
            found = f"{shown(column)} is named both as the {first[column]} and as the {use}"
            raise refusal(file, found, "name two different columns in the study")
        first[column] = use


@dataclass(slots=True)
class _Intake:
    """Takes rows one by one: the good ones become observations of each response, the others faults."""

    header: Header
    plan: DataPlan
    lines: list[str]
    faults: FaultList
    levels: LevelCount
    observations: list[list[Observation]] = field(init=False)
    extras: tuple[int, ...] = field(init=False)
    row_count: int = 0
    lost_values: bool = False
    orders: dict[int, int] = field(default_factory=dict)

    def __post_init__(self) -> None:
        self.observations = [[] for _ in self.header.responses]
        self.extras = self.header.extras

    def take(self, stretches: Iterable[Row | Broken]) -> None:
        """Take every row of `stretches`."""
        width, factor = len(self.header.names), self.header.factor
        for row in stretches:
            if isinstance(row, Broken):
                self.lost_values |= row.loses_values
                self.faults.add(row.line, row.column, row.found, row.advice)
                continue
            if len(row.cells) != width:
                self._refuse_ragged(row)
                continue
            level_cell = row.cells[factor]
            if not level_cell.strip() and not any(cell.strip() for cell in row.cells):
                self.faults.add(row.line, 1, "a row without any entry", "delete it")
                continue
            self.row_count += 1
            self._take_row(row, level_cell)

    def _take_row(self, row: Row, level_cell: str) -> None:
        before = self.faults.count
        level = self._level(row, level_cell)
        values = [self._value(row, at) for at in self.header.responses]
        order = None if self.header.order is None else self._order(row, self.header.order)
        if level is None or self.faults.count > before:
            return
        carried = tuple(row.cells[at] for at in self.extras)
        for observed, at, value in zip(self.observations, self.header.responses, values, strict=True):
            if value is not None:
                text = row.cells[at].strip(" \t")
                observed.append(Observation(row.line, level, value, text, carried, order))

    def _level(self, row: Row, level: str) -> str | None:
        spot = row.spot(self.header.factor)
        if not level.strip():
            found = f"column {shown(self.plan.factor)} is blank"
            self.faults.add(*spot, found, "give the level that the value belongs to")
            return None
        self.levels.count(level, spot)
        return level

    def _value(self, row: Row, at: int) -> Decimal10 | None:
        cell = row.cells[at]
        mark = "," if self.plan.decimal_mark == "comma" else "."
        try:
            value = parse_decimal(cell, mark)
        except NotADecimalError as error:
            self._refuse_number(row, at, str(error))
            return None
        if mark == "," and self.header.separator == "comma" and not self._stands_in_marks(row, at):
            # Here 1,5 without marks could be one value or two cells that happen to fill the row.
            found = f"column {shown(self.header.names[at])} holds {shown(cell)} without quotation marks"
            advice = "with comma as separator and as decimal mark each value has to stand in quotation marks"
            self.faults.add(*row.spot(at), found, advice)
            return None
        return value

    def _stands_in_marks(self, row: Row, at: int) -> bool:
        line, column = row.spot(at)
        return self.lines[line - 1].startswith('"', column - 1)

    def _refuse_number(self, row: Row, at: int, reason: str) -> None:
        name, cell = shown(self.header.names[at]), row.cells[at]
        found = (
            f"column {name} is blank" if reason == "blank" else f"column {name} holds {shown(cell)}: {reason}"
        )
        self.faults.add(*row.spot(at), found, _number_advice(reason, cell))

    def _order(self, row: Row, at: int) -> int | None:
        name, cell = shown(self.header.names[at]), row.cells[at].strip(" \t")
        if not (cell.isascii() and cell.isdigit() and len(cell) <= MOST_ORDER_DIGITS):
            found = f"column {name} is blank" if not cell else f"column {name} holds {shown(cell)}"
            advice = (
                f"give the place in the measuring order, a whole number of 1 to {MOST_ORDER_DIGITS} digits"
            )
            self.faults.add(*row.spot(at), found, advice)
            return None
        order = int(cell)
        if order in self.orders:
            found = f"column {name} holds {order} a second time"
            advice = f"the first is on line {self.orders[order]}; each row has its own place in the order"
            self.faults.add(*row.spot(at), found, advice)
            return None
        self.orders[order] = row.line
        return order

    def _refuse_ragged(self, row: Row) -> None:
        self.lost_values = True
        given, wanted = len(row.cells), len(self.header.names)
        found = f"this row has {given} {'cell' if given == 1 else 'cells'}, the header {wanted}"
        if given < wanted:
            line, column = row.spot(given - 1)
            self.faults.add(line, column, found, "a separator or a value is missing")
            return
        line, column = row.spot(wanted)
        advice = "put a cell that holds the separator in quotation marks"
        if self.header.separator == "comma":
            advice += "; a decimal comma needs them too"
        self.faults.add(line, column, found, advice)


def _number_advice(reason: str, cell: str) -> str:
    if reason == "blank":
        return "this version leaves no result out; keep the original and ask the statistician"
    if "against a limit" in reason:
        return "a mean cannot be formed from a limit; keep the original and ask the statistician"
    if "decimal comma is declared" in reason:
        return "write the value with a comma, or take decimal-mark out of the study's data"
    if "comma" in reason and cell.count(",") == 1:
        return "if it is a decimal comma, state `decimal-mark: comma` in the study's data"
    if "digits" in reason or "power of ten" in reason:
        return "give the value as it was recorded"
    return "give a plain number such as 12.50"
