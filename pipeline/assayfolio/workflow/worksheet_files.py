"""The bytes of a worksheet as text, as a workbook and as a record: the same for the same plan everywhere."""

import csv
import io
import json
import zipfile
from collections.abc import Mapping
from typing import Any
from xml.sax.saxutils import escape

from assayfolio.canonical import Json
from assayfolio.errors import Fault, Place, StudyError
from assayfolio.observations.guard import guarded
from assayfolio.study.plan import DataPlan, StudyDefinition
from assayfolio.version import VERSION
from assayfolio.worksheet.columns import Cell, Sheet, SheetColumn
from assayfolio.worksheet.order import ALGORITHM
from assayfolio.worksheet.rows import WorksheetRow

RECORD_FORMAT = "assayfolio-worksheet/1"
SHEET = "worksheet"
ABOUT = "about"

_DATE = (1980, 1, 1, 0, 0, 0)  # the earliest that an archive can hold; it says nothing
_CORE = "docProps/core.xml"
_WIDEST, _NARROWEST = 48, 10
_TEXT = "@"
_SHADE, _LINE = "FFF1F3F4", "FFC9D0D4"


def csv_bytes(sheet: Sheet, data: DataPlan, place: Place) -> bytes:
    """The worksheet as text with separators, in the encoding and with the decimal mark of the plan.

    Labels that a spreadsheet program would run as formulas are guarded. UTF-8 gets a byte order mark where
    there is a letter outside ASCII, since spreadsheet programs take it for another encoding otherwise.
    Raises StudyError where the encoding of the plan has no such letter.
    """
    output = io.StringIO(newline="")
    writer = csv.writer(output, delimiter=";" if data.decimal_mark == "comma" else ",", lineterminator="\r\n")
    writer.writerow([guarded(column.name) for column in sheet.columns])
    writer.writerows([_text(cell) for cell in cells] for cells in sheet.cells)
    text = output.getvalue()
    if data.encoding == "utf-16":
        return b"\xff\xfe" + text.encode("utf-16-le")
    if data.encoding == "utf-8" and not text.isascii():
        return text.encode("utf-8-sig")
    try:
        return text.encode(data.encoding)
    except UnicodeEncodeError as error:
        found = f"the encoding {data.encoding} has no character {text[error.start]!r}, which a label holds"
        fault = Fault(place, found, "use `encoding: utf-8`, or rename the label")
        raise StudyError(f"{place.file}: the worksheet cannot be written as text", (fault,)) from None


def _text(cell: Cell) -> str:
    if cell is None:
        return ""
    return str(cell) if isinstance(cell, int) else guarded(cell)


def record_bytes(
    study: StudyDefinition,
    study_sha256: str,
    rows: tuple[WorksheetRow, ...],
    order_sha256: str,
    files: Mapping[str, str],
) -> bytes:
    """The record beside the sheets: from what the order was drawn, its digest, and those of the files."""
    plan = study.worksheet
    counts = {level: sum(row.level == level for row in rows) for level in study.data.levels or ()}
    record: dict[str, Json] = {
        "format": RECORD_FORMAT,
        "study": study.study,
        "study_sha256": study_sha256,
        "algorithm": ALGORITHM,
        "seed": None if plan is None else plan.seed,
        "levels": [{"level": level, "replicates": count} for level, count in counts.items()],
        "block": None if plan is None else plan.block,
        "blocks": [] if plan is None else plan.blocks,
        "item": None if plan is None else plan.item,
        "rows": len(rows),
        "order_sha256": order_sha256,
        "files": dict(files),
    }
    return (json.dumps(record, ensure_ascii=False, indent=1) + "\n").encode("utf-8")


