"""Whether a plan can be applied to the data: what it names, and what it presupposes, has to be there."""

import pytest

from assayfolio.errors import DataError
from assayfolio.fit import check_fit
from assayfolio.observations.reading import read_all_observations
from assayfolio.study.reading import read_study

HEAD = """\
study: FIT-1
title: Plans and data
data: {file: values.csv, response: [mass, density], factor: lot}
alpha: 0.05
"""
LOTS = ("1", "2", "4")


def misfits(section: str, levels: tuple[str, ...] = LOTS, replicates: int = 2) -> list[str]:
    """Each reason why a study with `section` (from line 5 on) cannot be applied to these levels."""
    study = read_study((HEAD + section).encode(), "plan.yaml")
    rows = "".join(f"{level},{n}.5,{n}.1\n" for level in levels for n in range(replicates))
    observations = read_all_observations([("values.csv", f"lot,mass,density\n{rows}".encode())], study.data)
    try:
        check_fit(study, observations)
    except DataError as error:
        return [str(fault) for fault in error.faults]
    return []


ABSENT = "which the data do not have - the data have: 1, 2, 4"
NAMED = {
    "a reference": (
        "comparisons: [{name: x, against: 9, adjust: holm}]",
        f"plan.yaml:5:15: comparison 'x' names the level '9', {ABSENT}",
    ),
    "a weight": (
        "comparisons: [{name: x, weights: {1: 1, 9: -1}}]",
        f"plan.yaml:5:15: comparison 'x' names the level '9', {ABSENT}",
    ),
    "a weight in a family": (
        "comparisons: [{name: x, contrasts: [{name: y, weights: {1: 1, 9: -1}}], adjust: holm}]",
        f"plan.yaml:5:15: comparison 'x' names the level '9', {ABSENT}",
    ),
    "a score": (
        "comparisons: [{name: x, trend: linear, scores: {1: 1, 2: 2, 4: 4, 9: 9}}]",
        f"plan.yaml:5:15: comparison 'x' names the level '9', {ABSENT}",
    ),
    "a reference of equivalence": (
        "equivalence: [{name: x, against: 9, margin: 1, adjust: holm}]",
        f"plan.yaml:5:15: equivalence test 'x' names the level '9', {ABSENT}",
    ),
    "a reference of spread": (
        "spread: {against: 9, adjust: holm}",
        f"plan.yaml:5:9: `spread` names the level '9', {ABSENT}",
    ),
    "the level of a criterion": (
        "criteria: [{quantity: level-sd, level: 9, at-most: 1}]",
        f"plan.yaml:5:12: the criterion on level-sd names the level '9', {ABSENT}",
    ),
}


@pytest.mark.parametrize(("section", "reason"), NAMED.values(), ids=NAMED.keys())
def test_a_level_that_the_plan_names_has_to_be_in_the_data(section: str, reason: str) -> None:
    assert misfits(section) == [reason]


def test_a_level_that_is_named_twice_in_one_family_is_told_once() -> None:
    both = "{name: y, weights: {1: 1, 9: -1}}, {name: z, weights: {2: 1, 9: -1}}"
    assert len(misfits(f"comparisons: [{{name: x, contrasts: [{both}], adjust: holm}}]")) == 1


LINEAR = "comparisons: [{name: x, trend: linear}]"
QUADRATIC = "comparisons: [{name: x, trend: polynomial, degree: 2, adjust: holm}]"


def test_levels_that_are_numbers_have_a_trend() -> None:
    assert misfits(LINEAR) == misfits(QUADRATIC) == []


def test_levels_that_are_no_numbers_have_none() -> None:
    (reason,) = misfits(LINEAR, ("1", "hot", "cold"))
    assert reason == (
        "plan.yaml:5:15: comparison 'x': `trend` needs levels that are numbers, unlike `hot`, `cold` - "
        "expected the numbers under `scores`, such as {low: 20, high: 40}; names without an order have no "
        "trend, compare them by `pairs` or `contrasts`"
    )


def test_a_level_of_the_data_without_a_score_has_no_place_in_a_trend() -> None:
    (reason,) = misfits("comparisons: [{name: x, trend: linear, scores: {1: 10, 2: 20}}]")
    assert reason == (
        "plan.yaml:5:15: comparison 'x': `scores` gives no number for `4` - expected one for each level"
    )


def test_two_levels_of_the_data_with_one_number_have_no_trend() -> None:
    (reason,) = misfits(LINEAR, ("1", "2", "2.0"))
    assert "gives the levels `2` and `2.0` the same number" in reason


def test_a_degree_needs_one_level_more() -> None:
    (reason,) = misfits(QUADRATIC, ("1", "2"))
    assert reason == (
        "plan.yaml:5:15: comparison 'x': `degree` is 2, and there are 2 levels - "
        "expected at most one less than the number of levels"
    )


@pytest.mark.parametrize(
    "section",
    [
        "comparisons: [{name: x, pairs: all, adjust: holm}]",
        "equivalence: [{name: x, pairs: all, margin: 1, adjust: holm}]",
    ],
)
def test_two_pairs_of_levels_cannot_bear_one_label(section: str) -> None:
    levels = ("a", "b - c", "a - b", "c")
    assert misfits(section, levels) == [
        (
            "values.csv: two pairs of levels would bear the same label 'a - b - c' - "
            "rename the levels, without ' - ' in the names"
        )
    ]
    assert misfits("comparisons: [{name: x, against: a, adjust: holm}]", levels) == []


@pytest.mark.requirement("NUMBERS-3")
def test_one_level_and_one_value_a_level_are_too_few() -> None:
    assert [reason.partition(" - ")[0] for reason in misfits("", ("1",))] == [
        "values.csv: the data have one level only (1)"
    ]
    assert [reason.partition(":")[0] for reason in misfits("", LOTS, 1)] == ["values.csv"]


def test_all_reasons_are_told_at_once() -> None:
    section = f"{LINEAR}\nspread: {{against: b, adjust: holm}}\n"
    assert len(misfits(section, ("1", "2", "c"), 1)) == 3
