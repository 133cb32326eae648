"""What the pages say of findings, and how data files and small figures are made; no browser needed."""

import json
import re
from dataclasses import replace

import pytest

from assayfolio.evaluation.apply import evaluate
from assayfolio.findings_document import findings_document
from assayfolio.pages.data_files import page_of, pages_for, runs_file
from assayfolio.pages.sparklines import MOST_LEVELS, MOST_RUNS, sparks_of
from assayfolio.pages.values import LevelSeries, RunSeries, row_from_json, series_from_json
from assayfolio.pages.wording import (
    answer_rows,
    column_words,
    criteria_words,
    criterion_rows,
    number_words,
    overall_words,
    plan_lines,
    series_of,
)
from support.many_runs import run_rows
from support.studies import DEMO_STUDIES, demo_study, findings_of, findings_of_each

APART = {"a": ["1.0", "1.1", "1.2"], "b": ["5.0", "5.1", "5.3"]}
ALIKE = {"a": ["1.0", "1.1", "1.2"], "b": ["1.0", "1.1", "1.3"]}
PRECISION = "precision: {estimate: true}\ncriteria:\n"
WIDE = "  - {quantity: repeatability-rsd, at-most: 90}\n"
NARROW = "  - {quantity: repeatability-rsd, at-most: 0.01}\n"


def document(data, parts="") -> dict:
    return json.loads(json.dumps(findings_document(findings_of(data, parts))))


class TestTheOverallVerdict:
    @pytest.mark.parametrize(
        ("data", "verdict"), [(APART, "difference shown"), (ALIKE, "difference not shown")]
    )
    def test_is_that_of_the_planned_test(self, data, verdict):
        assert overall_words(document(data)) == verdict

    def test_of_welchs_test_is_that_test_where_it_was_planned(self):
        found = document(APART, "design: {variances: separate}\n")
        [response] = found["responses"].values()
        assert response["omnibus"] == "welch"
        response["anova"]["verdict"] = "another answer"
        assert overall_words(found) == response["welch"]["verdict"]

    def test_of_several_responses_names_each_unless_they_agree(self):
        agreeing = findings_document(findings_of_each({"one": APART, "two": APART}))
        assert overall_words(agreeing) == "difference shown (all 2 responses)"
        differing = findings_document(findings_of_each({"one": APART, "two": ALIKE}))
        assert overall_words(differing) == "one: difference shown; two: difference not shown"

    def test_without_findings_is_that_there_is_no_result(self):
        assert overall_words(None) == criteria_words(None) == "no result"


class TestCriteria:
    @pytest.mark.parametrize(
        ("parts", "words"),
        [
            ("", "none set"),
            (PRECISION + WIDE, "met (1 of 1)"),
            (PRECISION + NARROW, "not met (1 of 1)"),
        ],
    )
    def test_are_counted_in_words(self, parts, words):
        assert criteria_words(document(APART, parts)) == words

    def test_that_cannot_be_assessed_count_as_not_met(self):
        found = document(APART, PRECISION + WIDE)
        [response] = found["responses"].values()
        response["criteria"][0].update(verdict="not assessable", value=None)
        assert criteria_words(found) == "not met (1 of 1)"
        assert next(criterion_rows(response))[1] == "not assessable"


@pytest.mark.parametrize("name", DEMO_STUDIES)
def test_every_demonstration_study_is_put_into_words(name):
    findings = evaluate(*demo_study(name))
    found = json.loads(json.dumps(findings_document(findings)))
    for response, part in zip(findings.responses, found["responses"].values(), strict=True):
        rows = list(answer_rows(part))
        assert rows[0][1] == response.overall_verdict
        assert [row[0] for row in rows[1:]] == [
            family.name for family in (*response.comparisons, *response.equivalence)
        ]
    assert list(plan_lines(found))


