"""Workbooks for tests: written by openpyxl, by hand, or with a part changed afterwards."""

import functools
import io
import zipfile
from collections.abc import Callable, Mapping, Sequence

from openpyxl import Workbook
from openpyxl.worksheet.worksheet import Worksheet

Cell = object
SHEET = "xl/worksheets/sheet1.xml"
STRINGS = "xl/sharedStrings.xml"
MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
_RELATIONS = "xl/_rels/workbook.xml.rels"
_STRINGS_KIND = "http://schemas.openxmlformats.org/officeDocument/2006/relationships/sharedStrings"


def workbook(
    rows: Sequence[Sequence[Cell]],
    change: Callable[[Worksheet], None] = lambda _: None,
    title: str = "Results",
) -> bytes:
    """A workbook with one sheet of `rows`, as openpyxl writes it; `change` may alter the sheet before."""
    book = Workbook()
    sheet = book.worksheets[0]
    sheet.title = title
    for row in rows:
        sheet.append(list(row))
    change(sheet)
    return saved(book)


def saved(book: Workbook) -> bytes:
    """The bytes of a workbook."""
    sink = io.BytesIO()
    book.save(sink)
    return sink.getvalue()


def parts_of(content: bytes) -> dict[str, bytes]:
    """The parts of a workbook by name."""
    with zipfile.ZipFile(io.BytesIO(content)) as archive:
        return {name: archive.read(name) for name in archive.namelist()}


def packed(parts: Mapping[str, bytes], compression: int = zipfile.ZIP_DEFLATED) -> bytes:
    """An archive of `parts`."""
    sink = io.BytesIO()
    with zipfile.ZipFile(sink, "w", compression) as archive:
        for name, part in parts.items():
            archive.writestr(name, part)
    return sink.getvalue()


def with_part(content: bytes, name: str, part: bytes, compression: int = zipfile.ZIP_DEFLATED) -> bytes:
    """The workbook with one part put in its place or added."""
    return packed(parts_of(content) | {name: part}, compression)


@functools.cache
def _any_parts() -> dict[str, bytes]:
    return parts_of(workbook([["x"]]))


def by_hand(sheet_data: str, around: str = "{}", shared: Sequence[str] = ()) -> bytes:
    """A workbook whose only sheet holds `sheet_data`, the XML of its rows, put into `around`."""
    body = around.format(f"<sheetData>{sheet_data}</sheetData>")
    sheet = f'<?xml version="1.0"?><worksheet xmlns="{MAIN}">{body}</worksheet>'
    strings = "".join(f"<si><t>{text}</t></si>" for text in shared)
    parts = _any_parts()
    relation = f'<Relationship Type="{_STRINGS_KIND}" Target="sharedStrings.xml" Id="rId9"/></Relationships>'
    return packed(
        parts
        | {
            SHEET: sheet.encode(),
            STRINGS: f'<sst xmlns="{MAIN}">{strings}</sst>'.encode(),
            _RELATIONS: parts[_RELATIONS].replace(b"</Relationships>", relation.encode()),
        }
    )
