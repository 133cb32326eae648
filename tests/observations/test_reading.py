"""Raw data files that are read: what they hold comes through exactly, with the line it stands on."""

import hashlib
from dataclasses import replace

import pytest

from assayfolio.exact import Decimal10
from assayfolio.observations.reading import read_all_observations, read_observations
from assayfolio.observations.values import Observations
from assayfolio.study.plan import DataPlan

PLAN = DataPlan("data/nitrate.csv", ("nitrate",), "method")
GOOD = "method,nitrate\nkit-b,1.10\nkit-a,1.2\nkit-b,13e-1\n"


def read(content: str | bytes, plan: DataPlan = PLAN) -> Observations:
    """The observations in `content`."""
    given = content.encode() if isinstance(content, str) else content
    return read_observations(given, plan, "data/nitrate.csv")


def cells(observations: Observations) -> list[tuple[int, str, str]]:
    """Line, level and text of each row."""
    return [(row.line, row.level, row.text) for row in observations.rows]


@pytest.mark.requirement("SOURCE-4")
def test_a_value_is_the_decimal_that_was_typed_and_knows_its_line() -> None:
    rows = read(GOOD).rows
    assert [(row.line, row.level, row.text) for row in rows] == [
        (2, "kit-b", "1.10"),
        (3, "kit-a", "1.2"),
        (4, "kit-b", "13e-1"),
    ]
    assert [row.value for row in rows] == [Decimal10(110, -2), Decimal10(12, -1), Decimal10(13, -1)]


def test_the_digest_is_that_of_the_bytes_that_were_read() -> None:
    content = b"\xef\xbb\xbf" + GOOD.replace("\n", "\r\n").encode()
    observations = read(content)
    assert observations.files[0].sha256 == hashlib.sha256(content).hexdigest()
    assert observations.files[0].size == len(content)


def test_the_most_decimals_of_the_file_are_known() -> None:
    assert read(GOOD).places == 2


def test_levels_are_in_the_order_of_the_plan_or_else_of_first_appearance() -> None:
    assert read(GOOD).levels == ("kit-b", "kit-a")
    assert read(GOOD, replace(PLAN, levels=("kit-a", "kit-b"))).levels == ("kit-a", "kit-b")


@pytest.mark.parametrize(
    ("separator", "name"),
    [(",", "comma"), (";", "semicolon"), ("\t", "tab")],
    ids=["comma", "semicolon", "tab"],
)
@pytest.mark.parametrize("line_end", ["\n", "\r\n"], ids=["LF", "CRLF"])
@pytest.mark.parametrize("mark", [b"", b"\xef\xbb\xbf"], ids=["plain", "marked"])
def test_separator_line_end_and_byte_order_mark_change_nothing(
    separator: str, name: str, line_end: str, mark: bytes
) -> None:
    content = mark + GOOD.replace(",", separator).replace("\n", line_end).encode()
    observations = read(content)
    assert observations.rows == read(GOOD).rows
    assert observations.files[0].separator == name
    assert observations.files[0].byte_order_mark == bool(mark)


@pytest.mark.parametrize("ending", ["", "\n", "\n\n \n", "\r\n\t\r\n"], ids=["none", "one", "blank", "CRLF"])
def test_the_end_of_the_file_may_lack_a_line_end_or_have_blank_lines(ending: str) -> None:
    assert cells(read(GOOD.rstrip("\n") + ending)) == cells(read(GOOD))


def test_lines_may_end_in_both_ways_within_one_file() -> None:
    assert cells(read(GOOD.replace("1.10\n", "1.10\r\n"))) == cells(read(GOOD))


def test_other_columns_are_carried_along_as_they_stand() -> None:
    observations = read("day,nitrate,note,method\n 1,1.5,\u65b0,kit-a\n2,1.6,,kit-b\n")
    assert observations.extra_columns == ("day", "note")
    assert [row.extras for row in observations.rows] == [(" 1", "\u65b0"), ("2", "")]


def test_quoted_cells_may_hold_separators_marks_and_line_ends() -> None:
    content = 'method,note,"nitrate"\r\n"kit, ""a""","two\r\nlines, one cell","1.5"\r\nkit-b,,2\r\n'
    observations = read(content)
    assert cells(observations) == [(2, 'kit, "a"', "1.5"), (4, "kit-b", "2")]
    assert observations.rows[0].extras == ("two\nlines, one cell",)


def test_a_quoted_separator_in_the_header_does_not_decide_the_separator() -> None:
    observations = read('"method";"nitrate";"a, b"\nkit-a;1;x\nkit-b;2;y\n')
    assert observations.files[0].separator == "semicolon"
    assert observations.extra_columns == ("a, b",)


