"""Raw data files that are refused: each is told where it is wrong, what stands there, and what to do."""

from dataclasses import replace
from typing import NamedTuple

import pytest

from assayfolio.errors import DataError, ExitCode
from assayfolio.observations.reading import read_all_observations, read_observations
from assayfolio.study.plan import DataPlan

PLAN = DataPlan("data/nitrate.csv", ("nitrate",), "method", levels=("kit-a", "kit-b"))
COUNTED = replace(PLAN, replicates=2)
COUNTED_BY_LEVEL = replace(PLAN, replicates=(("kit-a", 1), ("kit-b", 3)))
OPEN = replace(PLAN, levels=None)
COMMA = replace(PLAN, decimal_mark="comma")
ORDERED = replace(PLAN, order="position")
TWO = replace(PLAN, response=("nitrate", "nitrite"), order="position")
GOOD = "method,nitrate\nkit-a,1.10\nkit-a,1.20\nkit-b,1.30\nkit-b,1.40\n"


class Bad(NamedTuple):
    """A file with one fault: the place it names and words that stand in what was found and the advice."""

    name: str
    content: str | bytes
    place: str
    found: str
    advice: str
    plan: DataPlan = PLAN


def with_row(row: str) -> str:
    """The good file with `row` as its line 3."""
    lines = GOOD.splitlines()
    return "\n".join([*lines[:2], row, *lines[2:]]) + "\n"


NUMBERS = [
    Bad(
        "a word",
        with_row("kit-a,lost"),
        ":3:7",
        "column `nitrate` holds `lost`: not a number",
        "such as 12.50",
    ),
    Bad("a blank value", with_row("kit-a,"), ":3:7", "column `nitrate` is blank", "keep the original"),
    Bad("only blanks", with_row("kit-a,   "), ":3:7", "column `nitrate` is blank", "keep the original"),
    Bad("NaN", with_row("kit-a,NaN"), ":3:7", "holds `NaN`: not a number", "plain number"),
    Bad("infinity", with_row("kit-a,-inf"), ":3:7", "holds `-inf`: not a number", "plain number"),
    Bad("n/a", with_row("kit-a,N/A"), ":3:7", "holds `N/A`: not a number", "plain number"),
    Bad(
        "below a limit",
        with_row("kit-a,<0.05"),
        ":3:7",
        "`<0.05`: a value reported against a limit",
        "keep the original",
    ),
    Bad(
        "above a limit",
        with_row("kit-a,>99"),
        ":3:7",
        "`>99`: a value reported against a limit",
        "keep the original",
    ),
    Bad(
        "39 digits", with_row("kit-a,1." + "2" * 38), ":3:7", "more than 38 digits (39)", "as it was recorded"
    ),
    Bad("a huge power", with_row("kit-a,1e61"), ":3:7", "power of ten is beyond +-60", "as it was recorded"),
    Bad("a tiny power", with_row("kit-a,1e-61"), ":3:7", "power of ten is beyond +-60", "as it was recorded"),
    Bad("an absurd power", with_row("kit-a,1e999999999"), ":3:7", "beyond +-60", "as it was recorded"),
    Bad("a quoted comma", with_row('kit-a,"1,5"'), ":3:7", "it holds a comma", "`decimal-mark: comma`"),
    Bad("a thousands blank", with_row("kit-a,1 234"), ":3:7", "it holds a space", "plain number"),
    Bad("a no-break space", with_row("kit-a,1\u00a0234"), ":3:7", "a no-break space", "plain number"),
    Bad("a printed minus", with_row("kit-a,\u22121.5"), ":3:7", "a minus sign U+2212", "plain number"),
    Bad("a unit beside it", with_row("kit-a,1.5mg"), ":3:7", "holds `1.5mg`: not a number", "plain number"),
    Bad("a hexadecimal", with_row("kit-a,0x1F"), ":3:7", "holds `0x1F`: not a number", "plain number"),
    Bad("grouped digits", with_row("kit-a,1_000"), ":3:7", "holds `1_000`: not a number", "plain number"),
    Bad("digits of a script", with_row("kit-a,\u0663\u0664"), ":3:7", "not a number", "plain number"),
    Bad("a formula", with_row("kit-a,=1+1"), ":3:7", "holds `=1+1`: not a number", "plain number"),
    Bad(
        "a point where commas are declared",
        "method;nitrate\nkit-a;1,5\nkit-b;1.5\n",
        ":3:7",
        "holds `1.5`: a decimal point where a decimal comma is declared",
        "write the value with a comma",
        COMMA,
    ),
    Bad(
        "a decimal comma that could be a separator",
        'method,nitrate,note\nkit-a,1,5\nkit-b,"1,6",\n',
        ":2:7",
        "column `nitrate` holds `1` without quotation marks",
        "each value has to stand in quotation marks",
        COMMA,
    ),
]

