"""Workbooks (.xlsx): numbers by their shortest decimal, texts as typed, and what cannot be seen is told."""

import io
from collections.abc import Callable
from dataclasses import replace
from datetime import date, datetime, time, timedelta

import openpyxl
import pytest
from hypothesis import given
from hypothesis import strategies as st
from openpyxl.cell.rich_text import CellRichText, TextBlock
from openpyxl.cell.text import InlineFont
from openpyxl.worksheet.worksheet import Worksheet

from assayfolio.errors import DataError
from assayfolio.exact import Decimal10, parse_decimal
from assayfolio.observations.reading import read_observations
from assayfolio.observations.values import Observations
from assayfolio.study.plan import DataPlan
from support.workbooks import SHEET, by_hand, parts_of, saved, with_part, workbook

PLAN = DataPlan("d.xlsx", ("y",), "g")
GOOD = [["g", "y"], ["a", 1.5], ["b", 2.25]]


def read(content: bytes, plan: DataPlan = PLAN) -> Observations:
    """The observations of a workbook."""
    return read_observations(content, plan, "d.xlsx")


def faults(content: bytes, plan: DataPlan = PLAN) -> list[tuple[str, str]]:
    """Place and finding of each fault of a workbook."""
    with pytest.raises(DataError) as caught:
        read(content, plan)
    assert all(fault.advice for fault in caught.value.faults)
    return [(str(fault.place).removeprefix("d.xlsx"), fault.found) for fault in caught.value.faults]


def texts(*cells: object) -> list[str]:
    """The cells of a column that is carried along, as read."""
    rows = [["g", "y", "x"], *(["a", 1, cell] for cell in cells)]
    return [row.extras[0] for row in read(workbook(rows)).rows]


def stored(xml: str) -> str:
    """The text of a value whose cell stands as `xml` in the sheet."""
    rows = "<row><c t='inlineStr'><is><t>g</t></is></c><c t='inlineStr'><is><t>y</t></is></c></row>"
    return read(by_hand(f"{rows}<row><c t='inlineStr'><is><t>a</t></is></c>{xml}</row>")).rows[0].text


# Numbers, texts, dates


def test_values_come_with_their_row_and_column_and_the_facts_of_the_file() -> None:
    observations = read(workbook(GOOD))
    assert [(row.line, row.column, row.level, row.text) for row in observations.rows] == [
        (2, 2, "a", "1.5"),
        (3, 2, "b", "2.25"),
    ]
    raw = observations.files[0]
    assert (raw.form, raw.separator, raw.sheet, raw.notices) == ("spreadsheet", None, "Results", ())


@pytest.mark.parametrize(
    ("number", "text"),
    [
        ("0.1", "0.1"),
        ("0.10000000000000001", "0.1"),
        ("0.30000000000000004", "0.30000000000000004"),
        ("12", "12"),
        ("12.0", "12"),
        ("1.2E1", "12"),
        ("1E-7", "1e-07"),
        ("5.0000000000000001E-3", "0.005"),
        ("-0.5", "-0.5"),
        ("9007199254740993", "9007199254740992"),
        ("1E+22", "1e+22"),
    ],
)
def test_a_stored_number_is_the_shortest_decimal_of_its_double(number: str, text: str) -> None:
    assert stored(f"<c><v>{number}</v></c>") == text
    assert float(text) == float(number)


@given(number=st.floats(allow_nan=False, allow_infinity=False, min_value=1e-40, max_value=1e40))
def test_any_double_comes_back_by_its_shortest_decimal_however_it_is_stored(number: float) -> None:
    for digits in (repr(number), f"{number:.17g}", f"{number:.16e}".upper()):
        text = stored(f"<c><v>{digits}</v></c>")
        assert float(text) == number
        assert parse_decimal(text) == parse_decimal(repr(number).removesuffix(".0"))


