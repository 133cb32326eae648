"""Values beyond a limit: how many there are and where, and the result under each policy for them."""

import json
from fractions import Fraction

import pytest

from assayfolio.evaluation.apply import evaluate
from assayfolio.findings import DIFFERENCE_NOT_SHOWN, DIFFERENCE_SHOWN, Findings
from assayfolio.findings_document import findings_bytes, findings_document
from assayfolio.findings_intake import CensoredLevel, CensoringFindings
from support.received import excluded, long_lines, read, study_with

PARTS = """\
comparisons:
  - {name: all pairs, pairs: all, adjust: tukey-kramer}
  - {name: to a, against: a, adjust: dunnett}
"""
# With the limit put in, `a` and `b` are alike; with half of it they are not.
DATA = {
    "a": ["<0.40", "<0.40", "0.41", "0.40"],
    "b": ["0.42", "0.43", "0.41", "0.42"],
    "c": ["0.43", "0.41", "<0.20", ">9"],
}
LINES = long_lines(DATA)
POLICIES = ("omit", "half-limit", "limit")


def findings(policy: str, lines: list[str] = LINES, *rows: tuple[int, str], parts: str = PARTS) -> Findings:
    study = study_with(f"below-limit: {policy}, above-limit: omit", parts)
    return evaluate(study, read(study, lines, excluded(*rows)))


def censoring(policy: str, *arguments: object) -> CensoringFindings:
    found = findings(policy, *arguments).responses[0].censoring
    assert found is not None
    return found


@pytest.mark.parametrize("policy", POLICIES)
def test_counts_and_limits_are_those_of_the_received_values_whatever_the_policy(policy):
    found = censoring(policy)
    assert (found.below_limit, found.above_limit, found.below, found.above) == (policy, "omit", 3, 1)
    assert found.levels == (
        CensoredLevel("a", 4, 2, 0, (Fraction(2, 5),), ()),
        CensoredLevel("c", 4, 1, 1, (Fraction(1, 5),), (Fraction(9),)),
    )


@pytest.mark.parametrize("policy", POLICIES)
def test_the_result_under_each_policy_is_the_result_of_a_plan_with_that_policy(policy):
    for one in censoring(policy).sensitivity:
        alone = findings(one.policy).responses[0]
        assert one.planned == (one.policy == policy)
        assert one.levels == tuple((level.level, level.n, level.mean) for level in alone.levels)
        assert (one.p, one.p_adjusted, one.verdict) == (
            alone.anova.p,
            alone.anova.p_adjusted,
            alone.overall_verdict,
        )
        assert [
            (family.name, [(row.label, row.estimate, row.p_adjusted, row.verdict) for row in family.rows])
            for family in one.comparisons
        ] == [
            (family.name, [(row.label, row.estimate, row.p_adjusted, row.verdict) for row in family.rows])
            for family in alone.comparisons
        ]


def test_every_policy_is_there_in_one_order_and_one_is_the_planned():
    found = censoring("limit").sensitivity
    assert [(one.policy, one.planned) for one in found] == [
        ("omit", False),
        ("half-limit", False),
        ("limit", True),
    ]


def test_verdicts_that_depend_on_the_policy_are_said_to():
    lines = long_lines({"a": ["<1.0", "<1.0", "0.99"], "b": ["1.00", "1.02", "1.01"]})
    found = censoring("limit", lines)
    verdicts = {one.policy: one.verdict for one in found.sensitivity if one.policy != "omit"}
    assert verdicts == {"half-limit": DIFFERENCE_NOT_SHOWN, "limit": DIFFERENCE_NOT_SHOWN}
    spread = long_lines({"a": ["<1.0", "<1.0", "0.52", "0.51"], "b": ["1.00", "1.02", "1.01", "0.99"]})
    found = censoring("limit", spread)
    assert {one.policy: one.verdict for one in found.sensitivity}["half-limit"] == DIFFERENCE_SHOWN
    assert {one.policy: one.verdict for one in found.sensitivity}["limit"] == DIFFERENCE_NOT_SHOWN
    assert found.verdicts_agree is False


def test_verdicts_that_do_not_depend_on_it_are_said_not_to():
    lines = long_lines({"a": ["<0.1", "0.2", "0.3"], "b": ["9.0", "9.2", "9.1"]})
    assert censoring("omit", lines).verdicts_agree is True


def test_a_policy_that_leaves_a_level_empty_is_not_reported_with_the_reason():
    lines = long_lines({"a": ["<0.1", "<0.2"], "b": ["9.0", "9.2", "9.1"]})
    found = findings("half-limit", lines, parts="")
    assert [one.policy for one in found.responses[0].censoring.sensitivity] == ["half-limit", "limit"]
    (gap,) = found.not_reported
    assert (gap.what, gap.response) == ("result with values below a limit omitted", "content")
    assert "'a' has no values" in gap.reason