LEVELS = [
    Bad(
        "a misspelt level",
        with_row("kit-aa,1"),
        ":3:1",
        "level `kit-aa` is not declared",
        "the nearest is `kit-a`",
    ),
    Bad(
        "an unknown level",
        with_row("titration,1"),
        ":3:1",
        "`titration` is not declared",
        "declares `kit-a`, `kit-b`",
    ),
    Bad(
        "another case", with_row("Kit-A,1"), ":3:1", "level `Kit-A` is not declared", "the nearest is `kit-a`"
    ),
    Bad(
        "a blank behind a level",
        with_row("kit-a ,1"),
        ":3:1",
        "`kit-a ` begins or ends with a blank",
        "write `kit-a`",
    ),
    Bad(
        "a blank before a level that no plan declares",
        "method,nitrate\nkit-a,1\n kit-b,2\n",
        ":3:1",
        "` kit-b` begins or ends with a blank",
        "write `kit-b`",
        OPEN,
    ),
    Bad(
        "an unfit level with another number of rows than planned",
        "method,nitrate\nkit-b,1\nkit-b,2\n\u65b0,1\n",
        ":4:1",
        "CJK UNIFIED IDEOGRAPH-65B0",
        "spell it without",
        replace(OPEN, replicates=2),
    ),
    Bad("a blank level", with_row(",1"), ":3:1", "column `method` is blank", "give the level"),
    Bad(
        "an absent level",
        "method,nitrate\nkit-a,1\nkit-a,2\n",
        "",
        "level `kit-b` has no row",
        "add its values",
    ),
    Bad(
        "one too many",
        with_row("kit-a,1"),
        ":4:1",
        "level `kit-a`: found 3, planned 2",
        "too many is here",
        COUNTED,
    ),
    Bad("one too few", GOOD[:-11], ":4:1", "level `kit-b`: found 1, planned 2", "last row is here", COUNTED),
    Bad(
        "too few of one",
        GOOD.replace("kit-a,1.20\n", ""),
        ":4:1",
        "level `kit-b`: found 2, planned 3",
        "last row is here",
        COUNTED_BY_LEVEL,
    ),
    Bad(
        "a planned level that is absent",
        "method,nitrate\nkit-a,1\n",
        "",
        "level `kit-b` has no row",
        "add its values",
        replace(COUNTED_BY_LEVEL, levels=None),
    ),
    Bad(
        "a script that is not in the font",
        "method,nitrate\n\u65b0,1\nkit-b,2\n",
        ":2:1",
        "CJK UNIFIED IDEOGRAPH-65B0",
        "spell it without",
        OPEN,
    ),
    Bad(
        "an invisible character",
        "method,nitrate\nkit\u200b-a,1\nkit-b,2\n",
        ":2:1",
        "U+200B ZERO WIDTH SPACE",
        "spell it without",
        OPEN,
    ),
    Bad(
        "a line end in a level",
        'method,nitrate\n"kit\na",1\nkit-b,2\n',
        ":2:1",
        "U+000A (control character)",
        "spell it without",
        OPEN,
    ),
    Bad(
        "twins",
        "method,nitrate\ncaf\u00e9,1\ncafe\u0301,2\n",
        ":3:1",
        "looks like `caf\u00e9` but holds other characters",
        "type both the same way",
        OPEN,
    ),
    Bad(
        "a name as long as a sentence",
        f"method,nitrate\n{'a' * 81},1\nkit-b,2\n",
        ":2:1",
        "has 81 characters, more than 80",
        "shorter name",
        OPEN,
    ),
]

