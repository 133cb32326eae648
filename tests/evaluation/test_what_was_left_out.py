"""Findings on exclusions, repeats and counts: both analyses side by side, and every value accounted for."""

import json
from dataclasses import replace
from fractions import Fraction

import pytest

from assayfolio.errors import DataError, MachineError
from assayfolio.evaluation.apply import evaluate
from assayfolio.evaluation.reported import second_routes
from assayfolio.findings import DIFFERENCE_NOT_SHOWN, DIFFERENCE_SHOWN, Findings
from assayfolio.findings_document import findings_bytes, findings_document
from assayfolio.findings_intake import Deviation, FlowFindings
from assayfolio.study.plan import DataPlan, DesignPlan
from support.received import REASON, excluded, long_lines, read, study_with
from support.studies import findings_of

PARTS = """\
comparisons:
  - {name: all pairs, pairs: all, adjust: tukey-kramer}
criteria:
  - {quantity: level-sd, level: a, at-most: 0.5}
checks: {equal-variances: brown-forsythe}
"""
# One value of `a` stands far out; without it the levels differ.
DATA = {"a": ["1.0", "1.1", "0.9", "4.0"], "b": ["1.6", "1.7", "1.5", "1.6"]}
LINES = long_lines(DATA)
OUT = (5, "4.0")


def findings(
    more: str = "", lines: list[str] = LINES, *rows: tuple[int, str], parts: str = PARTS
) -> Findings:
    study = study_with(more, parts)
    return evaluate(study, read(study, lines, excluded(*rows)))


class TestExclusions:
    def test_the_analysis_is_that_of_the_values_that_are_left(self):
        found = findings("", LINES, OUT).responses[0]
        left = findings_of({"a": DATA["a"][:3], "b": DATA["b"]}, PARTS).responses[0]
        assert (found.levels, found.anova, found.comparisons) == (left.levels, left.anova, left.comparisons)

    @pytest.mark.requirement("CHANGE-2")
    def test_beside_it_stands_the_whole_analysis_as_if_nothing_had_been_excluded(self):
        beside = findings("", LINES, OUT).responses[0].without_exclusions
        plain = findings().responses[0]
        assert beside == replace(plain, flow=())

    def test_both_verdicts_are_there_where_an_exclusion_makes_the_difference(self):
        found = findings("", LINES, OUT).responses[0]
        assert found.overall_verdict == DIFFERENCE_SHOWN
        assert found.without_exclusions.overall_verdict == DIFFERENCE_NOT_SHOWN
        assert found.comparisons[0].rows[0].verdict == DIFFERENCE_SHOWN
        assert found.without_exclusions.comparisons[0].rows[0].verdict == DIFFERENCE_NOT_SHOWN
        assert [found.criteria[0].verdict, found.without_exclusions.criteria[0].verdict] == [
            "criterion met",
            "criterion not met",
        ]

    def test_there_is_nothing_beside_it_where_nothing_was_excluded(self):
        found = findings()
        assert found.exclusions == ()
        assert found.responses[0].without_exclusions is None
        assert "without_exclusions" not in findings_document(found)["responses"]["content"]

    @pytest.mark.requirement("CHANGE-2")
    def test_the_list_says_what_was_left_out_by_whom_and_why(self):
        (entry,) = findings_document(findings("", LINES, OUT))["exclusions"]
        assert entry == {
            "response": "content",
            "file": "values.csv",
            "line": 5,
            "level": "a",
            "text": "4.0",
            "value": 4.0,
            "reason": REASON,
            "decided_by": "A. Analyst",
            "decided_at": "2031-03-04",
            "approved_by": None,
        }

    def test_the_document_has_both_analyses_under_the_published_names(self):
        response = json.loads(findings_bytes(findings("", LINES, OUT)))["responses"]["content"]
        beside = response["without_exclusions"]
        assert {"anova", "levels", "comparisons"} <= set(beside)
        assert not {"flow", "censoring", "without_exclusions"} & set(beside)
        assert [level["n"] for level in response["levels"]] == [3, 4]
        assert [level["n"] for level in beside["levels"]] == [4, 4]

    def test_both_analyses_agree_with_the_second_route(self):
        study = study_with("", PARTS)
        observations = read(study, LINES, excluded(OUT))
        routes = dict(second_routes(evaluate(study, observations), observations))
        assert list(routes) == ["content", "content with nothing excluded"]
        assert all(route.holds and route.agreements for route in routes.values())

    def test_what_cannot_be_given_with_nothing_excluded_is_said_to_belong_there(self):
        lines = long_lines({"a": ["1.0", "1.0", "1.2"], "b": ["2.0", "2.0"]})
        (gap,) = findings("", lines, (4, "1.2"), parts="").not_reported
        assert gap.what == "F test and intervals for means"
        reversed_lines = long_lines({"a": ["1.0", "1.2", "1.1"], "b": ["2.0", "2.1", "9"]})
        assert findings("", reversed_lines, (7, "9"), parts="").not_reported == ()


