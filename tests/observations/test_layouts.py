"""Long and wide tables, headers further down, several files, guarded labels: the same values as received."""

from dataclasses import replace

import pytest

from assayfolio.errors import DataError
from assayfolio.observations.guard import guarded
from assayfolio.observations.reading import read_all_observations, read_observations
from assayfolio.observations.values import Observations
from assayfolio.study.plan import DataPlan, MeasurementFact
from support.workbooks import workbook

PLAN = DataPlan("d.csv", ("y",), "g")
WIDE = replace(PLAN, layout="wide", levels=("a", "b"))


def read(text: str, plan: DataPlan = PLAN) -> Observations:
    """The observations of a text."""
    return read_observations(text.encode(), plan, "d.csv")


def values(observations: Observations) -> list[tuple[int, int, str, str]]:
    """Line, column, level and text of each value."""
    return [(row.line, row.column, row.level, row.text) for row in observations.rows]


def faults(content: str | bytes, plan: DataPlan = PLAN, file: str = "d.csv") -> list[tuple[str, str]]:
    """Place and finding of each fault."""
    with pytest.raises(DataError) as caught:
        read_observations(content.encode() if isinstance(content, str) else content, plan, file)
    assert all(fault.advice for fault in caught.value.faults)
    return [(str(fault.place).removeprefix(file), fault.found) for fault in caught.value.faults]


# Wide


def test_in_the_wide_layout_the_header_names_the_level_of_each_value() -> None:
    observations = read("a,b\n1.0,2.0\n1.5,2.5\n", WIDE)
    assert values(observations) == [
        (2, 1, "a", "1.0"),
        (2, 2, "b", "2.0"),
        (3, 1, "a", "1.5"),
        (3, 2, "b", "2.5"),
    ]
    assert (observations.levels, observations.response, observations.factor) == (("a", "b"), "y", "g")


def test_blank_cells_below_the_last_value_of_a_level_are_no_values() -> None:
    assert [text for _, _, level, text in values(read("a,b\n1,2\n1.5,\n1.7, \n", WIDE)) if level == "b"] == [
        "2"
    ]


def test_a_blank_cell_between_the_values_of_a_level_is_a_missing_value() -> None:
    text = "a,b\n1,2\n,3\n4,\n"
    assert faults(text, WIDE) == [(":3:1", "column `a` is blank")]
    observations = read(text, replace(WIDE, missing="omit"))
    assert [(aside.line, aside.level, aside.cause) for aside in observations.set_aside] == [
        (3, "a", "missing")
    ]


def test_levels_come_in_the_order_of_the_plan_wherever_their_columns_stand() -> None:
    assert [level for _, _, level, _ in values(read("b,note,a\n2,x,1\n", WIDE))] == ["a", "b"]


def test_other_columns_are_carried_along_with_each_value_of_the_row() -> None:
    observations = read("day,a,b\nmon,1,2\ntue,3,4\n", WIDE)
    assert observations.extra_columns == ("day",)
    assert [row.extras for row in observations.rows] == [("mon",), ("mon",), ("tue",), ("tue",)]


def test_every_declared_level_has_to_have_a_column() -> None:
    assert faults("a,c\n1,2\n", WIDE) == [(":1:1", "no column `b` in the header (by comma: `a`, `c`)")]


def test_a_level_without_any_value_is_told() -> None:
    assert faults("a,b\n1,\n2,\n", WIDE) == [("", "level `b` has no row")]


def test_a_table_of_blanks_has_no_values() -> None:
    assert faults("day,a,b\n1,,\n2,,\n", WIDE) == [("", "level `a` has no row"), ("", "level `b` has no row")]


def test_faults_in_the_wide_layout_stand_at_the_cell_and_name_its_level() -> None:
    assert faults("a,b\n1,x\n", WIDE) == [(":2:3", "column `b` holds `x`: not a number")]
    sheet = workbook([["a", "b"], [1, "x"]])
    assert faults(sheet, WIDE, "d.xlsx") == [(":2:2", "cell B2: column `b` holds `x`: not a number")]