COLUMNS = [
    Bad(
        "no response column",
        GOOD.replace("nitrate", "Nitrat"),
        ":1:8",
        "no column `nitrate` in the header (by comma: `method`, `Nitrat`)",
        "the nearest name is `Nitrat`",
    ),
    Bad(
        "no factor column",
        GOOD.replace("method", "device"),
        ":1:1",
        "no column `method` in the header",
        "name the column",
    ),
    Bad(
        "a blank before a name",
        GOOD.replace(",nitrate", ", nitrate"),
        ":1:8",
        "no column `nitrate`",
        "name is ` nitrate`",
    ),
    Bad(
        "a twice used name",
        "method,nitrate,nitrate\nkit-a,1,2\nkit-b,1,2\n",
        ":1:16",
        "column 3 has the same name as column 2: `nitrate`",
        "its own name",
    ),
    Bad(
        "another name twice",
        "day,method,nitrate,day\n1,kit-a,1,2\n1,kit-b,2,3\n",
        ":1:20",
        "the same name as column 1",
        "its own name",
    ),
    Bad(
        "a column without a name",
        "method,nitrate,\nkit-a,1,\nkit-b,2,\n",
        ":1:16",
        "column 3 has no name",
        "give it a name",
    ),
    Bad(
        "a name that cannot be printed",
        "method,nitrate,\u65b0\nkit-a,1,2\nkit-b,1,2\n",
        ":1:16",
        "column name `\u65b0` holds U+65B0 CJK UNIFIED IDEOGRAPH-65B0, which the report cannot print",
        "spell it without",
    ),
    Bad(
        "two separators fit",
        "method,nitrate,a;method;nitrate;b\n",
        ":1:1",
        "more than one separator fits the header "
        "(by comma: `method`, `nitrate`, `a;method;nitrate;b`; by semicolon:",
        "rename a column",
    ),
    Bad(
        "one column twice in the plan",
        GOOD,
        "",
        "`nitrate` is named both as the response and as the factor",
        "two different columns",
        replace(PLAN, factor="nitrate"),
    ),
    Bad(
        "a line end in a name",
        'method,nitrate,"two\nlines"\nkit-a,1,x\nkit-b,2,y\n',
        ":1:16",
        "U+000A (control character)",
        "spell it without",
    ),
    Bad(
        "a blank first line",
        "\n" + GOOD,
        ":1:1",
        "a blank line",
        "column names are expected in the first line",
    ),
]

ROWS = [
    Bad(
        "too few cells",
        with_row("kit-a"),
        ":3:1",
        "this row has 1 cell, the header 2",
        "a separator or a value is missing",
    ),
    Bad(
        "too many cells",
        with_row("kit-a,1,5"),
        ":3:9",
        "this row has 3 cells, the header 2",
        "a decimal comma needs them too",
    ),
    Bad("a blank line", with_row(""), ":3:1", "a blank line between the rows", "delete it"),
    Bad("blank lines", with_row("\n \n\t"), ":3:1", "3 blank lines between the rows", "delete them"),
    Bad("an empty row", with_row(","), ":3:1", "a row without any entry", "delete it"),
    Bad(
        "an open mark",
        GOOD + 'kit-b,"1.5\n',
        ":6:7",
        "is not closed before the end of the file",
        "add the closing mark",
    ),
    Bad(
        "an open mark far up",
        with_row('kit-a,"1') + "kit-b,1\n" * 1500,
        ":3:7",
        "not closed within 10,000 characters",
        "add",
    ),
    Bad(
        "text after a mark",
        with_row('"kit"-a,1'),
        ":3:6",
        "text after a closing quotation mark (opened at line 3, column 1)",
        "double one that belongs to the text",
    ),
    Bad(
        "a blank after a mark",
        with_row('"kit-a" ,1'),
        ":3:8",
        "text after a closing quotation mark",
        "only before a separator",
    ),
    Bad(
        "a mark inside a cell",
        with_row('kit"a,1'),
        ":3:4",
        "a quotation mark inside a cell without marks",
        "put the whole cell",
    ),
    Bad(
        "a blank before a mark",
        with_row('kit-a, "1"'),
        ":3:8",
        "a quotation mark inside a cell",
        "delete the blank before",
    ),
    Bad(
        "an endless cell",
        with_row("k" * 10_001 + ",1"),
        ":3:1",
        "a cell of 10,001 characters, more than 10,000",
        "shorten it",
    ),
    Bad(
        "an endless quoted cell",
        with_row('"' + "k" * 10_001 + '",1'),
        ":3:1",
        "a cell of 10,001 characters",
        "shorten it",
    ),
    Bad(
        "endless columns",
        with_row("kit-a,1" + "," * 2000),
        ":3:1",
        "more than 2,000 columns",
        "leave out columns",
    ),
    Bad(
        "endless quoted columns",
        with_row('"kit-a",1' + "," * 2000),
        ":3:1",
        "more than 2,000 columns",
        "leave out columns",
    ),
]

