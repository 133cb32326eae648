"""A right plan that lacks what is wanted of it."""

import pytest

from assayfolio.errors import StudyError
from assayfolio.study.availability import check_plannable, check_required
from assayfolio.study.plan import Laboratory
from assayfolio.study.vocabulary import MEASUREMENT_KEYS, REQUIREMENTS
from study.examples import FULL, RECEIVED, SMALLEST, edited, planned, study_of


def required(text: str, *require: str) -> list[str]:
    try:
        check_required(study_of(text), Laboratory("Invented Waters", require=require))
    except StudyError as error:
        return [str(fault).removeprefix("plan.yaml:") for fault in error.faults]
    return []


WANTED = "which Invented Waters requires of every study"


def test_the_smallest_study_lacks_all_that_a_laboratory_can_require() -> None:
    assert required(SMALLEST, *REQUIREMENTS) == [
        *(f"1:1: `measurement.{key}` is missing, {WANTED} - add `{key}: ...`" for key in MEASUREMENT_KEYS),
        f"1:1: `purpose` is missing, {WANTED} - add `purpose: ...`",
        f"1:1: `comparisons` is missing, {WANTED} - add `comparisons: ...`",
        f"1:1: `equivalence` is missing, {WANTED} - add `equivalence: ...`",
        f"1:1: `checks` is missing, {WANTED} - add `checks: ...`",
        f"1:1: `precision` is missing, {WANTED} - add `precision: ...`",
        f"1:1: `power` is missing, {WANTED} - add `power: ...`",
        f"1:1: `sign-off` is missing, {WANTED} - add `sign-off: ...`",
        f"3:1: `data.unit` is missing, {WANTED} - add `unit: ...`",
        f"3:1: `data.order` is missing, {WANTED} - add `order: ...`",
        f"3:1: `data.levels` is missing, {WANTED} - add `levels: ...`",
        f"3:1: `data.replicates` is missing, {WANTED} - add `replicates: ...`",
    ]


WHOLE = [requirement for requirement in REQUIREMENTS if requirement != "margin-source"]


@pytest.mark.requirement("PLAN-4", "SOURCE-5")
@pytest.mark.parametrize("requirement", WHOLE)
def test_each_requirement_is_met_by_a_full_study_and_not_by_the_smallest(requirement: str) -> None:
    assert required(RECEIVED if requirement in MEASUREMENT_KEYS else FULL, requirement) == []
    assert len(required(SMALLEST, requirement)) == 1


def test_a_fact_that_is_missing_is_looked_for_among_the_facts() -> None:
    text = SMALLEST + "measurement:\n  item: {column: sample}\n"
    assert required(text, "item", "operator", "measured-at") == [
        f"8:1: `measurement.{key}` is missing, {WANTED} - add `{key}: ...`"
        for key in ("operator", "measured-at")
    ]


@pytest.mark.requirement("PLAN-13")
def test_a_source_is_required_of_each_margin_that_there_is() -> None:
    assert required(SMALLEST, "margin-source") == []
    assert required(FULL, "margin-source") == [
        f"{line}:5: `equivalence.margin-source` is missing, {WANTED} - add `margin-source: ...`"
        for line in (48, 49, 50, 51)
    ]


def test_a_unit_is_required_of_every_response() -> None:
    assert required(edited(SMALLEST, "alpha", "  unit: {mass: g}\nalpha"), "unit") == []


def test_precision_that_is_not_to_be_estimated_does_not_meet_a_requirement_of_it() -> None:
    assert required(planned("precision: {estimate: false}\n"), "precision") == [
        f"9:1: `precision` is missing, {WANTED} - add `precision: ...`"
    ]


def test_empty_checks_do_not_meet_a_requirement_of_checks() -> None:
    assert required(SMALLEST + "checks: {}\n", "checks") == [
        f"8:1: `checks` is missing, {WANTED} - add `checks: ...`"
    ]


def test_what_is_not_required_may_be_left_out() -> None:
    assert required(SMALLEST) == []


def unplannable(text: str) -> list[str]:
    try:
        check_plannable(study_of(text))
    except StudyError as error:
        return [str(fault).removeprefix("plan.yaml:") for fault in error.faults]
    return []


def test_power_needs_to_know_what_for_and_at_which_numbers_of_values() -> None:
    needs = "is missing, without which no power can be computed"
    assert unplannable(FULL) == []
    assert unplannable(SMALLEST) == [
        f"1:1: `power` {needs} - add it, such as `power: {{difference: 0.5, sigma: 0.3, target: 0.9}}`",
        f"3:1: `data.levels` {needs} - list the levels that will be compared",
        f"3:1: `data.replicates` {needs} - say how many values each level will have",
    ]
    power = "power: {difference: 1, sigma: 1, target: 0.9}\n"
    assert [fault.partition(" is")[0] for fault in unplannable(planned(power))] == ["3:1: `data.replicates`"]