def test_planned_replicates_are_counted_in_the_wide_layout_too() -> None:
    assert faults("a,b\n1,2\n3,\n", replace(WIDE, replicates=2)) == [
        (":2:3", "level `b`: found 1, planned 2")
    ]


def test_a_decimal_comma_between_commas_has_to_stand_in_marks_in_the_wide_layout_too() -> None:
    plan = replace(WIDE, decimal_mark="comma")
    assert values(read('a,b\n"1,5","2"\n', plan)) == [(2, 1, "a", "1,5"), (2, 2, "b", "2")]
    assert faults('a,b\n"1,5",2\n', plan)[0][1] == "column `b` holds `2` without quotation marks"


@pytest.mark.parametrize(
    "change",
    [
        {"levels": None},
        {"response": ("y", "z")},
        {"order": "position"},
        {"unit_column": "unit"},
        {"replicate_unit": "sample"},
    ],
    ids=lambda change: next(iter(change)),
)
def test_a_wide_plan_that_no_file_can_fulfil_is_refused(change: dict[str, object]) -> None:
    plan = replace(WIDE, **change)  # type: ignore[arg-type]
    with pytest.raises(DataError, match="the wide layout is for one response"):
        read_all_observations([("d.csv", b"a,b\n1,2\n")], plan)


# Header further down

ABOVE = 'Instrument;"IC 7; rebuilt"\n\nmade by A. Analyst, reviewed\ng;y\na;1\nb;2\n'


def test_the_header_may_stand_in_a_declared_line_and_what_is_above_is_kept() -> None:
    observations = read(ABOVE, replace(PLAN, header_row=4))
    assert [(row.line, row.text) for row in observations.rows] == [(5, "1"), (6, "2")]
    raw = observations.files[0]
    assert (raw.header_row, raw.separator) == (4, "semicolon")
    assert raw.metadata == (("Instrument", "IC 7; rebuilt"), (), ("made by A. Analyst, reviewed",))


def test_a_line_above_the_header_that_is_no_row_is_kept_as_it_stands() -> None:
    raw = read('say "so\ng,y\na,1\n', replace(PLAN, header_row=2)).files[0]
    assert raw.metadata == (('say "so',),)


def test_a_fault_below_a_header_further_down_is_placed_by_the_lines_of_the_file() -> None:
    assert faults(ABOVE.replace("b;2", "b;x"), replace(PLAN, header_row=4)) == [
        (":6:3", "column `y` holds `x`: not a number")
    ]


def test_a_header_row_beyond_the_file_or_on_a_blank_line_is_told() -> None:
    assert faults(ABOVE, replace(PLAN, header_row=9)) == [
        ("", "the file has 6 lines; the column names are expected in line 9")
    ]
    assert faults(ABOVE, replace(PLAN, header_row=2)) == [(":2:1", "a blank line")]


def test_an_endless_line_above_the_header_is_refused() -> None:
    text = "x" * 10_001 + "\ng,y\na,1\n"
    assert "a line of 10,001 characters above" in faults(text, replace(PLAN, header_row=2))[0][1]


# Several files


def of_files(*texts: str, plan: DataPlan = PLAN) -> Observations:
    """The observations of several files."""
    files = [(f"run-{number}.csv", text.encode()) for number, text in enumerate(texts, start=1)]
    return read_all_observations(files, plan)[0]


def test_several_files_are_one_table_in_their_order() -> None:
    observations = of_files("g,y\na,1\nb,2\n", "y;g\n3;b\n")
    assert [(row.file, row.line, row.level, row.text) for row in observations.rows] == [
        (0, 2, "a", "1"),
        (0, 3, "b", "2"),
        (1, 2, "b", "3"),
    ]
    assert [raw.separator for raw in observations.files] == ["comma", "semicolon"]


def test_columns_that_are_carried_along_are_those_of_all_files() -> None:
    observations = of_files("g,y,day\na,1,mon\n", "note,g,y,day\nx,b,2,tue\n")
    assert observations.extra_columns == ("day", "note")
    assert [row.extras for row in observations.rows] == [("mon", ""), ("tue", "x")]


