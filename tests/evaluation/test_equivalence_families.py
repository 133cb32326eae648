"""Equivalence and non-inferiority: margins, claims and verdicts of their own."""

from statistics import fmean

import pytest
from scipy import stats

from assayfolio.exact import to_double
from assayfolio.findings import (
    DIFFERENCE_SHOWN,
    EQUIVALENCE_NOT_SHOWN,
    EQUIVALENCE_SHOWN,
    NON_INFERIORITY_NOT_SHOWN,
    NON_INFERIORITY_SHOWN,
)
from support.studies import findings_of

DATA = {
    "R": ["10.02", "10.05", "9.98", "10.01", "10.04", "9.99"],
    "X": ["10.11", "10.14", "10.08", "10.12", "10.09", "10.13"],
    "Y": ["10.42", "10.39", "10.45", "10.41", "10.44", "10.38"],
}


def family_of(plan: str, design: str = ""):
    (response,) = findings_of(DATA, f"{design}equivalence:\n  - {{name: e, {plan}}}\n").responses
    (family,) = response.equivalence
    return family


def test_a_symmetric_margin_counts_on_both_sides():
    family = family_of("against: R, margin: 0.2, margin-source: method specification, adjust: holm")
    assert (family.claim, family.scale) == ("equivalence", "units")
    assert (float(family.lower), float(family.upper)) == (-0.2, 0.2)
    assert family.margin_source == "method specification"
    assert [row.label for row in family.rows] == ["X - R", "Y - R"]
    assert [row.verdict for row in family.rows] == [EQUIVALENCE_SHOWN, EQUIVALENCE_NOT_SHOWN]


def test_a_difference_and_equivalence_can_both_be_shown():
    parts = """\
comparisons: [{name: d, against: R, adjust: holm}]
equivalence: [{name: e, against: R, margin: 0.2, adjust: holm}]
"""
    (response,) = findings_of(DATA, parts).responses
    assert response.comparisons[0].rows[0].verdict == DIFFERENCE_SHOWN
    assert response.equivalence[0].rows[0].verdict == EQUIVALENCE_SHOWN


@pytest.mark.parametrize("design", ["", "design: {variances: separate}\n"])
@pytest.mark.parametrize(
    "margins", ["lower: -0.05, upper: 0.12", "lower: -0.3, upper: 0.4", "margin-percent: 1.2"]
)
@pytest.mark.parametrize("adjust", ["none", "bonferroni"])
def test_equivalence_is_shown_where_the_interval_lies_within_the_margins(design, margins, adjust):
    family = family_of(f"against: R, {margins}, adjust: {adjust}", design)
    for row in family.rows:
        within = family.lower < row.ci[0] and row.ci[1] < family.upper
        assert (row.verdict == EQUIVALENCE_SHOWN) == within
        assert row.p == max(row.p_lower, row.p_upper)


def test_every_pair_can_be_asked_for():
    family = family_of("pairs: all, margin: 0.2, adjust: bonferroni")
    assert [row.label for row in family.rows] == ["R - X", "R - Y", "X - Y"]
    assert family.family_size == 3


def test_percent_margins_are_about_the_ratio_of_the_means():
    family = family_of("against: R, lower-percent: -2, upper-percent: 3, adjust: none")
    assert family.scale == "percent"
    assert (float(family.lower), float(family.upper)) == (-2.0, 3.0)
    assert family.rows[0].estimate == pytest.approx(100 * (10.11166666667 / 10.015 - 1), rel=1e-9)
    assert family.rows[0].se is None
    assert "Fieller" in family.method


@pytest.mark.parametrize(
    ("way", "open_end", "verdicts"),
    [
        ("not-lower", 1, [NON_INFERIORITY_SHOWN, NON_INFERIORITY_SHOWN]),
        ("not-higher", 0, [NON_INFERIORITY_SHOWN, NON_INFERIORITY_NOT_SHOWN]),
    ],
)
def test_non_inferiority_is_one_test_with_one_bound(way, open_end, verdicts):
    family = family_of(f"against: R, non-inferiority: {way}, margin: 0.2, adjust: none")
    assert family.claim == "non-inferiority"
    assert (family.upper if open_end else family.lower) is None
    for row in family.rows:
        assert row.ci[open_end] is None
        assert (row.p_upper if open_end else row.p_lower) is None
    assert [row.verdict for row in family.rows] == verdicts


