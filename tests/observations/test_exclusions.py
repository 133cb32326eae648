"""Exclusions: each means one received value; it leaves the analysis, and stays on record with the reason."""

from dataclasses import replace
from types import MappingProxyType

import pytest

from assayfolio.errors import DataError
from assayfolio.exact import Decimal10
from assayfolio.study.plan import DataPlan
from support.received import REASON, excluded, long_lines, read, read_each, read_one, study_with

LINES = long_lines({"a": ["0.31", "0.71", "0.42"], "b": ["0.52", "0.61"]})


def faults_of(lines: list[str], *rows: tuple[int, str]) -> list[str]:
    with pytest.raises(DataError) as caught:
        read(study_with(), lines, excluded(*rows))
    return [str(fault) for fault in caught.value.faults]


@pytest.mark.requirement("CHANGE-2")
def test_an_excluded_value_is_not_analysed_and_stays_on_record():
    found = read_one("", LINES, excluded((3, "0.71")))
    assert [row.text for row in found.rows] == ["0.31", "0.42", "0.52", "0.61"]
    (aside,) = found.set_aside
    assert (aside.file, aside.line, aside.level, aside.text) == (0, 3, "a", "0.71")
    assert (aside.cause, aside.value, aside.reason) == ("excluded", Decimal10(71, -2), REASON)
    assert (aside.decided_by, aside.decided_at, aside.approved_by) == ("A. Analyst", "2031-03-04", "")


def test_what_would_be_analysed_without_exclusions_is_what_is_analysed_where_there_are_none():
    assert read_one("", LINES, excluded((3, "0.71"))).with_excluded == read_one("", LINES).rows
    plain = read_one("", LINES)
    assert plain.with_excluded is plain.rows


def test_a_text_that_does_not_stand_there_guards_against_shifted_rows():
    (fault,) = faults_of(LINES, (4, "0.71"))
    assert fault.startswith("left-out.yaml:2:5: line 4 of values.csv holds `0.42`, the exclusion says `0.71`")
    assert "rows may have moved" in fault


def test_a_text_is_compared_as_typed_and_not_by_its_number():
    (fault,) = faults_of(LINES, (3, "0.710"))
    assert "the exclusion says `0.710`" in fault


def test_a_line_without_a_value_is_refused():
    (fault,) = faults_of(LINES, (40, "0.71"))
    assert "line 40 of values.csv has no value" in fault


def test_every_fault_of_the_exclusions_is_told_in_one_pass():
    assert len(faults_of(LINES, (3, "0.72"), (4, "0.42"), (9, "1"))) == 2


def test_two_exclusions_of_one_row_are_refused_also_under_two_names_of_its_file():
    with pytest.raises(DataError) as caught:
        read(study_with(), LINES, excluded((3, "0.71"), (3, "0.71", "values.csv")))
    (fault,) = caught.value.faults
    assert str(fault).startswith("left-out.yaml:3:5: row 3 is excluded a second time")
    assert "left-out.yaml:2:5" in fault.advice


def test_faults_of_the_data_come_before_those_of_the_exclusions():
    lines = long_lines({"a": ["0.31", "lost"], "b": ["0.52", "0.61"]})
    (fault,) = faults_of(lines, (4, "9"))
    assert fault.startswith("values.csv:3:3")


def test_an_entry_that_is_no_number_can_be_excluded_and_is_in_no_analysis():
    lines = long_lines({"a": ["0.31", "lost", "0.42"], "b": ["0.52", "0.61"]})
    found = read_one("", lines, excluded((3, "lost")))
    assert [(one.text, one.value) for one in found.set_aside] == [("lost", None)]
    assert found.with_excluded == found.rows
    assert len(found.rows) == 4


def test_a_value_that_the_plan_refuses_can_be_excluded_and_is_in_no_analysis():
    lines = long_lines({"a": ["0.31", "<0.05", "0.42"], "b": ["0.52", "0.61"]})
    found = read_one("", lines, excluded((3, "<0.05")))
    assert [(one.cause, one.value) for one in found.set_aside] == [("excluded", Decimal10(5, -2))]
    assert found.with_excluded == found.rows


class TestSeveralFiles:
    FILES = MappingProxyType({"data/mon.csv": LINES, "data/tue.csv": LINES})

    def test_an_exclusion_names_its_file(self):
        (found,) = read_each(study_with(), self.FILES, excluded((3, "0.71", "tue.csv")))
        assert [(one.file, one.line) for one in found.set_aside] == [(1, 3)]
        assert len(found.rows) == 9

    @pytest.mark.parametrize(
        ("row", "words"),
        [
            ((3, "0.71"), "the study has 2 data files, and the exclusion names none"),
            ((3, "0.71", "wed.csv"), "`wed.csv` is not a data file of the study"),
        ],
    )
    def test_without_a_file_of_the_study_it_is_refused(self, row, words):
        with pytest.raises(DataError, match=words):
            read_each(study_with(), self.FILES, excluded(row))


class TestSeveralValuesInARow:
    TWO = replace(study_with(), data=DataPlan("values.csv", ("content", "ash"), "lot"))
    LINES = ("lot,content,ash", "a,1.1,7", "a,1.2,8", "b,1.3,9", "b,9,9")

    def test_only_the_value_that_is_named_leaves_the_analysis(self):
        content, ash = read(self.TWO, list(self.LINES), excluded((3, "8")))
        assert (len(content.rows), len(ash.rows)) == (4, 3)
        assert (content.set_aside, [one.text for one in ash.set_aside]) == ((), ["8"])

    def test_both_leave_it_where_both_are_named(self):
        content, ash = read(self.TWO, list(self.LINES), excluded((3, "8"), (3, "1.2")))
        assert (len(content.rows), len(ash.rows)) == (3, 3)

    def test_a_text_that_stands_twice_in_the_row_does_not_say_which(self):
        with pytest.raises(DataError, match=r"line 5 of values\.csv holds `9` 2 times"):
            read(self.TWO, list(self.LINES), excluded((5, "9")))

    def test_in_the_wide_layout_the_value_of_one_level_is_named(self):
        plan = DataPlan("values.csv", ("content",), "lot", levels=("a", "b"), layout="wide")
        study = replace(study_with(), data=plan)
        (found,) = read(study, ["a,b", "1,2", "3,4", "5,6"], excluded((3, "4")))
        assert [(one.level, one.line, one.text) for one in found.set_aside] == [("b", 3, "4")]
        assert [counts.analysed for counts in found.flow] == [3, 2]