class TestSeveralResponses:
    LINES = ("lot,content,ash", "a,1.0,10", "a,1.2,11", "b,1.9,13", "b,2.1,14", "b,7.0,15")

    def found(self, across_responses: str) -> Findings:
        study = study_with()
        plan = DataPlan("values.csv", ("content", "ash"), "lot")
        design = DesignPlan(across_responses=across_responses)
        study = replace(study, data=plan, design=design)
        return evaluate(study, read(study, list(self.LINES), excluded((6, "7.0"))))

    def test_only_the_response_that_lost_a_value_has_two_analyses(self):
        content, ash = self.found("none").responses
        assert content.without_exclusions is not None
        assert ash.without_exclusions is None

    def test_both_have_them_where_holm_takes_the_responses_together(self):
        content, ash = self.found("holm").responses
        assert content.without_exclusions is not None
        assert ash.without_exclusions is not None
        assert ash.anova.p == ash.without_exclusions.anova.p
        assert ash.anova.p_adjusted != ash.without_exclusions.anova.p_adjusted


class TestCounts:
    LINES = (
        "lot,content,sample",
        "a,1.0,s1",
        "a,1.2,s1",
        "a,,s2",
        "a,1.4,s3",
        "b,2.0,t1",
        "b,2.2,t2",
        "b,9,t3",
    )
    MORE = "replicate-unit: sample, missing: omit, replicates: 3"

    @pytest.mark.requirement("REPORT-6")
    def test_the_flow_is_that_of_every_level(self):
        found = findings(self.MORE, list(self.LINES), (8, "9"), parts="")
        assert found.responses[0].flow == (
            FlowFindings("a", 4, 1, 0, 0, 0, 1, 2),
            FlowFindings("b", 3, 0, 0, 0, 1, 0, 2),
        )
        (a, b) = findings_document(found)["responses"]["content"]["flow"]
        assert (a["received"], a["missing"], a["merged"], a["analysed"]) == (4, 1, 1, 2)
        assert (b["received"], b["excluded"], b["analysed"]) == (3, 1, 2)

    def test_fewer_values_than_planned_are_a_deviation_with_the_cause(self):
        found = findings(self.MORE, list(self.LINES), (8, "9"), parts="")
        assert found.deviations == (
            Deviation("a: 2 values analysed, 3 planned", "1 missing", "content"),
            Deviation("b: 2 values analysed, 3 planned", "1 excluded with a reason", "content"),
        )
        assert findings_document(found)["deviations"][0] == {
            "what": "a: 2 values analysed, 3 planned",
            "reason": "1 missing",
            "response": "content",
            "lines": [],
        }

    def test_as_many_as_planned_are_no_deviation(self):
        assert findings("replicates: 4", LINES).deviations == ()

    def test_another_number_of_received_rows_is_refused_whatever_the_policies(self):
        with pytest.raises(DataError, match="found 4, planned 5"):
            findings("replicates: 5, missing: omit", LINES)

    def test_other_counts_than_were_analysed_stop_the_run(self):
        study = study_with()
        (observed,) = read(study, LINES)
        fewer = replace(observed, rows=observed.rows[1:])
        with pytest.raises(MachineError, match="other numbers of values were analysed than were counted"):
            evaluate(study, (fewer,))

    def test_a_level_with_nothing_left_is_refused_with_what_became_of_its_values(self):
        lines = long_lines({"a": ["1", "2"], "b": ["", "<0.5", "3"]})
        with pytest.raises(DataError, match="no value of 'content' is left at level 'b'") as caught:
            findings("missing: omit, below-limit: omit", lines, (6, "3"), parts="")
        assert "1 missing, 1 below a limit, 1 excluded" in str(caught.value)

    def test_one_value_left_at_every_level_is_refused(self):
        lines = long_lines({"a": ["1", ""], "b": ["2", ""]})
        with pytest.raises(DataError, match="one value at every level"):
            findings("missing: omit", lines, parts="")


class TestRepeats:
    def test_means_of_repeats_are_analysed_exactly(self):
        lines = ["lot,content,sample", *("a,1,s1", "a,1,s1", "a,2,s1", "a,3,s2", "b,4,t1", "b,5,t2")]
        level = findings("replicate-unit: sample", lines, parts="").responses[0].levels[0]
        assert (level.n, level.mean) == (2, Fraction(13, 6))
        assert (level.sums.sum_text, level.sums.sum_of_squares_text) == ("13/3", "97/9")

    def test_an_outlier_among_means_is_named_by_the_line_of_its_first_repeat(self):
        values = ["1.0", "1.1", "0.9", "1.0", "1.1", "0.9", "1.0", "5.0"]
        rows = [f"a,{value},s{at}" for at, value in enumerate(values)] + ["a,5.2,s7", "b,1,t1", "b,1.2,t2"]
        found = findings(
            "replicate-unit: sample", ["lot,content,sample", *rows], parts="outliers: {test: grubbs}\n"
        )
        named = found.responses[0].outliers[0]
        assert (named.lines, named.values, named.verdict) == ((9,), (Fraction(51, 10),), "outlier")
        assert named.files == ()
