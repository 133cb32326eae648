"""Broken and hostile files: each is refused in words and with its place.

How long each takes and how much memory is measured by `benchmarks/hostile_times.py`.
"""

import functools
import gzip
import io
import struct
import zipfile
import zlib
from collections.abc import Callable
from dataclasses import dataclass, replace

import pytest

from assayfolio.errors import DataError
from assayfolio.observations.reading import read_observations
from assayfolio.study.plan import DataPlan
from support.workbooks import MAIN, SHEET, STRINGS, by_hand, packed, parts_of, with_part, workbook

PLAN = DataPlan("data/d.csv", ("y",), "g", levels=("a", "b"))
OPEN = replace(PLAN, levels=None)
GOOD = "g,y\na,1.10\na,1.20\nb,1.30\n"
BOOK = [["g", "y"], ["a", 1.1], ["a", 1.2], ["b", 1.3]]


@dataclass(frozen=True)
class Hostile:
    """A file: its name, how it is made, the place and words of its first fault."""

    name: str
    file: str
    make: Callable[[], bytes]
    place: str
    found: str
    plan: DataPlan = PLAN


def text(name: str, content: str, place: str, found: str, plan: DataPlan = PLAN) -> Hostile:
    """A text file."""
    return Hostile(name, "data/d.csv", lambda: content.encode(), place, found, plan)


def raw(name: str, make: Callable[[], bytes], place: str, found: str, file: str = "data/d.csv") -> Hostile:
    """A file made of bytes."""
    return Hostile(name, file, make, place, found, OPEN)


def book(name: str, make: Callable[[], bytes], place: str, found: str, plan: DataPlan = OPEN) -> Hostile:
    """A workbook."""
    return Hostile(name, "data/d.xlsx", make, place, found, plan)


def with_row(row: str) -> str:
    """The good file with another row as its line 3."""
    return GOOD.replace("a,1.20", row)


@functools.cache
def deflated(wbits: int) -> bytes:
    """A deflate stream of 600 MB."""
    engine = zlib.compressobj(1, wbits=wbits)
    block = bytes(1 << 20)
    return b"".join([*(engine.compress(block) for _ in range(600)), engine.flush()])


def bomb(declared: int) -> bytes:
    """A workbook whose sheet inflates to 600 MB; the archive says that it has `declared` bytes."""
    content = packed(parts_of(workbook(BOOK)) | {SHEET: b"*"}, zipfile.ZIP_STORED)
    with zipfile.ZipFile(io.BytesIO(content)) as archive:
        at = archive.getinfo(SHEET).header_offset
        start = archive.start_dir
    stream = deflated(-15)
    sizes = struct.pack("<3L", 0, len(stream), declared)
    header = bytearray(content[at : at + 30 + len(SHEET)])
    header[8:10], header[14:26] = b"\x08\x00", sizes
    entry = content.index(SHEET.encode(), start) - 46
    directory = bytearray(content[start:])
    directory[entry - start + 10 : entry - start + 12] = b"\x08\x00"
    directory[entry - start + 16 : entry - start + 28] = sizes
    directory[entry - start + 42 : entry - start + 46] = struct.pack("<L", start)
    end = directory.index(b"PK\x05\x06")
    moved = len(header) + len(stream)
    directory[end + 16 : end + 20] = struct.pack("<L", start + moved)
    return content[:start] + bytes(header) + stream + bytes(directory)


def sheet_of(xml: str, around: str = "{}") -> Callable[[], bytes]:
    """A workbook with `xml` as the rows of its sheet."""
    return lambda: by_hand(xml, around)


HEAD = "<row><c t='str'><v>g</v></c><c t='str'><v>y</v></c></row>"
ROW_A = "<row><c t='str'><v>a</v></c><c><v>1</v></c></row>"