FILES = [
    Bad("nothing", "", "", "the file is empty", "expected in it"),
    Bad("a byte order mark alone", b"\xef\xbb\xbf", "", "the file is empty", "expected in it"),
    Bad("blank lines alone", "\r\n \r\n", "", "the file is empty", "expected in it"),
    Bad("a header alone", "method,nitrate\n", "", "the file has column names but no rows", "add the values"),
    Bad("UTF-16", GOOD.encode("utf-16"), ":1:1", "the file is encoded in UTF-16", "in UTF-8"),
    Bad(
        "UTF-16 of the other order",
        b"\xfe\xff" + GOOD.encode("utf-16-be"),
        ":1:1",
        "encoded in UTF-16",
        "in UTF-8",
    ),
    Bad("UTF-32", GOOD.encode("utf-32"), ":1:1", "the file is encoded in UTF-32", "in UTF-8"),
    Bad(
        "UTF-16 on one line",
        "method,nitrate".encode("utf-16-le"),
        ":1:2",
        "a NUL byte",
        "it looks like UTF-16",
    ),
    Bad(
        "a NUL byte", with_row("kit\u00b5\0a,1"), ":3:5", "a NUL byte", "the file is damaged or no text file"
    ),
    Bad(
        "Windows-1252",
        with_row("kit-\u00b5,1").encode("cp1252"),
        ":3:5",
        "byte 0xB5 (number 31 of the file) is not UTF-8",
        "it would be `\u00b5` in Windows-1252",
    ),
    Bad(
        "a cut character",
        GOOD.encode() + "kit-\u00b5".encode()[:-1],
        ":6:5",
        "the file ends within a character (byte number 64)",
        "cut short",
    ),
    Bad(
        "a byte of no encoding",
        b"\xef\xbb\xbf" + with_row("kit-,1").encode().replace(b"kit-,", b"kit-\x81,"),
        ":3:5",
        "byte 0x81 (number 34 of the file) is not UTF-8",
        "in UTF-8",
    ),
    Bad(
        "carriage returns alone",
        GOOD.replace("\n", "\r"),
        ":1:15",
        "a carriage return that no line feed follows",
        "LF or CRLF",
    ),
    Bad(
        "a workbook",
        b"PK\x03\x04\x14\x00",
        "",
        "this is a spreadsheet or another zip archive",
        "save it as text",
    ),
    Bad(
        "an old workbook",
        b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1",
        "",
        "the old binary Excel format",
        "save it as text",
    ),
    Bad("a compressed file", b"\x1f\x8b\x08\x00", "", "a file compressed with gzip", "save it as text"),
    Bad("a PDF", b"%PDF-1.7\n", "", "this is a PDF, not a text file", "save it as text"),
    Bad("a million lines", b"\n" * 1_000_001, "", "1,000,001 lines, more than 1,000,000", "divide the study"),
    Bad(
        "too many bytes", b"a" * 64_000_001, "", "64,000,001 bytes, more than 64,000,000", "leave out columns"
    ),
]

PLACE = "a whole number of 1 to 9 digits"
ORDERS = [
    Bad(
        f"{name} as a place in the measuring order",
        f"method,nitrate,position\nkit-a,1,1\nkit-b,2,{cell}\n",
        ":3:9",
        f"column `position` {found}",
        advice,
        ORDERED,
    )
    for name, cell, found, advice in (
        ("nothing", "", "is blank", PLACE),
        ("a word", "last", "holds `last`", PLACE),
        ("a decimal", "1.5", "holds `1.5`", PLACE),
        ("a number below nought", "-2", "holds `-2`", PLACE),
        ("digits of a script", "\u0662", "holds `\u0662`", PLACE),
        ("ten digits", "1234567890", "holds `1234567890`", PLACE),
        ("an earlier place", "01", "holds 1 a second time", "the first is on line 2"),
    )
]
ORDERS += [
    Bad(
        "no column with the measuring order",
        "method,nitrate,positon\nkit-a,1,1\n",
        ":1:16",
        "no column `position` in the header",
        "the nearest name is `positon`",
        ORDERED,
    ),
    Bad(
        "the response as measuring order",
        GOOD,
        "",
        "`nitrate` is named both as the response and as the measuring order",
        "name two different columns",
        replace(PLAN, order="nitrate"),
    ),
]

ALL = [*NUMBERS, *LEVELS, *COLUMNS, *ROWS, *FILES, *ORDERS]


