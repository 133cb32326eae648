"""Reading `trend:` - the charts over lots that a study plans."""

from fractions import Fraction

import pytest

from assayfolio.study.canonical_plan import plan_document
from study.examples import SMALLEST, faults_of, study_of

RULES = (
    "expected beyond-limits, two-of-three, four-of-five, seven-one-side, eight-one-side, nine-one-side, "
    "six-rising, seven-rising, fourteen-in-turn, fifteen-within, eight-outside or range-beyond-limit"
)
REFUSED = {
    "no baseline": (
        "trend: {rules: beyond-limits}",
        "8:8: the key `trend.baseline` is missing - add `baseline: ...`",
    ),
    "no rules": (
        "trend: {baseline: {first: 20}}",
        "8:8: the key `trend.rules` is missing - add `rules: ...`",
    ),
    "two baselines": (
        "trend: {baseline: {first: 20, lots: [a, b, c, d, e]}, rules: beyond-limits}",
        (
            "8:19: `trend.baseline` does not say which lots the limits come from in one way - write "
            "`first: 20`, or `lots: [...]`"
        ),
    ),
    "too short a baseline": (
        "trend: {baseline: {first: 4}, rules: beyond-limits}",
        "8:27: `trend.baseline.first` is `4` - expected a whole number from 5 to 1000",
    ),
    "too few lots": (
        "trend: {baseline: {lots: [a, b]}, rules: beyond-limits}",
        "8:26: `trend.baseline.lots` names 2 lots - expected 5 lots or more",
    ),
    "a rule of another name": (
        "trend: {baseline: {first: 20}, rules: [nine-on-side]}",
        f"8:40: `trend.rules` is `nine-on-side` - {RULES}; did you mean `nine-one-side`?",
    ),
    "a criterion without a limit": (
        "trend: {baseline: {first: 20}, rules: beyond-limits, criteria: [{quantity: lot-mean}]}",
        "8:65: an entry of `trend.criteria` has no limit - write `at-most`, `at-least` or both",
    ),
}


@pytest.mark.parametrize("what", REFUSED)
def test_charts_that_cannot_be_made_are_refused(what: str) -> None:
    section, fault = REFUSED[what]
    assert faults_of(SMALLEST + section + "\n") == [fault]


def test_everything_is_charted_where_nothing_is_named() -> None:
    plan = study_of(SMALLEST + "trend: {baseline: {first: 20}, rules: beyond-limits}\n").trend
    assert plan is not None
    assert plan.first == 20
    assert plan.quantities == ("lot-mean", "repeatability-sd", "difference")
    assert plan.rules == ("beyond-limits",)


def test_criterion_lines_are_exact() -> None:
    lines = "criteria: [{quantity: difference, at-least: -1/3}]"
    text = f"trend: {{baseline: {{first: 9}}, rules: six-rising, {lines}}}\n"
    plan = study_of(SMALLEST + text).trend
    assert plan is not None
    assert plan.criteria[0].at_least == Fraction(-1, 3)


def test_charts_are_part_of_the_plan_and_a_plan_without_them_is_what_it_was() -> None:
    assert "trend" not in plan_document(study_of(SMALLEST))
    planned = plan_document(study_of(SMALLEST + "trend: {baseline: {first: 20}, rules: beyond-limits}\n"))
    assert planned["trend"] == {
        "first": 20,
        "lots": [],
        "quantities": ["lot-mean", "repeatability-sd", "difference"],
        "rules": ["beyond-limits"],
        "criteria": [],
    }