def test_a_number_with_more_digits_than_a_double_has_is_refused_and_not_rounded() -> None:
    content = by_hand(
        "<row><c t='str'><v>g</v></c><c t='str'><v>y</v></c></row>"
        "<row><c t='str'><v>a</v></c><c><v>0.1234567890123456789</v></c></row>"
    )
    assert faults(content) == [
        (":2:2", "cell B2: the number is stored with 19 digits, more than a spreadsheet's number holds")
    ]


@pytest.mark.parametrize("number", ["1E999", "-1E400", "1E-999"])
def test_a_number_beyond_the_range_of_a_double_is_refused(number: str) -> None:
    with pytest.raises(DataError, match="cell B2: the stored number is beyond the range"):
        stored(f"<c><v>{number}</v></c>")


@pytest.mark.parametrize(
    "number", ["1e999999999", "nan", "inf", "1_000", "0x1F", "\u0663", "1 2", "1,5", "--1"]
)
def test_a_stored_number_that_is_none_is_refused(number: str) -> None:
    with pytest.raises(DataError, match="cell B2: the stored number is none"):
        stored(f"<c><v>{number}</v></c>")


def test_a_text_cell_is_taken_as_typed() -> None:
    rows = read(workbook([["g", "y", "x"], ["a", "1.50", " kept "], ["1.0", " 2.0 ", "1.0"]])).rows
    assert [(row.level, row.text, row.extras) for row in rows] == [
        ("a", "1.50", (" kept ",)),
        ("1.0", "2.0", ("1.0",)),
    ]
    assert rows[0].value == Decimal10(150, -2)


def test_a_level_with_a_blank_before_it_is_refused_as_in_a_text() -> None:
    assert faults(workbook([["g", "y"], ["a", 1], [" b", 2]])) == [
        (":3:1", "cell A3: level ` b` begins or ends with a blank")
    ]


def test_with_a_decimal_comma_numbers_are_given_with_it_and_texts_have_to_have_it() -> None:
    plan = replace(PLAN, decimal_mark="comma")
    rows = read(workbook([["g", "y"], ["a", 1.5], ["b", "2,50"]]), plan).rows
    assert [(row.text, row.value) for row in rows] == [
        ("1,5", Decimal10(15, -1)),
        ("2,50", Decimal10(250, -2)),
    ]
    assert "a decimal point where a decimal comma" in faults(workbook([["g", "y"], ["a", "1.5"]]), plan)[0][1]


def test_dates_and_times_are_given_in_iso_8601() -> None:
    assert texts(
        date(2026, 3, 4),
        datetime(2026, 3, 4, 9, 30),  # noqa: DTZ001 - a spreadsheet knows no time zone
        datetime(2026, 3, 4, 9, 30, 15, 250_000),  # noqa: DTZ001
        time(9, 30),
        timedelta(hours=36, minutes=30),
    ) == ["2026-03-04", "2026-03-04T09:30:00", "2026-03-04T09:30:15.250", "09:30:00", "PT36H30M0S"]


def test_dates_that_count_from_1904_are_the_same_dates() -> None:
    book = openpyxl.Workbook()
    book.epoch = openpyxl.utils.datetime.MAC_EPOCH
    for row in [["g", "y", "x"], ["a", 1, date(2026, 3, 4)]]:
        book.worksheets[0].append(row)
    assert read(saved(book)).rows[0].extras == ("2026-03-04",)


def test_a_date_where_a_value_is_wanted_is_refused() -> None:
    assert faults(workbook([["g", "y"], ["a", date(2026, 5, 1)]])) == [
        (":2:2", "cell B2: column `y` holds `2026-05-01`: not a number")
    ]


def test_a_date_out_of_the_calendar_is_refused() -> None:
    def dated(sheet: Worksheet) -> None:
        sheet["C2"].number_format = "yyyy-mm-dd"

    content = workbook([["g", "y", "x"], ["a", 1, 1e9]], dated)
    assert faults(content) == [(":2:3", "cell C2: the date is out of the calendar's range")]


@pytest.mark.parametrize("cell", [True, "#DIV/0!", "#N/A"])
def test_booleans_and_error_values_are_no_numbers(cell: object) -> None:
    assert "not a number" in faults(workbook([["g", "y"], ["a", cell]]))[0][1]