def refused(content: str | bytes, plan: DataPlan = PLAN) -> DataError:
    """The error with which `content` is refused."""
    given = content.encode() if isinstance(content, str) else content
    with pytest.raises(DataError) as caught:
        read_observations(given, plan, "data/nitrate.csv")
    return caught.value


@pytest.mark.parametrize("bad", ALL, ids=lambda bad: bad.name)
def test_a_bad_file_is_refused_with_its_place_and_words(bad: Bad) -> None:
    error = refused(bad.content, bad.plan)
    assert [str(fault.place) for fault in error.faults] == [f"data/nitrate.csv{bad.place}"]
    (fault,) = error.faults
    assert bad.found in fault.found
    assert bad.advice in fault.advice
    assert error.headline == "data/nitrate.csv cannot be used: 1 fault"
    assert error.exit_code is ExitCode.INPUT


def test_the_good_file_beside_them_is_read() -> None:
    assert len(read_observations(GOOD.encode(), COUNTED, "data/nitrate.csv").rows) == 4


def test_all_faults_are_told_in_one_pass_and_in_the_order_of_the_file() -> None:
    content = 'method,nitrate,\nkit-c,1\n\nkit-a,x,\nkit-a ,2,\nkit-c,y,\nkit-d,,\n"kit-a",3,\n'
    error = refused(content)
    assert [(fault.place.line, fault.place.column) for fault in error.faults] == [
        (1, 16),  # a column without a name
        (2, 7),  # a cell is missing
        (3, 1),  # a blank line
        (4, 7),  # x
        (5, 1),  # a blank behind a level
        (6, 1),  # kit-c
        (6, 7),  # y
        (7, 1),  # kit-d
        (7, 7),  # no value
    ]
    assert error.headline == "data/nitrate.csv cannot be used: 9 faults"
    assert error.hidden == 0


def test_an_undeclared_level_is_told_once_with_the_number_of_its_rows() -> None:
    error = refused(GOOD + "kit-c,1\n" * 30)
    assert [str(fault.place) for fault in error.faults] == ["data/nitrate.csv:6:1"]
    assert "(30 rows, the first is here)" in error.faults[0].found


def test_three_entries_alike_are_told_one_by_one_and_more_in_one_line() -> None:
    three = refused(GOOD + "kit-a,1x\nkit-b,2x\nkit-a,3x\n")
    assert [(fault.place.line, fault.found) for fault in three.faults] == [
        (line, f"column `nitrate` holds `{line - 5}x`: not a number") for line in (6, 7, 8)
    ]
    many = refused(GOOD + "kit-a,1x\nkit-b,2x\nkit-a,3x\nkit-b,4x\n")
    assert many.headline == "data/nitrate.csv cannot be used: 4 faults"
    (fault,) = many.faults
    words = "column `nitrate` holds `1x`: not a number; the same 3 times more, at 7:7, 8:7, 9:7"
    assert (str(fault.place), fault.found) == ("data/nitrate.csv:6:7", words)


def test_a_fault_in_every_row_is_one_line_with_the_first_places() -> None:
    error = refused("method,nitrate\n" + "kit-a,x\nkit-b,x\n" * 5000)
    (fault,) = error.faults
    assert fault.found.endswith("the same 9,999 times more, at 3:7, 4:7, 5:7, 6:7, 7:7, 8:7, 9:7, 10:7 ...")
    assert error.headline.endswith(": 10000 faults")
    assert error.hidden == 0


def test_entries_of_different_columns_are_not_alike() -> None:
    rows = "".join(f"kit-a,{n}x,{n}y\n" for n in range(6))
    content = f"method,nitrate,nitrite\n{rows}kit-b,1,1\n"
    assert [
        (place, found.partition(" holds")[0])
        for place, found in refused_together(content, replace(TWO, order=None))
    ] == [("2:7", "column `nitrate`"), ("2:10", "column `nitrite`")]


def test_beyond_fifty_kinds_of_fault_the_rest_is_counted() -> None:
    error = refused("method,nitrate\n" + "".join(f"lot-{n},1\n" for n in range(80)))
    assert [fault.place.line for fault in error.faults] == list(range(2, 52))
    assert error.hidden == 80 + 2 - 50
    assert str(error).endswith("and 32 more")


def test_the_first_fifty_are_the_first_of_the_file_whatever_their_kind() -> None:
    error = refused("method,nitrate\n" + "".join(f"lot-{n},x\n" for n in range(80)))
    assert [fault.place.line for fault in error.faults] == [2, *range(2, 51)]
    assert error.hidden == 2 * 80 + 2 - 80 - 49