def test_half_of_a_limit_that_is_not_above_zero_is_not_reported_with_the_reason():
    lines = long_lines({"a": ["<-1", "-2", "-3"], "b": ["-4", "-5", "-6"]})
    found = findings("limit", lines, parts="")
    assert [one.policy for one in found.responses[0].censoring.sensitivity] == ["omit", "limit"]
    (gap,) = found.not_reported
    assert gap.what == "result with half the limit for values below it"


def test_what_cannot_be_given_under_a_policy_is_said_to_belong_there():
    lines = long_lines({"a": ["<0.1", "<0.1", "0.3"], "b": ["9.0", "9.2", "9.1"]})
    found = findings("limit", lines, parts="spread: {against: a, adjust: none}\n")
    assert {gap.what for gap in found.not_reported} == {"with values below a limit omitted: spread: b / a"}


def test_an_excluded_value_below_a_limit_counts_as_excluded_and_not_as_below():
    found = censoring("limit", LINES, (2, "<0.40"))
    assert found.below == 2
    assert found.levels[0] == CensoredLevel("a", 3, 1, 0, (Fraction(2, 5),), ())


def test_repeats_are_counted_one_by_one():
    lines = ["lot,content,sample", *("a,<0.5,s1", "a,<0.4,s1", "a,1.0,s2", "b,2.0,t1", "b,2.2,t2")]
    study = study_with("below-limit: limit, replicate-unit: sample")
    (response,) = evaluate(study, read(study, lines)).responses
    assert response.censoring.levels == (CensoredLevel("a", 3, 2, 0, (Fraction(2, 5), Fraction(1, 2)), ()),)
    by_policy = {one.policy: one.levels[0] for one in response.censoring.sensitivity}
    assert by_policy == {
        "omit": ("a", 1, Fraction(1)),
        "half-limit": ("a", 2, Fraction(49, 80)),
        "limit": ("a", 2, Fraction(29, 40)),
    }


def test_values_above_a_limit_alone_have_counts_and_no_sensitivity():
    found = censoring("omit", long_lines({"a": ["1", ">9", "2"], "b": ["3", "4"]}))
    assert (found.below, found.above, found.sensitivity) == (0, 1, ())


def test_there_is_no_such_part_where_no_value_lies_beyond_a_limit():
    lines = long_lines({"a": ["1", "2"], "b": ["3", "4"]})
    found = findings("omit", lines, parts="")
    assert found.responses[0].censoring is None
    assert "censoring" not in findings_document(found)["responses"]["content"]


def test_the_document_has_it_all_under_its_keys():
    part = json.loads(findings_bytes(findings("half-limit")))["responses"]["content"]["censoring"]
    assert set(part) == {"policy", "below", "above", "levels", "sensitivity", "verdicts_agree"}
    assert part["policy"] == {"below_limit": "half-limit", "above_limit": "omit"}
    assert part["levels"][1] == {
        "level": "c",
        "received": 4,
        "below": 1,
        "above": 1,
        "below_limits": [0.2],
        "above_limits": [9.0],
    }
    for one in part["sensitivity"]:
        assert set(one) == {
            *("policy", "planned", "levels", "p", "p_adjusted", "verdict", "comparisons"),
            *("equivalence", "spread", "criteria"),
        }
        assert [family["name"] for family in one["comparisons"]] == ["all pairs", "to a"]
        assert set(one["comparisons"][0]["rows"][0]) == {"label", "estimate", "p_adjusted", "verdict"}
    assert part["sensitivity"][1]["levels"][0] == {"level": "a", "n": 4, "mean": 0.3025}


def test_a_value_that_was_put_in_does_not_make_the_record_look_finer_or_coarser():
    fine = long_lines({"a": ["<1", "1.001", "1.002"], "b": ["1.003", "1.004", "1.001"]})
    (response,) = findings("half-limit", fine, parts="").responses
    assert response.checks == ()
    coarse = long_lines({"a": ["<1.00", "1", "2"], "b": ["2", "1", "1"]})
    names = [check.name for check in findings("limit", coarse, parts="").responses[0].checks]
    assert names == ["Resolution of the values"]


def test_every_planned_question_is_answered_under_each_policy():
    """Equivalence, variances and criteria can turn over where the overall test does not."""
    data = long_lines({"a": [".110", ".111", ".109", ".110"], "b": [".112", ".108", "<0.100", ".111"]})
    parts = (
        "equivalence: [{name: within, against: a, margin: 0.02, adjust: none}]\n"
        "spread: {against: a, adjust: none}\n"
        "criteria: [{quantity: largest-difference, at-most: 0.01}]\n"
    )
    (response,) = findings("limit", data, parts=parts).responses
    censoring = response.censoring
    verdicts = {
        one.policy: (
            one.verdict,
            one.equivalence[0].rows[0].verdict,
            one.spread.rows[0].verdict,
            *one.criteria,
        )
        for one in censoring.sensitivity
    }
    assert verdicts["limit"] == (
        "difference not shown",
        "equivalence shown",
        "difference shown",
        "criterion met",
    )
    assert verdicts["half-limit"] == (
        "difference not shown",
        "equivalence not shown",
        "difference shown",
        "criterion not met",
    )
    assert not censoring.verdicts_agree
