"""Raw data: from the bytes of a CSV or TSV file to exact decimals, each with the line it stands on.

The steps: bytes to lines (`decoding`), header and separator (`header`), lines to rows (`rows`), rows to
observations (here), levels and counts against the plan (`levels`). Nothing is guessed and nothing is put
right: what does not fit is refused, and every fault of the file is told in one pass.
"""

from collections.abc import Iterable
from dataclasses import dataclass, field

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


def read_observations(content: bytes, plan: DataPlan, file: str) -> Observations:
    """The observations in `content`, a CSV or TSV file that the user knows as `file`.

    Reads the first response of `plan`. Rows and cells follow RFC 4180, with comma, semicolon or tab as the
    separator, UTF-8 with or without a byte order mark, LF or CRLF; blank lines at the end do not count. A
    line end inside a quoted cell is carried along as LF. Blanks around a number are not part of it; a level
    is taken exactly as typed. Cells of other columns may hold any character, for the report does not print
    them. Blank cells and values against a limit are refused.

    Raises DataError with all faults in the order of the file: the first 50, and how many more there are.
    Numbers of rows are compared with the plan only if every row could be read.
    """
    response = plan.response[0]
    if response == plan.factor:
        found = f"{shown(response)} is named both as the response and as the factor"
        raise refusal(file, found, "name two different columns in the study")
    lines, has_mark = decoded_lines(content, file)
    faults = FaultList(file)
    header = find_header(lines, response, plan.factor, file, faults)
    intake = _Intake(header, plan, lines, faults, LevelCount(plan))
    intake.take(rows(lines, CHARACTERS[header.separator], header.next_line))
    if not intake.row_count and not faults.count:
        raise refusal(file, "the file has column names but no rows", "add the values")
    of_levels, of_counts = FaultList(file), FaultList(file)
    intake.levels.add_name_faults(of_levels)
    if not intake.lost_values:
        intake.levels.add_count_faults(of_counts)
    raise_faults(file, faults, of_levels, of_counts)
    return Observations(
        file=file,
        size=len(content),
        sha256=sha256_hex(content),
        separator=header.separator,
        byte_order_mark=has_mark,
        response=response,
        factor=plan.factor,
        levels=intake.levels.in_order(),
        extra_columns=tuple(header.names[at] for at in header.extras),
        rows=tuple(intake.observations),
    )


@dataclass(slots=True)
class _Intake:
    """Takes rows one by one: the good ones become observations, the others faults."""

    header: Header
    plan: DataPlan
    lines: list[str]
    faults: FaultList
    levels: LevelCount
    observations: list[Observation] = field(default_factory=list)
    row_count: int = 0
    lost_values: bool = False

    def take(self, stretches: Iterable[Row | Broken]) -> None:
        """Take every row of `stretches`."""
        width, factor, extras = len(self.header.names), self.header.factor, self.header.extras
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
            level = self._level(row, level_cell)
            value = self._value(row)
            if level is not None and value is not None:
                text = row.cells[self.header.response].strip(" \t")
                carried = tuple(row.cells[at] for at in extras)
                self.observations.append(Observation(row.line, level, value, text, carried))

    def _level(self, row: Row, level: str) -> str | None:
        spot = row.spot(self.header.factor)
        if not level.strip():
            found = f"column {shown(self.plan.factor)} is blank"
            self.faults.add(*spot, found, "give the level that the value belongs to")
            return None
        self.levels.count(level, spot)
        return level

    def _value(self, row: Row) -> Decimal10 | None:
        cell = row.cells[self.header.response]
        mark = "," if self.plan.decimal_mark == "comma" else "."
        try:
            value = parse_decimal(cell, mark)
        except NotADecimalError as error:
            self._refuse_number(row, cell, str(error))
            return None
        if mark == "," and self.header.separator == "comma" and not self._stands_in_marks(row):
            # Here 1,5 without marks could be one value or two cells that happen to fill the row.
            found = f"column {shown(self.plan.response[0])} holds {shown(cell)} without quotation marks"
            advice = "with comma as separator and as decimal mark each value has to stand in quotation marks"
            self.faults.add(*row.spot(self.header.response), found, advice)
            return None
        return value

    def _stands_in_marks(self, row: Row) -> bool:
        line, column = row.spot(self.header.response)
        return self.lines[line - 1].startswith('"', column - 1)

    def _refuse_number(self, row: Row, cell: str, reason: str) -> None:
        name = shown(self.plan.response[0])
        found = (
            f"column {name} is blank" if reason == "blank" else f"column {name} holds {shown(cell)}: {reason}"
        )
        self.faults.add(*row.spot(self.header.response), found, _number_advice(reason, cell))

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