def test_the_faults_of_all_files_are_told_in_the_order_of_the_files() -> None:
    with pytest.raises(DataError) as caught:
        of_files("g,y\na,x\n", "g,y\na,1\n", "g,y\n\na,1\n,2\n")
    assert [str(fault.place) for fault in caught.value.faults] == [
        "run-1.csv:2:3",
        "run-3.csv:2:1",
        "run-3.csv:4:1",
    ]
    assert caught.value.headline == "run-1.csv and run-3.csv cannot be used: 3 faults"


def test_replicates_are_counted_over_all_files() -> None:
    plan = replace(PLAN, replicates=2)
    assert len(of_files("g,y\na,1\nb,2\n", "g,y\nb,3\na,4\n", plan=plan).rows) == 4
    with pytest.raises(DataError, match=r"run-2\.csv:2:1: level `b`: found 3, planned 2"):
        of_files("g,y\na,1\nb,2\nb,2\n", "g,y\nb,3\na,4\n", plan=plan)


def test_a_file_of_several_without_a_row_is_told() -> None:
    with pytest.raises(DataError, match=r"run-2\.csv: the file has column names but no rows"):
        of_files("g,y\na,1\n", "g,y\n")


def test_files_of_different_forms_are_read_together() -> None:
    files = [("a.csv", b"g,y\na,1.0\n"), ("b.xlsx", workbook([["g", "y"], ["b", 2.5]]))]
    (observations,) = read_all_observations(files, PLAN)
    assert [(row.level, row.text) for row in observations.rows] == [("a", "1.0"), ("b", "2.5")]
    with pytest.raises(DataError) as caught:
        read_all_observations([files[0], ("b.xlsx", workbook([["g", "y"], ["b", "x"]]))], PLAN)
    (fault,) = caught.value.faults
    assert str(fault).startswith("b.xlsx:2:2: cell B2: column `y` holds `x`: not a number - ")


# Facts in columns


@pytest.mark.requirement("SOURCE-5")
def test_a_column_with_a_fact_of_the_measurement_has_to_be_there_and_filled() -> None:
    facts = (MeasurementFact("operator", None, "analyst"),)
    files = [("d.csv", b"g,y,analyst\na,1,K.\nb,2, \n")]
    with pytest.raises(DataError, match=r"d\.csv:3:5: column `analyst` is blank"):
        read_all_observations(files, PLAN, facts)
    with pytest.raises(DataError, match="no column `analyst` in the header"):
        read_all_observations([("d.csv", b"g,y\na,1\n")], PLAN, facts)
    (observations,) = read_all_observations([("d.csv", b"g,y,analyst\na,1,K.\n")], PLAN, facts)
    assert (observations.extra_columns, observations.rows[0].extras) == (("analyst",), ("K.",))


# Guarded labels

RISKY = ("=A1", "+lot", "-20 C", "@home", "'=quoted")


def test_guarded_labels_are_read_as_they_were_with_a_notice() -> None:
    lines = [f"{guarded(label)},1" for label in (*RISKY, "plain", "'s Hertogenbosch")]
    observations = read("g,y\n" + "\n".join(lines) + "\n")
    assert observations.levels == (*RISKY, "plain", "'s Hertogenbosch")
    (notice,) = observations.files[0].notices
    assert notice.startswith("a guarding apostrophe was taken off the levels `''=quoted`, `'+lot`")


def test_labels_of_which_only_some_are_guarded_stay_as_typed() -> None:
    observations = read("g,y\n'=A1,1\n=A2,2\n")
    assert observations.levels == ("'=A1", "=A2")
    assert observations.files[0].notices == ()


def test_a_declared_label_that_looks_guarded_stays_as_typed() -> None:
    plan = replace(PLAN, levels=("'=A1", "b"))
    assert read("g,y\n'=A1,1\nb,2\n", plan).levels == ("'=A1", "b")


def test_cells_behind_a_guarded_label_keep_their_place() -> None:
    assert faults("g,y\n'=A1,x\n") == [(":2:6", "column `y` holds `x`: not a number")]


def test_the_text_cells_of_a_workbook_are_never_guarded() -> None:
    assert read_observations(workbook([["g", "y"], ["'=A1", 1]]), PLAN, "d.xlsx").levels == ("'=A1",)
