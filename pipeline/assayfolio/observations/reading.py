"""Raw data: from the bytes of the data files to exact decimals, each with the line it stands on.

The steps: a file of any form to a header and rows of cells (`text_file`, `spreadsheet`), rows to values as
received (`layout`), those to observations by the policies of the plan (`assembling`). Nothing is guessed and
nothing is put right: what does not fit is refused, and every fault of the files is told in one pass.
"""

from collections.abc import Iterator, Sequence
from dataclasses import replace

from assayfolio.observations.assembling import assemble
from assayfolio.observations.faults import FaultList, Faults, refusal
from assayfolio.observations.layout import extras_of, received_rows
from assayfolio.observations.received import Received, ReceivedRows
from assayfolio.observations.sheets import Sheet, wanted_columns
from assayfolio.observations.text_file import text_sheet
from assayfolio.observations.values import Observations, RawFile
from assayfolio.study.exclusions import Exclusion
from assayfolio.study.faults import shown
from assayfolio.study.plan import DataPlan, MeasurementFact

WORKBOOK = ".xlsx"


def read_observations(content: bytes, plan: DataPlan, file: str) -> Observations:
    """The observations of the first response of `plan` in one file; the columns of others are carried along.

    Reads as `read_all_observations` does, and raises DataError as it does.
    """
    return read_all_observations([(file, content)], replace(plan, response=plan.response[:1]))[0]


def read_all_observations(
    files: Sequence[tuple[str, bytes]],
    plan: DataPlan,
    measurement: Sequence[MeasurementFact] = (),
    exclusions: Sequence[Exclusion] = (),
) -> tuple[Observations, ...]:
    """The observations in `files`, each a name and its bytes: one set a response, in the order of the plan.

    A name that ends in .xlsx is that of a workbook, one that ends in .gz of a text compressed with gzip, any
    other that of a text. Rows and cells of a text follow RFC 4180, with comma, semicolon or tab as the
    separator, in the encoding that the plan declares, LF or CRLF; blank lines at the end do not count. A line
    end inside a quoted cell is carried along as LF. Blanks around a number are not part of it; a level is
    taken exactly as typed. Cells of columns that the plan does not name may hold any character, for the
    report does not print them. The measuring order is made of whole numbers, no number twice.

    Raises DataError with all faults in the order of the files: the first 50, and how many more there are.
    Numbers of rows are compared with the plan only if every row could be read.
    """
    raws, received, faults = read_sheets(files, plan, measurement)
    return assemble(received, raws, plan, measurement, exclusions, faults)


def read_sheets(
    files: Sequence[tuple[str, bytes]], plan: DataPlan, measurement: Sequence[MeasurementFact] = ()
) -> tuple[tuple[RawFile, ...], ReceivedRows, Faults]:
    """The facts of the files, their values as received, and the faults, which grow while values are taken.

    Raises DataError at once where a header cannot be told, or no file could fulfil the plan; while the values
    are taken, where a file without faults has none.
    """
    faults = Faults.in_files([name for name, _ in files])
    _refuse_impossible(plan, faults.of[0].file)
    wanted = wanted_columns(plan, measurement)
    sheets = [_sheet(content, plan, wanted, own) for (_, content), own in zip(files, faults.of, strict=True)]
    extra_columns = tuple(dict.fromkeys(name for sheet in sheets for name in extras_of(sheet.names, plan)))

    def rows() -> Iterator[Received]:
        for at, sheet in enumerate(sheets):
            yield from received_rows(at, sheet, plan, measurement, extra_columns, faults)

    return tuple(sheet.raw for sheet in sheets), ReceivedRows(extra_columns, rows()), faults


def _sheet(content: bytes, plan: DataPlan, wanted: Sequence[str], faults: FaultList) -> Sheet:
    if not faults.file.lower().endswith(WORKBOOK):
        return text_sheet(content, plan, wanted, faults)
    from assayfolio.observations.spreadsheet import spreadsheet_sheet

    faults.spreadsheet = True
    return spreadsheet_sheet(content, plan, wanted, faults)


def _refuse_impossible(plan: DataPlan, file: str) -> None:
    """Refuse a plan that no file can fulfil; a study definition that was read has none of this."""
    uses = [(response, "response") for response in plan.response] + [(plan.factor, "factor")]
    uses += [] if plan.order is None else [(plan.order, "measuring order")]
    first: dict[str, str] = {}
    for column, use in uses:
        if column in first:
            found = f"{shown(column)} is named both as the {first[column]} and as the {use}"
            raise refusal(file, found, "name two different columns in the study")
        first[column] = use
    if plan.layout == "wide":
        beside = plan.order or plan.unit_column or plan.replicate_unit
        if not plan.levels or len(plan.response) != 1 or beside:
            found = (
                "the wide layout is for one response, declared levels, and no column for each value beside it"
            )
            raise refusal(file, found, "state `layout: long`, with one row a value")
