"""Files that were valid and are damaged at random: read, or refused in words; no other error, no hang.

The number of examples is bounded; `ASSAYFOLIO_FUZZ_EXAMPLES=20000` makes a longer search of the same tests.
"""

import gzip
import os
import zlib
from collections.abc import Callable
from dataclasses import replace
from datetime import date

from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from assayfolio.errors import DataError
from assayfolio.observations.reading import read_observations
from assayfolio.observations.values import Observations
from assayfolio.study.plan import DataPlan, Encoding
from support.workbooks import SHEET, STRINGS, by_hand, packed, parts_of, workbook

EXAMPLES = int(os.environ.get("ASSAYFOLIO_FUZZ_EXAMPLES", "150"))
bounded = settings(
    max_examples=EXAMPLES,
    deadline=5_000,
    suppress_health_check=[HealthCheck.too_slow, HealthCheck.data_too_large],
)

LONG = replace(
    DataPlan("d", ("y",), "g"),
    unit="mg/L",
    unit_column="unit",
    missing="omit",
    missing_codes=("n.d.",),
    below_limit="half-limit",
    header_row=2,
    order="n",
)
WIDE = DataPlan("d", ("y",), "g", layout="wide", levels=("a", "b"), missing="omit")
ROWS = [
    ["made by", "K. µ", "", "", ""],
    ["g", "y", "unit", "n", "note"],
    ["a", "1.50", "mg/L", "1", 'say "so", twice'],
    ["b", "<0.05", "mg/L", "2", "'=1"],
    ["'+c", "n.d.", "mg/L", "3", "two\nlines"],
    ["'+c", "-2e-3", "mg/L", "4", "é"],
]


def text_of(rows: list[list[str]], separator: str = ",") -> str:
    """`rows` with every cell in quotation marks."""
    return "".join(
        separator.join('"' + cell.replace('"', '""') + '"' for cell in row) + "\r\n" for row in rows
    )


LONG_TEXT = text_of(ROWS)
WIDE_TEXT = "day,a,b\nmon,1.5,2\ntue,,2.5\nwed,1.7,\n"
PLAIN = LONG_TEXT.replace('"so", twice', "so").replace('"', "").replace("two\nlines", "one")
BOOK = workbook(
    [*ROWS[:4], ["b", 0.1, "mg/L", 3, date(2026, 3, 4)], ["b", 12, "mg/L", 4, True]],
    lambda sheet: sheet.merge_cells("A1:B1"),
)
SHARED = by_hand(
    "<row r='1'/><row r='2'><c r='A2' t='s'><v>0</v></c><c r='B2' t='s'><v>1</v></c><c t='s'><v>2</v></c>"
    "<c t='s'><v>3</v></c></row><row r='3' spans='1:4'><c t='s'><v>4</v></c><c s='1'><f>1/2</f><v>0.5</v></c>"
    "<c t='s'><v>5</v></c><c><v>7</v></c></row>",
    "<cols><col min='2' max='2' hidden='1'/></cols>{}<mergeCells><mergeCell ref='A1:B1'/></mergeCells>",
    ["g", "y", "unit", "n", "a", "mg/L"],
)


def outcome(content: bytes, plan: DataPlan, file: str) -> None:
    """Read `content`: observations, or a refusal whose every fault is explained."""
    try:
        result: Observations | DataError = read_observations(content, plan, file)
    except DataError as error:
        result = error
    if isinstance(result, DataError):
        assert result.faults
        assert all(fault.found and fault.advice and fault.place.file == file for fault in result.faults)
        assert all(line.isprintable() for line in str(result).split("\n"))


NASTY = (
    *(b'"', b'""', b",", b";", b"\t", b"\n", b"\r", b"\0", b"=", b"'", b"<", b">"),
    *(b"\xff\xfe", b"\xef\xbb\xbf", b"\xe2\x80\xae", b"1e99999999", b"9" * 400, b"-1", b"99999999999"),
    *(b"&#0;", b"&x;", b"<!DOCTYPE x>", b"<c r='A1'>", b"</row>", b"t='s'", b"<f/>", b"]]>", b"xmlns='"),
    *(b"PK\x03\x04", b"PK\x01\x02", b"\x1f\x8b\x08"),
)