def tags(count: int, last: str = "") -> bytes:
    """The XML of a sheet with `count` empty cells, a hundred a row, and `last`."""
    rows = ("<row>" + "<c/>" * 100 + "</row>") * (count // 100)
    return f"<worksheet xmlns='{MAIN}'><sheetData>{rows}{last}</sheetData></worksheet>".encode()


def texts() -> bytes:
    """The XML of shared texts of 100 MB."""
    items = ("<si><t>" + "x" * 10_000 + "</t></si>") * 10_000
    return f"<sst xmlns='{MAIN}'>{items}</sst>".encode()


def many_parts() -> bytes:
    """An archive with 100,000 parts."""
    return packed({f"xl/{number}.xml": b"" for number in range(100_000)}, zipfile.ZIP_STORED)


def twice() -> bytes:
    """A workbook with its sheet twice, of which readers take one or the other."""
    sink = io.BytesIO(workbook(BOOK))
    with zipfile.ZipFile(sink, "a") as archive, pytest.warns(UserWarning, match="Duplicate"):
        archive.writestr(SHEET, "<worksheet/>")
    return sink.getvalue()


def encrypted() -> bytes:
    """A workbook whose parts say that they have a password."""
    content = workbook(BOOK)
    return content.replace(b"PK\x01\x02\x14\x03\x14\x00\x00\x00", b"PK\x01\x02\x14\x03\x14\x00\x01\x00")


def doctype(part: str) -> Callable[[], bytes]:
    """A workbook with entities that multiply in one part."""
    entities = "".join(f"<!ENTITY e{n} '{f'&e{n - 1};' * 10}'>" for n in range(1, 12))
    declaration = f"<!DOCTYPE x [<!ENTITY e0 'ha'>{entities}]>"

    def make() -> bytes:
        content = by_hand(HEAD + ROW_A)
        xml = parts_of(content)[part].decode()
        if xml.startswith("<?xml"):
            xml = xml.partition("?>")[2]
        return with_part(content, part, f"{declaration}{xml}".encode())

    return make


def outside_entity() -> bytes:
    """A workbook whose sheet refers to a file of the machine."""
    declaration = "<!DOCTYPE x [<!ENTITY secret SYSTEM 'file:///etc/passwd'>]>"
    body = "<sheetData><row><c t='str'><v>&secret;</v></c></row></sheetData>"
    return with_part(
        workbook(BOOK), SHEET, f"{declaration}<worksheet xmlns='{MAIN}'>{body}</worksheet>".encode()
    )


def leaving() -> bytes:
    """A workbook whose sheet is said to lie outside the archive."""
    content = workbook(BOOK)
    name = "xl/_rels/workbook.xml.rels"
    part = parts_of(content)[name].replace(b"/xl/worksheets/sheet1.xml", b"../../../../etc/passwd")
    return with_part(content, name, part)


DAMAGED = "the workbook is damaged"

TEXTS = [
    raw("nothing", lambda: b"", "", "the file is empty"),
    raw("NUL bytes alone", lambda: b"\0" * 60_000_000, ":1:1", "a NUL byte"),
    text("a NUL byte in a label", with_row("a\0,1"), ":3:2", "a NUL byte"),
    text("a bell in a label", with_row("a\a,1"), ":3:1", "U+0007 (control character)", OPEN),
    text("an escape sequence in a label", with_row("a\x1b[2J,1"), ":3:1", "U+001B (control character)", OPEN),
    text("a right-to-left override", with_row("a\u202egnp,1"), ":3:1", "U+202E RIGHT-TO-LEFT OVERRIDE", OPEN),
    text("an isolate", with_row("\u2066a,1"), ":3:1", "U+2066 LEFT-TO-RIGHT ISOLATE", OPEN),
    text("a zero-width joiner", with_row("a\u200d,1"), ":3:1", "U+200D ZERO WIDTH JOINER", OPEN),
    text("a byte order mark inside", with_row("\ufeffa,1"), ":3:1", "U+FEFF", OPEN),
    raw("two byte order marks", lambda: b"\xef\xbb\xbf" * 2 + GOOD.encode(), ":1:1", "no column `g`"),
    text("a lookalike letter", with_row("\u0430,1"), ":3:1", "U+0430 CYRILLIC SMALL LETTER A"),
    text("lookalike digits", with_row("a,\uff11.5"), ":3:3", "not a number"),
    text("digits of a script", with_row("a,\u0661\u0662"), ":3:3", "not a number"),
    text("superscript digits", with_row("a,1\u00b2"), ":3:3", "not a number"),
    text("a minus that is none", with_row("a,\u22121.5"), ":3:3", "a minus sign U+2212"),
    text("an exponent bomb", with_row("a,1e999999999"), ":3:3", "beyond +-60"),
    text("a tiny exponent bomb", with_row("a,1e-999999999999"), ":3:3", "beyond +-60"),
    text("a million digits in ten cells", with_row("a," + "9" * 9_999), ":3:3", "too many for a number"),
    text("a formula as value", with_row("a,=1+1"), ":3:3", "`=1+1`: not a number"),
    text("a command as value", with_row("a,=cmd|' /C calc'!A0"), ":3:3", "not a number"),
    text("a quoted cell of 60 MB", with_row('"' + "x" * 60_000_000 + '",1'), ":3:1", "60,000,000 characters"),
    text("a cell of 60 MB", with_row("x" * 60_000_000 + ",1"), ":3:1", "60,000,000 characters"),
    text("a mark that is never closed", with_row('"a,1') + "b,1\n" * 100_000, ":3:1", "is not closed"),
    text("a mark at every line", "g,y\n" + '"\n' * 100_001, ":2:1", "this row has 1 cell"),
    text("marks without end", "g,y\n" + '""' * 30_000_000, ":2:1", "characters"),
    text("a million columns", "g,y" + "," * 1_000_000 + "\na,1\n", ":1:1", "more than 2,000 columns"),
    text("a million cells in a row", with_row("a,1" + "," * 1_000_000), ":3:1", "more than 2,000 columns"),
    text("two million rows", "g,y\n" + "a,1\n" * 2_000_000, "", "2,000,001 lines, more than 1,000,000"),
    text("nearly a million faults", "g,y\n" + "a,x\n" * 900_000, ":2:3", "`x`: not a number"),
    text(
        "nearly a million levels",
        "g,y\n" + "".join(f"c{n},1\n" for n in range(900_000)),
        ":5002:1",
        "column `g` holds more than 5,000 levels",
    ),
    raw("65 MB", lambda: b"g,y\n" + b"a" * 65_000_000, "", "65,000,004 bytes, more than 64,000,000"),
    text("a duplicated header", "g,y,y\na,1,2\n", ":1:5", "the same name as column 2"),
    text("a duplicated header but for a blank", "g,y,y \na,1,2\n", ":1:5", "the same name as column 2"),
    text("mixed separators", "g,y\na;1\nb,2\n", ":2:1", "this row has 1 cell, the header 2"),
    text("a header in the middle", GOOD + "g,y\na,1\n", ":5:1", "level `g` is not declared"),
    text("a sum below the table", GOOD + "sum,3.60\n", ":5:1", "level `sum` is not declared"),
    text("carriage returns alone", GOOD.replace("\n", "\r"), ":1:4", "a carriage return"),
    raw("UTF-16", lambda: GOOD.encode("utf-16"), ":1:1", "encoded in UTF-16"),
    raw("UTF-32", lambda: GOOD.encode("utf-32"), ":1:1", "encoded in UTF-32"),
    raw("UTF-7", lambda: b"g,y\n+ADw-,1\nb\xa0,2\n", ":3:2", "byte 0xA0"),
    raw("overlong UTF-8", lambda: b"g,y\n\xc0\xaf,1\n", ":2:1", "byte 0xC0"),
    raw("a surrogate in UTF-8", lambda: b"g,y\n\xed\xa0\x80,1\n", ":2:1", "byte 0xED"),
    raw("a web page", lambda: b"<!doctype html><table></table>", "", "this is a web page"),
    raw("a workbook called .csv", lambda: workbook(BOOK), "", "this is a spreadsheet"),
    raw("a compressed file called .csv", lambda: gzip.compress(GOOD.encode()), "", "compressed with gzip"),
    raw("random bytes", lambda: bytes(range(256)) * 1000, ":1:1", "a NUL byte"),
]

COMPRESSED = [
    raw("a bomb", lambda: deflated(31), "", "inflates to more than", "d.csv.gz"),
    raw("a bomb in a bomb", lambda: gzip.compress(gzip.compress(b"\0" * 60_000_000)), "", "gzip", "d.csv.gz"),
    raw("a cut file", lambda: gzip.compress(GOOD.encode())[:-9], "", "was cut short", "d.csv.gz"),
    raw(
        "text behind the end", lambda: gzip.compress(GOOD.encode()) + b"a,1", "", "3 bytes behind", "d.csv.gz"
    ),
    raw("no gzip", lambda: GOOD.encode(), "", "not a file compressed with gzip", "d.csv.gz"),
    raw("a header alone", lambda: b"\x1f\x8b", "", "was cut short", "d.csv.gz"),
]

BOOKS = [
    book("a text called .xlsx", lambda: GOOD.encode(), "", "this is not a workbook, as its name says"),
    book("an old workbook called .xlsx", lambda: b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1", "", "with a password"),
    book("a cut workbook", lambda: workbook(BOOK)[:-200], "", DAMAGED),
    book("a workbook cut in the middle", lambda: workbook(BOOK)[:2000], "", DAMAGED),
    book("another archive", lambda: packed({"readme.txt": b"hello"}), "", "holds no workbook"),
    book("an archive in an archive", lambda: packed({"d.xlsx": workbook(BOOK)}), "", "holds no workbook"),
    book("a bomb that says so", lambda: bomb(600 << 20), "", "inflates to more than"),
    book("a bomb that says it is small", lambda: bomb(900), "", "cannot be read: Bad CRC-32"),
    book("100,000 parts", many_parts, "", "more than 5,000 parts"),
    book("a sheet twice", twice, "", "is in the archive twice"),
    book("a password", encrypted, "", "has a password"),
    book("macros", lambda: with_part(workbook(BOOK), "xl/vbaProject.bin", b"x"), "", "holds macros"),
    book("entities that multiply in the sheet", doctype(SHEET), "", "has a document type declaration"),
    book("entities that multiply in the texts", doctype(STRINGS), "", "has a document type declaration"),
    book("entities that multiply in the styles", doctype("xl/styles.xml"), "", "document type declaration"),
    book("an entity from outside", outside_entity, "", "has a document type declaration"),
    book("a sheet outside the archive", leaving, "", "holds no cells"),
    book(
        "XML that ends early",
        lambda: with_part(workbook(BOOK), SHEET, b"<worksheet><sheetData>"),
        "",
        "no well-formed",
    ),
    book(
        "elements in elements",
        lambda: with_part(workbook(BOOK), SHEET, b"<a>" * 300_000),
        "",
        "no well-formed XML",
    ),
    book(
        "five million elements",
        lambda: with_part(workbook(BOOK), SHEET, b"<c/>" * 5_000_000),
        "",
        "inflates to more",
    ),
    book(
        "four million tags",
        lambda: with_part(by_hand(""), SHEET, tags(4_000_000), zipfile.ZIP_STORED),
        "",
        "more than 4,000,000 tags",
    ),
    book(
        "a million empty cells and a row that goes back",
        lambda: with_part(by_hand(""), SHEET, tags(1_000_000, "<row r='1'/>"), zipfile.ZIP_STORED),
        "",
        "row 1 below row",
    ),
    book(
        "texts of 100 MB", lambda: with_part(by_hand(HEAD), STRINGS, texts(), zipfile.ZIP_STORED), "", "bytes"
    ),
    book(
        "a stored cell of 60 MB",
        sheet_of(f"<row><c t='str'><v>{'x' * 60_000_000}</v></c></row>"),
        "",
        "200 times",
    ),
    book(
        "a cell of 20,000 characters",
        sheet_of(f"{HEAD}<row><c t='str'><v>{'ab' * 10_000}</v></c></row>"),
        ":2:1",
        "a cell of more than 10,000 characters",
    ),
    book(
        "a claim of all cells",
        lambda: workbook([["g", "z"]], lambda s: s.cell(1_048_576, 1, "a") and None),
        ":1:1",
        "no column `y`",
    ),
    book(
        "a value in the last column",
        sheet_of(HEAD + "<row><c r='XFD2'><v>1</v></c></row>"),
        ":2:16384",
        "more than 2,000 columns",
    ),
    book("a column beyond the last", sheet_of("<row><c r='ZZZ1'><v>1</v></c></row>"), "", DAMAGED),
    book("a row beyond the last", sheet_of("<row r='9999999'><c><v>1</v></c></row>"), "", DAMAGED),
    book("a row of a thousand digits", sheet_of(f"<row r='{'9' * 1000}'/>"), "", DAMAGED),
    book("rows that go back", sheet_of("<row r='5'/><row r='2'/>"), "", "row 2 below row 5"),
    book("a cell that stands twice", sheet_of("<row><c r='A1'/><c r='A1'/></row>"), "", "behind column 1"),
    book("a cell of another row", sheet_of("<row r='1'><c r='A7'/></row>"), "", "`A7` in row 1"),
    book("a text that is not there", sheet_of("<row><c t='s'><v>7</v></c></row>"), ":1:1", "does not hold"),
    book(
        "a stored exponent bomb",
        sheet_of(HEAD + "<row><c t='str'><v>a</v></c><c><v>1e999999999</v></c></row>"),
        ":2:2",
        "none",
    ),
    book(
        "a formula without value",
        lambda: workbook([["g", "y"], ["a", '=WEBSERVICE("http://x")']]),
        ":2:2",
        "a formula without",
    ),
    book("an error value", lambda: workbook([["g", "y"], ["a", "#REF!"]]), ":2:2", "`#REF!`: not a number"),
    book(
        "a level that overrides direction", lambda: workbook([["g", "y"], ["a\u202eb", 1]]), ":2:1", "U+202E"
    ),
    book("a sheet that is not there", lambda: workbook(BOOK), "", "no sheet `x`", replace(OPEN, sheet="x")),
]

ALL = [*TEXTS, *COMPRESSED, *BOOKS]


def test_at_least_forty_kinds_are_tried() -> None:
    assert len({hostile.name for hostile in ALL}) == len(ALL) >= 40


@pytest.mark.requirement("NUMBERS-3")
@pytest.mark.parametrize("hostile", ALL, ids=lambda hostile: hostile.name)
def test_a_hostile_file_is_refused_with_its_place_and_words(hostile: Hostile) -> None:
    content = hostile.make()
    with pytest.raises(DataError) as caught:
        read_observations(content, hostile.plan, hostile.file)
    fault = caught.value.faults[0]
    assert str(fault.place) == hostile.file + hostile.place
    assert hostile.found in fault.found
    assert fault.advice
    assert all(line.isprintable() and len(line) < 600 for line in str(caught.value).split("\n"))


MARKUP = (
    "<script>alert(1)</script>",
    "<img src=http://x/y.png>",
    "{{ 7*7 }}",
    "{% include '/etc/passwd' %}",
    "&lt;b&gt;",
    "${HOME}",
    "%s%n",
    "../../etc/passwd",
    '=HYPERLINK("http://x")',
    "'; DROP TABLE runs; --",
)


@pytest.mark.parametrize("label", MARKUP)
def test_markup_templates_and_formulas_in_labels_are_kept_as_they_stand(label: str) -> None:
    doubled = label.replace('"', '""')
    observations = read_observations(f'g,y\n"{doubled}",1\nb,2\n'.encode(), OPEN, "d.csv")
    assert observations.levels == (label, "b")
    if not label.startswith("="):
        assert read_observations(workbook([["g", "y"], [label, 1]]), OPEN, "d.xlsx").levels == (label,)