def test_an_error_value_can_be_declared_as_a_missing_value_but_is_no_level() -> None:
    plan = replace(PLAN, missing="omit", missing_codes=("#N/A",))
    observations = read(workbook([["g", "y"], ["a", "#N/A"], ["a", 2]]), plan)
    assert [row.text for row in observations.rows] == ["2"]
    assert [aside.text for aside in observations.set_aside] == ["#N/A"]
    assert faults(workbook([["g", "y"], ["#REF!", 1]]))[0] == (
        ":2:1",
        "cell A2: an error value of the spreadsheet program, `#REF!`",
    )


def test_rich_text_is_put_together_and_phonetic_hints_are_left_out() -> None:
    rich = CellRichText("kit-", TextBlock(InlineFont(b=True), "a"))
    assert texts(rich) == ["kit-a"]
    cells = [f"<c t='s'><v>{number}</v></c>" for number in range(3)]
    content = by_hand(
        f"<row>{cells[0]}{cells[1]}</row><row>{cells[2]}<c><v>1</v></c></row>",
        shared=["g", "y", "</t><r><t>ki</t></r><r><t>t</t></r><rPh><t>KI</t></rPh><t>"],
    )
    assert read(content).levels == ("kit",)


def test_control_characters_in_the_workbooks_own_spelling_are_undone_and_refused_in_labels() -> None:
    assert "U+0007" in faults(workbook([["g", "y"], ["a_x0007_", 1]]))[0][1]


# Formulas


def with_formula(result: str, kind: str = "n") -> bytes:
    """A workbook whose value B2 is a formula; `result` is the XML of its stored value."""
    return by_hand(
        "<row r='1'><c r='A1' t='str'><v>g</v></c><c r='B1' t='str'><v>y</v></c></row>"
        f"<row r='2'><c r='A2' t='str'><v>a</v></c><c r='B2' t='{kind}'><f>1+1</f>{result}</c></row>"
    )


def test_a_formula_is_taken_by_its_stored_value_with_a_notice() -> None:
    observations = read(with_formula("<v>2</v>"))
    assert observations.rows[0].text == "2"
    assert observations.files[0].notices == ("formulas were taken by their stored values: B2",)


def test_of_many_formulas_the_first_are_named() -> None:
    def formulas(sheet: Worksheet) -> None:
        for row in range(2, 14):
            sheet.cell(row, 2).value = 1.5

    content = workbook([["g", "y"], *([["a", None]] * 12)], formulas)
    sheet = parts_of(content)[SHEET].replace(b"<v>1.5</v>", b"<f>3/2</f><v>1.5</v>")
    (notice,) = read(with_part(content, SHEET, sheet)).files[0].notices
    assert notice == "formulas were taken by their stored values: B2, B3, B4, B5, B6 and 7 more"


@pytest.mark.parametrize("result", ["", "<v/>", "<v></v>"])
def test_a_formula_without_a_stored_value_is_refused(result: str) -> None:
    assert faults(with_formula(result)) == [(":2:2", "cell B2: a formula without a stored value")]
    assert faults(workbook([["g", "y"], ["a", "=1+1"]]))[0] == (
        ":2:2",
        "cell B2: a formula without a stored value",
    )


def test_rows_below_the_table_whose_formulas_give_nothing_are_not_rows() -> None:
    content = by_hand(
        "<row><c t='str'><v>g</v></c><c t='str'><v>y</v></c></row>"
        "<row><c t='str'><v>a</v></c><c><v>1</v></c></row>"
        "<row><c t='str'><f>IF(1,\"\")</f><v></v></c></row>"
    )
    assert [row.line for row in read(content).rows] == [2]


# What cannot be seen


def test_a_hidden_row_with_values_is_refused() -> None:
    def hide(sheet: Worksheet) -> None:
        sheet.row_dimensions[3].hidden = True

    assert faults(workbook(GOOD, hide)) == [(":3:1", "cell A3: a hidden row that holds values")]