def test_a_level_of_its_own_goes_before_that_of_the_study():
    family = family_of("against: R, margin: 0.2, adjust: none, alpha: 0.01")
    usual = family_of("against: R, margin: 0.2, adjust: none")
    assert (float(family.alpha), float(usual.alpha)) == (0.01, 0.05)
    assert [row.p for row in family.rows] == [row.p for row in usual.rows]
    assert family.rows[0].ci[0] < usual.rows[0].ci[0] < usual.rows[0].ci[1] < family.rows[0].ci[1]


def test_a_verdict_follows_the_level_of_the_family():
    usual = family_of("against: R, margin: 0.127, adjust: none").rows[0]
    assert 0.01 < usual.p < 0.05
    assert usual.verdict == EQUIVALENCE_SHOWN
    strict = family_of("against: R, margin: 0.127, adjust: none, alpha: 0.01").rows[0]
    assert strict.verdict == EQUIVALENCE_NOT_SHOWN


def test_holm_adjusts_over_the_rows():
    plain = family_of("pairs: all, margin: 0.5, adjust: none").rows
    holm = family_of("pairs: all, margin: 0.5, adjust: holm").rows
    smallest = min(range(3), key=lambda at: plain[at].p)
    assert holm[smallest].p_adjusted == pytest.approx(3 * plain[smallest].p, rel=1e-11)
    assert all(row.ci == other.ci for row, other in zip(holm, plain, strict=True))


def test_a_percentage_of_a_mean_near_zero_is_refused_with_what_to_use_instead():
    data = {"R": ["0.1", "-0.2", "0.15"], "X": ["0.2", "0.1", "-0.1"]}
    parts = "equivalence: [{name: e, against: R, margin-percent: 5, adjust: none}]\n"
    findings = findings_of(data, parts)
    assert findings.responses[0].equivalence == ()
    reasons = {item.what: item.reason for item in findings.not_reported}
    assert "cannot be told from zero" in reasons["equivalence: e"]
    assert "in units" in reasons["equivalence: e"]


@pytest.mark.parametrize(
    "margins", ["margin: 0.2", "margin-percent: 2", "non-inferiority: not-lower, margin: 0.2"]
)
def test_a_row_with_a_level_that_does_not_vary_is_named_and_counts_as_p_one(margins):
    data = {**DATA, "Z": ["10.2"] * 6, "Q": ["10.3"]}
    plan = f"equivalence: [{{name: e, against: R, {margins}, adjust: bonferroni}}]\n"
    parts = f"design: {{variances: separate}}\n{plan}"
    findings = findings_of(data, parts)
    (family,) = findings.responses[0].equivalence
    assert [row.label for row in family.rows] == ["X - R", "Y - R"]
    assert family.family_size == 4
    for row in family.rows:
        assert row.p_adjusted == pytest.approx(min(1, 4 * row.p), rel=1e-11)
    reasons = {item.what: item.reason for item in findings.not_reported}
    assert "Z do not vary at the recorded resolution" in reasons["equivalence: e: Z - R"]
    assert "Q has one value" in reasons["equivalence: e: Q - R"]


def test_where_the_reference_does_not_vary_no_row_is_left():
    data = {**DATA, "R": ["10.0"] * 6}
    parts = "design: {variances: separate}\nequivalence: [{name: e, against: R, margin: 0.2, adjust: holm}]\n"
    findings = findings_of(data, parts)
    assert findings.responses[0].equivalence == ()
    reasons = {item.what: item.reason for item in findings.not_reported}
    assert reasons["equivalence: e"].startswith("the values of R do not vary")


def test_percent_tests_stand_with_all_that_is_needed_to_recompute_them():
    family = family_of("against: R, margin-percent: 1.2, adjust: none", "design: {variances: separate}\n")
    r = [float(text) for text in DATA["R"]]
    for row in family.rows:
        x = [float(text) for text in DATA[row.label[0]]]
        for test, percent in zip(row.boundaries, (-1.2, 1.2), strict=True):
            ratio = 1 + percent / 100
            parts = [stats.sem(x) ** 2, ratio**2 * stats.sem(r) ** 2]
            assert float(test.margin) == percent
            assert to_double(test.se) == pytest.approx(sum(parts) ** 0.5, rel=1e-9)
            assert test.df == pytest.approx(sum(parts) ** 2 / sum(v * v / 5 for v in parts), rel=1e-9)
            excess = fmean(x) - ratio * fmean(r)
            assert to_double(test.t) == pytest.approx(excess / sum(parts) ** 0.5, rel=1e-7)
        assert (row.t_lower, row.t_upper) == tuple(test.t for test in row.boundaries)
        assert row.critical is None