def xlsx_bytes(sheet: Sheet, study: StudyDefinition, facts: tuple[tuple[str, str], ...]) -> bytes:
    """The worksheet as a workbook: every label a text cell, the header frozen, results to be numbers.

    Its first sheet has the name that the plan gives; then a second one holds `facts`. Where the plan names no
    sheet there is one only, so that the workbook can be read without one; the facts then stand in the
    properties of the workbook, as they do always.
    """
    from openpyxl import Workbook

    book = Workbook()
    book.remove(book.worksheets[0])
    page = book.create_sheet(study.data.sheet or SHEET)
    _fill(page, sheet, study)
    if study.data.sheet is not None:
        about = book.create_sheet(ABOUT if study.data.sheet != ABOUT else f"{ABOUT} 2")
        for fact in facts:
            about.append(fact)
        for cell in (cell for row in about.iter_rows() for cell in row):
            _make_text(cell)
        about.column_dimensions["A"].width, about.column_dimensions["B"].width = 24, 80
    output = io.BytesIO()
    book.save(output)
    words = "; ".join(f"{what}: {value}" for what, value in facts)
    return _without_dates(output.getvalue(), _core_properties(f"{study.study} worksheet", words))


def _fill(page: Any, sheet: Sheet, study: StudyDefinition) -> None:
    from openpyxl.styles import Border, Font, PatternFill, Side

    page.append([column.name for column in sheet.columns])
    for cells in sheet.cells:
        page.append(cells)
    line, bold = Border(bottom=Side(style="thin", color=_LINE)), Font(bold=True)
    shade = PatternFill("solid", fgColor=_SHADE)
    for column, whole in zip(sheet.columns, page.iter_cols(), strict=True):
        head, *below = whole
        longest = max(len(str(cell.value)) for cell in whole if cell.value is not None)
        page.column_dimensions[head.column_letter].width = min(_WIDEST, max(_NARROWEST, longest + 2))
        for cell in whole:
            cell.border = line
            if isinstance(cell.value, str):
                _make_text(cell)
            if cell.value is not None:
                cell.fill = shade
        head.font = bold
        if column.role == "fact":
            for cell in below:
                cell.number_format = _TEXT
        if column.role == "result":
            area = f"{head.column_letter}2:{head.column_letter}{page.max_row}"
            page.add_data_validation(_numbers_alone(study.data, column, area))
    page.freeze_panes = "A2"
    page.print_title_rows = "1:1"
    page.oddFooter.left.text = f"{study.study} worksheet"
    page.oddFooter.right.text = "page &P of &N"


def _make_text(cell: Any) -> None:
    """What the cell holds is text: never a formula, a number or a date, also after it was edited."""
    cell.data_type = "s"
    cell.quotePrefix = True
    cell.number_format = _TEXT


def _numbers_alone(data: DataPlan, column: SheetColumn, cells: str) -> Any:
    """Results are decimal numbers; where the plan knows other entries too, another one is asked about."""
    from openpyxl.worksheet.datavalidation import DataValidation

    other = data.missing != "refuse" or data.below_limit != "refuse" or data.above_limit != "refuse"
    unit = "" if column.unit is None else f", in {column.unit}"
    rule = DataValidation(
        type="decimal",
        operator="between",
        formula1="-1E+60",
        formula2="1E+60",
        allow_blank=True,
        showErrorMessage=True,
        errorStyle="warning" if other else "stop",
        errorTitle="Not a number",
        error="A result is a number; write anything else only as the study declares it."
        if other
        else "A result is a number, such as 12.50.",
        showInputMessage=True,
        promptTitle=column.name[:32],
        prompt=f"The result as it was measured{unit}"[:255],
    )
    rule.add(cells)
    return rule


def _core_properties(title: str, description: str) -> bytes:
    """The properties of the document, without any date."""
    return (
        '<?xml version="1.0" encoding="UTF-8"?>\n<cp:coreProperties '
        'xmlns:cp="http://schemas.openxmlformats.org/package/2006/metadata/core-properties" '
        'xmlns:dc="http://purl.org/dc/elements/1.1/">'
        f"<dc:title>{escape(title)}</dc:title><dc:creator>Assayfolio {VERSION}</dc:creator>"
        f"<dc:description>{escape(description)}</dc:description></cp:coreProperties>"
    ).encode()


def _without_dates(package: bytes, core: bytes) -> bytes:
    """The same package with `core` as its properties, its parts by name, stored, all of one fixed date."""
    output = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(package)) as old, zipfile.ZipFile(output, "w") as new:
        for name in sorted(old.namelist()):
            part = zipfile.ZipInfo(name, _DATE)
            part.create_system = 0
            new.writestr(part, core if name == _CORE else old.read(name))
    return output.getvalue()