class TestNumbers:
    @pytest.mark.parametrize(
        ("value", "words"),
        [
            (None, "–"),
            (5.0046666666, "5.00467"),
            (-0.25, "\u22120.25"),
            (1234567.0, "1.23457e+06"),
            (0.0, "0"),
        ],
    )
    def test_have_six_significant_digits(self, value, words):
        assert number_words(value) == words

    def test_of_a_column_have_equal_decimals(self):
        assert column_words([5.094, 5.0046666, None, -0.5], 6) == ["5.09400", "5.00467", "–", "\u22120.50000"]
        assert column_words([123.4, 8.25], 3) == ["123", "8"]
        assert column_words([0.0, 0.0], 3) == ["0", "0"]


class TestDataFiles:
    def test_hold_the_rows_as_one_call_in_ascii(self):
        rows = run_rows(3)
        text = runs_file(1, rows).decode("ascii")
        [argument] = re.findall(r"^register\.take\(1,(\[.*\])\);$", text, re.DOTALL)
        assert [row[:3] for row in json.loads(argument)] == [[row.study, row.number, row.lot] for row in rows]

    def test_have_no_character_that_means_something_in_markup(self):
        row = replace(run_rows(1)[0], lot="</script><!--&'\u2028\u202e\U0001f9ea")
        content = runs_file(1, [row]).decode("ascii")
        assert not set("<>&'") & set(content)
        assert json.loads(content[content.index(",") + 1 : content.rindex(")")])[0][2] == row.lot

    def test_are_filled_in_the_order_of_the_runs(self):
        assert [page_of(place) for place in (1, 500, 501, 50_000)] == [1, 1, 2, 100]
        assert [pages_for(total) for total in (0, 1, 500, 501)] == [0, 1, 1, 2]


def series(*values: float, level: str = "a") -> list[RunSeries]:
    return [
        RunSeries(f"run-{number:04d}", {"content": LevelSeries("mg/kg", {level: value}, 0.1)})
        for number, value in enumerate(values, start=1)
    ]


class TestSmallFigures:
    def test_say_in_words_what_they_show(self):
        [found] = sparks_of(series(4.0, 6.0, 5.0))
        assert found.means[0].words == (
            "Mean of a over 3 runs, run-0001 to run-0003: smallest 4, largest 6, newest 5 mg/kg"
        )
        assert found.precision.words.startswith("Residual standard deviation over 3 runs")

    def test_are_drawn_between_smallest_and_largest(self):
        [found] = sparks_of(series(4.0, 6.0, 5.0))
        assert found.means[0].path == "M4.0 24.0L90.0 4.0L176.0 14.0"
        assert found.means[0].end == ("176.0", "14.0")

    def test_of_equal_values_are_a_level_line(self):
        [found] = sparks_of(series(4.0, 4.0))
        assert found.means[0].path == "M4.0 14.0L176.0 14.0"

    def test_need_two_runs(self):
        assert sparks_of(series(4.0)) == ()

    def test_leave_out_levels_that_only_one_run_has(self):
        runs = [*series(4.0, 5.0), *series(6.0, level="new lot")]
        [found] = sparks_of(runs)
        assert [one.name for one in found.means] == ["a"]

    def test_show_the_newest_runs_and_count_the_levels_left_out(self):
        runs = [
            RunSeries(
                f"run-{number:04d}",
                {"content": LevelSeries("", {f"l{at}": float(at + number) for at in range(20)}, None)},
            )
            for number in range(MOST_RUNS + 5)
        ]
        [found] = sparks_of(runs)
        assert (len(found.means), found.left_out) == (MOST_LEVELS, 20 - MOST_LEVELS)
        assert found.means[0].runs == MOST_RUNS
        assert found.precision is None


def test_what_the_register_remembers_comes_back_as_it_was():
    row = run_rows(1)[0]
    assert row_from_json(json.loads(json.dumps(row.as_json()))) == row
    one = RunSeries("run-0001", series_of(document(APART)))
    assert series_from_json(json.loads(json.dumps(one.as_json()))) == one