def test_a_row_of_no_height_is_a_hidden_row() -> None:
    sheet = parts_of(workbook(GOOD))[SHEET].replace(b'<row r="3"', b'<row r="3" ht="0" customHeight="1"')
    assert faults(with_part(workbook(GOOD), SHEET, sheet)) == [
        (":3:1", "cell A3: a hidden row that holds values")
    ]


def test_rows_that_are_hidden_unless_they_say_otherwise_are_refused() -> None:
    def hide(sheet: Worksheet) -> None:
        sheet.sheet_format.zeroHeight = True

    assert "are hidden unless they say otherwise" in faults(workbook(GOOD, hide))[0][1]


def test_a_hidden_row_below_the_table_or_above_the_header_does_not_matter() -> None:
    def hide(sheet: Worksheet) -> None:
        sheet.row_dimensions[1].hidden = True
        sheet.row_dimensions[9].hidden = True

    assert len(read(workbook([["made by", "x"], *GOOD], hide), replace(PLAN, header_row=2)).rows) == 2


def test_a_hidden_column_is_read_with_a_notice() -> None:
    def hide(sheet: Worksheet) -> None:
        sheet.column_dimensions["C"].hidden = True

    content = workbook([["g", "y", "note"], ["a", 1, "x"]], hide)
    assert read(content).files[0].notices == ("column C (`note`) is hidden in the sheet and was read",)


def test_numbers_shown_in_percent_are_taken_as_stored_with_a_notice() -> None:
    def percent(sheet: Worksheet) -> None:
        sheet["B2"].number_format = "0.0%"

    observations = read(workbook([["g", "y"], ["a", 0.05]], percent))
    assert observations.rows[0].text == "0.05"
    assert observations.files[0].notices == (
        "numbers shown in percent were taken as stored, 0.05 for 5 %: B2",
    )


@pytest.mark.parametrize(
    ("area", "place"), [("A2:A3", ":2:1"), ("B1:B2", ":1:2"), ("A3:B3", ":3:1"), ("B3:D9", ":3:2")]
)
def test_merged_cells_in_the_table_are_refused(area: str, place: str) -> None:
    first = faults(workbook(GOOD, lambda sheet: sheet.merge_cells(area)))[0]
    assert first == (place, f"cell {area[:2]}: merged cells ({area})")


def test_merged_cells_above_and_beside_the_table_do_not_matter() -> None:
    def merge(sheet: Worksheet) -> None:
        sheet.merge_cells("A1:B1")
        sheet.merge_cells("D2:E3")

    assert len(read(workbook([["Report"], *GOOD], merge), replace(PLAN, header_row=2)).rows) == 2


# Sheets


def two_sheets(change: Callable[[openpyxl.Workbook], None] = lambda _: None) -> bytes:
    """A workbook with the sheets First and Second."""
    book = openpyxl.Workbook()
    for name, number in (("First", 1), ("Second", 2)):
        sheet = book.create_sheet(name)
        sheet.append(["g", "y"])
        sheet.append(["a", number])
    book.remove(book.worksheets[0])
    change(book)
    return saved(book)


def test_the_declared_sheet_is_read() -> None:
    observations = read(two_sheets(), replace(PLAN, sheet="Second"))
    assert (observations.rows[0].text, observations.files[0].sheet) == ("2", "Second")


def test_of_several_sheets_one_has_to_be_declared() -> None:
    assert faults(two_sheets()) == [("", "the workbook has several sheets")]
    with pytest.raises(DataError, match="`sheet` holds the values, of `First`, `Second`"):
        read(two_sheets())


def test_a_sheet_that_is_not_there_is_told() -> None:
    assert faults(two_sheets(), replace(PLAN, sheet="Third")) == [("", "the workbook has no sheet `Third`")]


@pytest.mark.parametrize("state", ["hidden", "veryHidden"])
def test_a_hidden_sheet_is_not_read_even_where_it_is_declared(state: str) -> None:
    def hide(book: openpyxl.Workbook) -> None:
        book["Second"].sheet_state = state

    assert read(two_sheets(hide)).files[0].notices == ("hidden sheets were not read: `Second`",)
    assert faults(two_sheets(hide), replace(PLAN, sheet="Second")) == [("", "sheet `Second` is hidden")]