def test_the_separator_is_that_under_which_both_columns_are_found() -> None:
    observations = read("method;nitrate;a,b,c\nkit-a;1;x\nkit-b;2;y\n")
    assert observations.files[0].separator == "semicolon"


@pytest.mark.parametrize("text", ["1,5", "-0,25", "+12", "3,e2"])
def test_a_decimal_comma_is_read_where_it_is_declared(text: str) -> None:
    plan = replace(PLAN, decimal_mark="comma")
    row = read(f"method;nitrate\nkit-a;{text}\n", plan).rows[0]
    assert row.text == text
    assert row.value == read(f"method;nitrate\nkit-a;{text.replace(',', '.')}\n").rows[0].value


def test_decimal_commas_between_comma_separators_are_read_in_quotation_marks() -> None:
    plan = replace(PLAN, decimal_mark="comma")
    assert cells(read('method,nitrate\nkit-a,"1,5"\n', plan)) == [(2, "kit-a", "1,5")]


def test_blanks_around_a_number_are_not_part_of_it() -> None:
    assert cells(read("method,nitrate\nkit-a, 1.50\t\n")) == [(2, "kit-a", "1.50")]


def test_levels_that_differ_in_case_or_inner_marks_are_different_levels() -> None:
    assert read("method,nitrate\nKit,1\nkit,2\nkit-,3\n").levels == ("Kit", "kit", "kit-")


def test_a_study_with_the_planned_number_of_rows_at_each_level_is_read() -> None:
    plan = replace(PLAN, levels=("kit-a", "kit-b"), replicates=(("kit-b", 2), ("kit-a", 1)))
    assert len(read(GOOD, plan).rows) == 3


def test_the_first_of_several_responses_is_read_and_the_others_are_carried_along() -> None:
    plan = replace(PLAN, response=("nitrate", "nitrite"))
    observations = read("method,nitrite,nitrate\nkit-a,0.1,1.1\n", plan)
    assert observations.response == "nitrate"
    assert observations.rows[0].extras == ("0.1",)


TWO = replace(PLAN, response=("nitrate", "nitrite"))
BOTH = "method,nitrite,day,nitrate\nkit-a,0.1,1,1.10\nkit-b,0.25,2,1.2\n"


def test_every_response_has_its_values_in_the_order_of_the_plan_and_the_same_rows() -> None:
    nitrate, nitrite = read_all_observations([("data/nitrate.csv", BOTH.encode())], TWO)
    assert (nitrate.response, nitrite.response) == ("nitrate", "nitrite")
    assert cells(nitrate) == [(2, "kit-a", "1.10"), (3, "kit-b", "1.2")]
    assert cells(nitrite) == [(2, "kit-a", "0.1"), (3, "kit-b", "0.25")]
    assert (nitrate.places, nitrite.places) == (2, 2)
    assert nitrate.levels == nitrite.levels == ("kit-a", "kit-b")
    assert nitrate.files == nitrite.files


def test_the_column_of_another_response_is_not_one_that_is_carried_along() -> None:
    for observations in read_all_observations([("data/nitrate.csv", BOTH.encode())], TWO):
        assert observations.extra_columns == ("day",)
        assert [row.extras for row in observations.rows] == [("1",), ("2",)]


def test_one_response_is_read_as_a_set_of_one() -> None:
    assert read_all_observations([("data/nitrate.csv", GOOD.encode())], PLAN) == (read(GOOD),)


def test_replicates_are_counted_once_whatever_the_number_of_responses() -> None:
    plan = replace(TWO, replicates=1)
    assert len(read_all_observations([("data/nitrate.csv", BOTH.encode())], plan)) == 2


ORDERED = replace(PLAN, order="position")


def test_the_measuring_order_is_kept_with_each_value_and_not_carried_along() -> None:
    observations = read("method,position,nitrate\nkit-a, 12 ,1\nkit-b,003,2\nkit-a,0,3\n", ORDERED)
    assert [row.order for row in observations.rows] == [12, 3, 0]
    assert observations.extra_columns == ()
    assert [row.order for row in read(GOOD).rows] == [None, None, None]


def test_both_responses_of_a_row_have_its_place_in_the_measuring_order() -> None:
    plan = replace(TWO, order="day")
    for observations in read_all_observations([("data/nitrate.csv", BOTH.encode())], plan):
        assert [row.order for row in observations.rows] == [1, 2]
        assert observations.extra_columns == ()


def test_a_measuring_order_without_a_plan_for_it_is_another_column() -> None:
    observations = read("method,position,nitrate\nkit-a,1,1\nkit-b,1,2\n")
    assert observations.extra_columns == ("position",)