@st.composite
def mutations(draw: st.DrawFn, most: int = 4) -> Callable[[bytes], bytes]:
    """A few changes to some bytes: other bytes, cut, moved, doubled, a stretch of something nasty."""
    changes = draw(
        st.lists(
            st.tuples(
                st.sampled_from(["put", "insert", "cut", "double", "end"]),
                st.floats(0, 1),
                st.integers(1, 40),
                st.sampled_from(NASTY) | st.binary(min_size=1, max_size=4),
            ),
            min_size=1,
            max_size=most,
        )
    )

    def apply(content: bytes) -> bytes:
        for kind, where, length, piece in changes:
            at = int(where * len(content))
            if kind == "put":
                content = content[:at] + piece + content[at + len(piece) :]
            elif kind == "insert":
                content = content[:at] + piece + content[at:]
            elif kind == "cut":
                content = content[:at] + content[at + length :]
            elif kind == "double":
                content = content[: at + length] + content[at:]
            else:
                content = content[:at]
        return content

    return apply


@bounded
@given(change=mutations(), encoding=st.sampled_from(["utf-8", "utf-16", "windows-1252", "iso-8859-15"]))
def test_a_damaged_text_is_read_or_refused_in_words(
    change: Callable[[bytes], bytes], encoding: Encoding
) -> None:
    for text, plan in ((LONG_TEXT, LONG), (PLAIN, LONG), (WIDE_TEXT, WIDE)):
        codec = "cp1252" if encoding == "windows-1252" else encoding
        outcome(change(text.encode(codec)), replace(plan, encoding=encoding), "d.csv")


@bounded
@given(change=mutations(), within=mutations(2))
def test_a_damaged_compressed_text_is_read_or_refused_in_words(
    change: Callable[[bytes], bytes], within: Callable[[bytes], bytes]
) -> None:
    content = gzip.compress(within(LONG_TEXT.encode()), mtime=0)
    outcome(change(content), LONG, "d.csv.gz")
    outcome(content, LONG, "d.csv.gz")
    body = zlib.compressobj(9, wbits=31)
    outcome(body.compress(LONG_TEXT.encode()) + body.flush(zlib.Z_SYNC_FLUSH), LONG, "d.csv.gz")


@bounded
@given(change=mutations())
def test_a_damaged_archive_is_read_or_refused_in_words(change: Callable[[bytes], bytes]) -> None:
    for content in (BOOK, SHARED):
        outcome(change(content), LONG, "d.xlsx")


PARTS = sorted({*parts_of(BOOK), *parts_of(SHARED)})


@bounded
@given(change=mutations(), part=st.sampled_from([SHEET, SHEET, SHEET, STRINGS, *PARTS]))
def test_a_workbook_with_a_damaged_part_is_read_or_refused_in_words(
    change: Callable[[bytes], bytes], part: str
) -> None:
    for content in (BOOK, SHARED):
        parts = parts_of(content)
        if part in parts:
            outcome(packed(parts | {part: change(parts[part])}), LONG, "d.xlsx")


@bounded
@given(
    content=st.binary(max_size=300),
    start=st.sampled_from([b"", b"PK\x03\x04", b"\x1f\x8b\x08\x00", b"\xff\xfe"]),
)
def test_any_bytes_under_any_name_are_read_or_refused_in_words(content: bytes, start: bytes) -> None:
    for file in ("d.csv", "d.csv.gz", "d.xlsx"):
        outcome(start + content, DataPlan("d", ("y",), "g"), file)


ATTRIBUTES = (
    *("", "r='A3'", "r='1'", "r='3'", "r=''", "t='s'", "t='e'", "t='b'", "t='d'", "t='inlineStr'", "t='x'"),
    *("s='1'", "s='99'", "s='-1'", "hidden='1'", "ht='0'", "ref='A1:B9'", "ref='B'", "ref=':'", "min='1'"),
)
attribute = st.sampled_from(ATTRIBUTES)
element = st.sampled_from(["row", "c", "v", "f", "is", "t", "r", "rPh", "col", "mergeCell", "sheetData"])


def tagged(name: str, attributes: list[str], inner: list[str]) -> str:
    """An element; of attributes with the same name the first is taken."""
    given = {piece.partition("=")[0]: piece for piece in reversed(attributes)}
    return f"<{name} {' '.join(given.values())}>{''.join(inner)}</{name}>"


sheet_xml = st.recursive(
    st.sampled_from(["", "1.5", "a", "0", "1e9", "&lt;", "<v>2</v>", "<c t='str'><v>a</v></c>"]),
    lambda inner: st.builds(tagged, element, st.lists(attribute, max_size=3), st.lists(inner, max_size=4)),
    max_leaves=12,
)


@bounded
@given(xml=st.lists(sheet_xml, max_size=5).map("".join))
def test_any_arrangement_of_a_sheets_elements_is_read_or_refused_in_words(xml: str) -> None:
    start = "<row><c t='str'><v>g</v></c><c t='str'><v>y</v></c></row>"
    outcome(by_hand(start + xml), DataPlan("d", ("y",), "g"), "d.xlsx")