def test_a_chart_is_no_sheet_with_values() -> None:
    content = two_sheets(lambda book: book.create_chartsheet("Chart") and None)
    assert faults(content, replace(PLAN, sheet="Chart")) == [("", "sheet `Chart` holds no cells")]


# Header and table


def test_the_header_may_stand_in_a_declared_row_and_what_is_above_is_kept() -> None:
    rows = [["made by", "A. Analyst"], [], [None, 20.5, date(2026, 3, 4)], *GOOD]
    raw = read(workbook(rows), replace(PLAN, header_row=4)).files[0]
    assert raw.metadata == (("made by", "A. Analyst"), (), ("", "20.5", "2026-03-04"))
    assert raw.header_row == 4


def test_a_header_row_without_names_is_told() -> None:
    assert faults(workbook(GOOD), replace(PLAN, header_row=9)) == [(":9:1", "row 9 holds no column names")]


def test_a_missing_column_is_told_with_those_that_are_there() -> None:
    assert faults(workbook([["g", "Y2"], ["a", 1]])) == [
        (":1:1", "cell A1: no column `y` in the header (`g`, `Y2`)")
    ]


def test_names_that_stand_twice_or_nowhere_are_refused() -> None:
    assert faults(workbook([["g", "y", "y"], ["a", 1, 2]])) == [
        (":1:3", "cell C1: column 3 has the same name as column 2: `y`")
    ]
    assert faults(workbook([["g", None, "y"], ["a", 1, 2]])) == [(":1:2", "cell B1: column 2 has no name")]


def test_blank_rows_between_are_refused_and_below_left_out() -> None:
    assert faults(workbook([["g", "y"], ["a", 1], [], [], ["b", 2]])) == [
        (":3:1", "cell A3: 2 blank rows between the rows")
    ]

    def style(sheet: Worksheet) -> None:
        sheet["B9"].number_format = "0.00"

    assert len(read(workbook(GOOD, style)).rows) == 2


def test_a_value_in_a_column_without_a_name_is_refused() -> None:
    assert faults(workbook([["g", "y"], ["a", 1, None, 7]])) == [
        (":2:4", "cell D2: a cell in a column that has no name")
    ]


def test_cells_that_are_not_stored_are_blank() -> None:
    observations = read(workbook([["g", "y", "note"], ["a", 1], ["b", 2, "x"]]))
    assert [row.extras for row in observations.rows] == [("",), ("x",)]


def test_all_faults_of_a_sheet_are_told_in_one_pass() -> None:
    def hide(sheet: Worksheet) -> None:
        sheet.row_dimensions[5].hidden = True

    rows = [["g", "y"], ["a", "x"], [None, 2], ["b", "=1"], ["c", 3]]
    assert [place for place, _ in faults(workbook(rows, hide))] == [":2:2", ":3:1", ":4:2", ":5:1"]


# Against the library's own reading


cells = st.one_of(
    st.none(),
    st.integers(-(10**9), 10**9),
    st.floats(allow_nan=False, allow_infinity=False, min_value=-1e12, max_value=1e12),
    st.text(st.characters(min_codepoint=32, max_codepoint=0x2FF, exclude_characters="=\x7f"), max_size=12),
    st.booleans(),
)


@given(column=st.lists(cells, min_size=1, max_size=8))
def test_cells_are_those_that_openpyxl_reads(column: list[object]) -> None:
    content = workbook([["g", "y", "x"], *([["a", 1, cell] for cell in column])])
    book = openpyxl.load_workbook(io.BytesIO(content), read_only=True, data_only=True)
    theirs = [row[2] for row in book.worksheets[0].iter_rows(min_row=2, max_col=3, values_only=True)]
    for ours, value in zip((row.extras[0] for row in read(content).rows), theirs, strict=True):
        if isinstance(value, bool):
            assert ours == str(value).upper()
        elif isinstance(value, int | float):
            assert float(ours) == value
        else:
            assert ours == (value or "")