def test_wrong_numbers_of_rows_are_told_in_the_order_of_the_file_not_of_the_plan() -> None:
    levels = tuple(f"lot-{n}" for n in range(60))
    content = "method,nitrate\n" + "".join(f"{level},1\n" for level in reversed(levels))
    error = refused(content, replace(PLAN, levels=levels, replicates=2))
    assert [fault.place.line for fault in error.faults] == list(range(2, 52))
    assert error.hidden == 10


def test_a_blank_line_does_not_keep_rows_from_being_counted() -> None:
    error = refused(with_row("\nkit-a,1"), COUNTED)
    assert [(fault.place.line, fault.place.column) for fault in error.faults] == [(3, 1), (5, 1)]


def test_rows_are_not_counted_against_the_plan_while_some_cannot_be_read() -> None:
    assert [fault.found for fault in refused(with_row("kit-a"), COUNTED).faults] == [
        "this row has 1 cell, the header 2"
    ]


def test_a_row_whose_number_cannot_be_read_still_counts_as_a_replicate() -> None:
    assert [str(fault.place) for fault in refused(GOOD.replace("1.20", "x"), COUNTED).faults] == [
        "data/nitrate.csv:3:7"
    ]


def test_reading_goes_on_below_a_mark_that_is_never_closed() -> None:
    error = refused('method,nitrate\nkit-a,1\nkit-a,"2\nkit-b,x\n')
    assert [(fault.place.line, fault.place.column) for fault in error.faults] == [(3, 7), (4, 7)]


def test_a_fault_in_a_cell_below_a_quoted_line_end_is_placed_where_the_cell_stands() -> None:
    error = refused('note,method,nitrate\n"two\nlines",kit-a,x\nplain,kit-b,1\n')
    assert [(fault.place.line, fault.place.column) for fault in error.faults] == [(3, 14)]


def test_what_is_shown_of_a_cell_is_short_and_visible() -> None:
    (fault,) = refused(with_row("kit-a,\x1b[31m" + "9" * 500)).faults
    assert "<U+001B>" in fault.found
    assert len(fault.found) < 200


def refused_together(content: str, plan: DataPlan = TWO) -> list[tuple[str, str]]:
    """Place and finding of every fault of a file with several responses."""
    with pytest.raises(DataError) as caught:
        read_all_observations([("data/nitrate.csv", content.encode())], plan)
    return [
        (str(fault.place).removeprefix("data/nitrate.csv:"), fault.found) for fault in caught.value.faults
    ]


def test_the_faults_of_all_responses_are_told_in_one_pass_and_in_the_order_of_the_file() -> None:
    content = (
        "nitrite,method,nitrate,position\n"
        "x,kit-a,1,1\n"  # one response
        ",kit-a,y,1\n"  # both, and the place a second time
        "1,kit-c,2,3\n"  # an undeclared level
        "1,,2,z\n"  # no level, no place
        "1,kit-b,2\n"  # a cell is missing
        "1,kit-b,2,5\n"
    )
    assert refused_together(content) == [
        ("2:1", "column `nitrite` holds `x`: not a number"),
        ("3:1", "column `nitrite` is blank"),
        ("3:8", "column `nitrate` holds `y`: not a number"),
        ("3:10", "column `position` holds 1 a second time"),
        ("4:3", "level `kit-c` is not declared"),
        ("5:3", "column `method` is blank"),
        ("5:6", "column `position` holds `z`"),
        ("6:9", "this row has 3 cells, the header 4"),
    ]


def test_every_missing_column_is_named_at_once() -> None:
    faults = refused_together("method,nitrat,day\nkit-a,1,2\n")
    assert {found.partition(" in the header")[0] for _, found in faults} == {
        "no column `nitrate`",
        "no column `nitrite`",
        "no column `position`",
    }


@pytest.mark.requirement("SOURCE-4")
def test_a_decimal_comma_is_ambiguous_in_every_response() -> None:
    content = 'method,nitrate,nitrite\nkit-a,"1,5","2,5"\nkit-b,"1,5",2\n'
    plan = replace(TWO, order=None, decimal_mark="comma")
    assert refused_together(content, plan) == [("3:13", "column `nitrite` holds `2` without quotation marks")]


def test_a_second_column_of_the_name_of_a_response_is_refused() -> None:
    faults = refused_together("method,nitrate,nitrite,nitrite\nkit-a,1,2,3\n", replace(TWO, order=None))
    assert faults == [("1:24", "column 4 has the same name as column 3: `nitrite`")]
