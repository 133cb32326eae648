"""The columns of the sheet: those that the study wants to find in its data, filled in or left blank."""

import pytest

from assayfolio.errors import StudyError
from assayfolio.worksheet.columns import worksheet_of
from assayfolio.worksheet.rows import planned_rows
from worksheet.studies import BLOCKED, PLAIN, study_of

FACTS = "measurement:\n  item: {column: sample}\n  operator: {column: analyst}\n  method: ISO 1\n"


def sheet_of(text: str):
    study = study_of(text)
    return worksheet_of(study, planned_rows(study))


def named(text: str) -> list[str]:
    return [column.name for column in sheet_of(text).columns]


def test_a_complete_sheet_has_position_label_level_replicate_and_a_blank_for_the_result():
    sheet = sheet_of(PLAIN)
    assert [column.name for column in sheet.columns] == ["position", "item", "dryer", "replicate", "moisture"]
    assert sheet.cells[0] == (1, "WP-01", "south", 4, None)
    assert all(cells[-1] is None for cells in sheet.cells)
    assert sheet.columns[-1].unit == "g/100 g"


def test_blocks_and_facts_have_columns_of_their_own():
    assert named(BLOCKED + FACTS) == [
        *("position", "day", "sample", "dryer", "replicate", "moisture"),
        "analyst",
    ]


def test_a_fact_that_stands_in_a_column_of_the_sheet_has_no_second_one():
    facts = "measurement:\n  measured-at: {column: day}\n  lot: {column: dryer}\n"
    assert named(BLOCKED + facts) == ["position", "day", "item", "dryer", "replicate", "moisture"]


def test_every_response_has_a_column_and_all_values_their_unit():
    text = PLAIN.replace("response: moisture", "response: [moisture, ash]\n  unit-column: unit")
    sheet = sheet_of(text)
    assert [column.name for column in sheet.columns][-3:] == ["moisture", "ash", "unit"]
    assert {cells[-1] for cells in sheet.cells} == {"g/100 g"}


def test_repeats_of_a_replicate_are_told_by_its_label():
    text = PLAIN.replace("order: position", "order: position\n  replicate-unit: sample")
    assert named(text + FACTS) == ["position", "sample", "dryer", "moisture", "analyst"]
    own = sheet_of(text)
    assert [column.name for column in own.columns][3] == "sample"
    assert [cells[3] for cells in own.cells] == [cells[1] for cells in own.cells]
    without_labels = sheet_of(text.replace(", item: WP", ""))
    units = [(cells[1], cells[2]) for cells in without_labels.cells]
    assert len(set(units)) == len(units)


def test_two_columns_of_one_name_are_refused_with_advice():
    with pytest.raises(StudyError, match="two columns would be called `item`"):
        sheet_of(PLAIN.replace("factor: dryer", "factor: item"))
