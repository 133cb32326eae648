"""Acceptance criteria: limits set in advance, compared on the exact value."""

from fractions import Fraction

import pytest

from assayfolio.evaluation.criteria import compared
from assayfolio.exact import Root
from assayfolio.findings import CRITERION_MET, CRITERION_NOT_MET, NOT_ASSESSABLE
from support.studies import findings_of, findings_of_each

# Means 10 and 12, standard deviation 1 at both levels: every quantity below can be done in the head.
DATA = {"A": ["9", "10", "11"], "B": ["11", "12", "13"]}
RANDOM = "design: {effects: random}\n"
PRECISION = "precision: {estimate: true}\n"


def criterion_of(entry: str, parts: str = PRECISION, data=None):
    findings = findings_of(data or DATA, f"{parts}criteria: [{{{entry}}}]\n")
    return findings.responses[0].criteria, findings.not_reported


@pytest.mark.parametrize(
    ("entry", "parts", "value", "unit"),
    [
        ("quantity: repeatability-sd, at-most: 1", PRECISION, Fraction(1), "mg/kg"),
        ("quantity: repeatability-rsd, at-most: 10", PRECISION, Fraction(100, 11), "%"),
        ("quantity: repeatability-limit, at-most: 3", PRECISION, Fraction("2.8"), "mg/kg"),
        ("quantity: between-sd, at-most: 3", RANDOM + PRECISION, Root.of(Fraction(5, 3)), "mg/kg"),
        ("quantity: total-sd, at-most: 3", RANDOM + PRECISION, Root.of(Fraction(8, 3)), "mg/kg"),
        (
            "quantity: total-rsd, at-most: 20",
            RANDOM + PRECISION,
            Root.of(Fraction(8, 3) * 10_000 / 121),
            "%",
        ),
        ("quantity: largest-difference, at-most: 3", "", Fraction(2), "mg/kg"),
        ("quantity: largest-difference-percent, at-most: 20", "", Fraction(200, 11), "%"),
        ("quantity: level-mean, level: B, at-most: 13", "", Fraction(12), "mg/kg"),
        ("quantity: level-sd, level: A, at-most: 2", "", Fraction(1), "mg/kg"),
        ("quantity: level-rsd, level: A, at-most: 11", "", Fraction(10), "%"),
    ],
)
def test_every_quantity_has_its_exact_value_and_unit(entry, parts, value, unit):
    ((criterion,), _) = criterion_of(entry, parts)
    assert compared_equal(criterion.value, value)
    assert criterion.unit == unit
    assert criterion.relation == "at most"
    assert criterion.verdict == CRITERION_MET


def compared_equal(one: Fraction | Root, other: Fraction | Root) -> bool:
    squares = [value.square if isinstance(value, Root) else value**2 for value in (one, other)]
    return squares[0] == squares[1]


@pytest.mark.parametrize(
    ("limit", "verdict"), [("1", CRITERION_MET), ("0.99999999999999999999", CRITERION_NOT_MET)]
)
def test_a_value_at_the_limit_is_within_it_and_no_rounding_helps_one_beyond(limit, verdict):
    ((criterion,), _) = criterion_of(f"quantity: repeatability-sd, at-most: {limit}")
    assert criterion.verdict == verdict


def test_a_limit_can_be_a_lower_one_and_both_give_two_entries():
    ((low, high), _) = reversed_entries("quantity: level-mean, level: A, at-least: 9.5, at-most: 9.9")
    assert (low.relation, low.verdict) == ("at least", CRITERION_MET)
    assert (high.relation, high.verdict) == ("at most", CRITERION_NOT_MET)


def reversed_entries(entry: str):
    entries, gaps = criterion_of(entry, "")
    return sorted(entries, key=lambda one: one.relation), gaps


@pytest.mark.parametrize(
    ("value", "limit", "expected"),
    [
        (Fraction(1, 3), Fraction(1, 3), 0),
        (Fraction(1, 3), Fraction("0.3333333333333333333333333333"), 1),
        (Root.of(Fraction(2)), Fraction("1.4142135623730950488016887242096980"), 1),
        (Root.of(Fraction(2)), Fraction("1.4142135623730950488016887242096981"), -1),
        (Root.of(Fraction(4)), Fraction(2), 0),
        (Root.of(Fraction(0)), Fraction(0), 0),
        (Root.of(Fraction(0)), Fraction(-1), 1),
        (Root.of(Fraction(3)), Fraction(-5), 1),
        (Root(-1, Fraction(3)), Fraction(-1), -1),
        (Root(-1, Fraction(3)), Fraction(-2), 1),
        (Root(-1, Fraction(3)), Fraction(0), -1),
    ],
)
def test_roots_and_rationals_are_compared_exactly(value, limit, expected):
    assert compared(value, limit) == expected


@pytest.mark.parametrize(
    ("entry", "parts", "data", "reason"),
    [
        (
            "quantity: level-sd, level: C, at-most: 1",
            "",
            {**DATA, "C": ["11"]},
            "C has one value",
        ),
        ("quantity: level-rsd, level: Z, at-most: 1", "", {**DATA, "Z": ["-1", "1"]}, "mean of Z is zero"),
        (
            "quantity: largest-difference-percent, at-most: 1",
            "",
            {"A": ["-1", "-2"], "B": ["1", "2"]},
            "the mean of all values is zero",
        ),
        (
            "quantity: repeatability-rsd, at-most: 1",
            PRECISION,
            {"A": ["-1", "-2"], "B": ["1", "2"]},
            "the mean of all values is zero",
        ),
        (
            "quantity: total-rsd, at-most: 1",
            RANDOM + PRECISION,
            {"A": ["-1", "-3"], "B": ["1", "2", "3"]},
            "the mean of the level means is zero",
        ),
    ],
)
def test_what_cannot_be_assessed_says_why(entry, parts, data, reason):
    ((criterion,), gaps) = criterion_of(entry, parts, data)
    assert criterion.verdict == NOT_ASSESSABLE
    assert criterion.value is None
    assert any(gap.what.startswith("criterion: ") and reason in gap.reason for gap in gaps)


def test_a_relative_standard_deviation_is_held_in_percent_of_the_mean_that_is_stated():
    data = {"A": ["9", "11"], "B": ["19", "20", "21", "20"]}
    parts = f"{RANDOM}{PRECISION}criteria: [{{quantity: repeatability-rsd, at-most: 9}}]\n"
    (response,) = findings_of(data, parts).responses
    # The level means are 10 and 20: their mean is 15, that of all values 100/6. MS within is 4/4.
    assert response.precision.mean == 15
    assert response.criteria[0].value == Root.of(Fraction(10_000, 15**2))


def test_a_criterion_on_one_response_is_about_that_one():
    parts = """\
criteria:
  - {quantity: largest-difference, at-most: 3}
  - {quantity: level-mean, level: A, at-least: 8, response: ash}
"""
    ash, protein = findings_of_each({"ash": DATA, "protein": DATA}, parts).responses
    assert [one.quantity for one in ash.criteria] == ["largest-difference", "level-mean"]
    assert [one.quantity for one in protein.criteria] == ["largest-difference"]
