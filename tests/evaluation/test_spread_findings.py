"""The spread of every level against that of a reference."""

from fractions import Fraction

import pytest

from assayfolio.findings import DIFFERENCE_SHOWN
from support.studies import findings_of

DATA = {
    "R": ["10.02", "10.05", "9.98", "10.01", "10.04", "9.99"],
    "X": ["10.61", "9.54", "10.88", "9.32", "10.09"],
    "Y": ["10.02", "10.06", "9.99", "10.01"],
}


def spread_of(adjust: str, data=None):
    findings = findings_of(data or DATA, f"spread: {{against: R, adjust: {adjust}}}\n")
    return findings.responses[0].spread, findings.not_reported


def test_the_ratios_are_those_of_the_exact_variances():
    spread, _ = spread_of("none")
    assert spread.against == "R"
    assert [row.label for row in spread.rows] == ["X / R", "Y / R"]
    assert [row.df for row in spread.rows] == [(4, 5), (3, 5)]

    def variance(level: str) -> Fraction:
        values = [Fraction(text) for text in DATA[level]]
        mean = sum(values) / len(values)
        return sum((value - mean) ** 2 for value in values) / (len(values) - 1)

    assert [row.ratio for row in spread.rows] == [variance(x) / variance("R") for x in ("X", "Y")]


@pytest.mark.parametrize("adjust", ["none", "bonferroni", "holm"])
def test_verdicts_follow_the_adjusted_p(adjust):
    spread, _ = spread_of(adjust)
    plain, _ = spread_of("none")
    assert [row.verdict == DIFFERENCE_SHOWN for row in spread.rows] == [True, False]
    for row, unadjusted in zip(spread.rows, plain.rows, strict=True):
        assert (row.verdict == DIFFERENCE_SHOWN) == (row.p_adjusted <= 0.05)
        assert row.p == unadjusted.p
        assert row.p_adjusted >= row.p
        if adjust == "bonferroni":
            assert (row.verdict == DIFFERENCE_SHOWN) == (not row.ci[0] <= 1 <= row.ci[1])


def test_a_level_without_a_variance_is_not_reported_and_the_others_are():
    spread, gaps = spread_of("holm", {**DATA, "Z": ["10.1"]})
    assert [row.label for row in spread.rows] == ["X / R", "Y / R"]
    assert [(gap.what, "one value" in gap.reason) for gap in gaps] == [("spread: Z / R", True)]


def test_a_reference_without_a_variance_leaves_nothing_to_report():
    spread, gaps = spread_of("none", {**DATA, "R": ["10.0", "10.0"]})
    assert spread is None
    assert [gap.what for gap in gaps] == ["spread: X / R", "spread: Y / R"]
