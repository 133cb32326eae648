"""Applying a plan to observations: what is found, what is not reported and why."""

from fractions import Fraction
from math import log10

import pytest

from assayfolio.errors import DataError
from assayfolio.evaluation.apply import evaluate
from assayfolio.findings import DIFFERENCE_NOT_SHOWN, DIFFERENCE_SHOWN, NOT_ASSESSABLE
from assayfolio.fit import check_fit
from support.studies import demo_study, findings_of, observations_of, study_of

LOTS = {
    "lot-1": ["10.11", "10.30", "10.02", "10.19"],
    "lot-2": ["10.90", "11.20", "11.03"],
    "lot-3": ["10.20", "10.41", "10.10", "10.60", "10.29"],
}
PARTS = """\
comparisons:
  - {name: all pairs, pairs: all, adjust: tukey-kramer}
  - {name: to lot 1, against: lot-1, adjust: holm, alternative: greater}
  - {name: lot 2 alone, weights: {lot-2: 1, lot-1: -1/2, lot-3: -1/2}}
checks: {equal-variances: brown-forsythe, normality: shapiro-wilk}
"""


def test_families_keep_the_order_and_the_words_of_the_plan():
    (response,) = findings_of(LOTS, PARTS).responses
    found = [(f.name, f.adjust, f.alternative, f.family_size) for f in response.comparisons]
    assert found == [
        ("all pairs", "tukey-kramer", "two-sided", 3),
        ("to lot 1", "holm", "greater", 2),
        ("lot 2 alone", "none", "two-sided", 1),
    ]
    labels = [[row.label for row in family.rows] for family in response.comparisons]
    assert labels == [
        ["lot-1 - lot-2", "lot-1 - lot-3", "lot-2 - lot-3"],
        ["lot-2 - lot-1", "lot-3 - lot-1"],
        ["lot 2 alone"],
    ]


def test_effect_sizes_rest_on_one_variance_and_are_left_out_with_separate_ones():
    assert findings_of(LOTS).responses[0].effect is not None
    assert findings_of(LOTS, "design: {variances: separate}\n").responses[0].effect is None


def test_no_comparison_is_said_to_be_registered():
    (response,) = findings_of(LOTS, PARTS).responses
    assert not any(family.registered for family in response.comparisons)


def test_levels_and_alpha_are_those_of_plan_and_data():
    (response,) = findings_of(LOTS).responses
    assert response.response == "content"
    assert response.unit == "mg/kg"
    assert response.alpha == Fraction(1, 20)
    described = [(level.level, level.n, level.minimum, level.maximum) for level in response.levels]
    assert described == [
        ("lot-1", 4, Fraction("10.02"), Fraction("10.3")),
        ("lot-2", 3, Fraction("10.9"), Fraction("11.2")),
        ("lot-3", 5, Fraction("10.1"), Fraction("10.6")),
    ]


@pytest.mark.requirement("PLAN-7")
def test_what_was_not_asked_for_is_not_there():
    (response,) = findings_of(LOTS).responses
    assert response.comparisons == response.equivalence == response.checks == response.outliers == ()
    assert response.criteria == ()
    assert response.spread is response.precision is response.welch is response.brown_forsythe_means is None


def test_verdicts_follow_the_adjusted_p_alone():
    rows = [row for family in findings_of(LOTS, PARTS).responses[0].comparisons for row in family.rows]
    assert {row.verdict for row in rows} == {DIFFERENCE_SHOWN, DIFFERENCE_NOT_SHOWN}
    for row in rows:
        assert (row.verdict == DIFFERENCE_SHOWN) == (row.p_adjusted <= 0.05)


def test_an_adjusted_p_of_exactly_alpha_shows_a_difference():
    (response,) = findings_of(LOTS, "comparisons: [{name: c, against: lot-1, adjust: none}]").responses
    row = response.comparisons[0].rows[1]
    assert 0.05 < row.p < 1
    head = f"study: T\ntitle: t\ndata: {{file: f.csv, response: y, factor: x}}\nalpha: {row.p!r}\n"
    study = study_of("comparisons: [{name: c, against: lot-1, adjust: none}]", head)
    again = evaluate(study, observations_of(study, LOTS)).responses[0].comparisons[0].rows[1]
    assert again.p == row.p
    assert again.verdict == DIFFERENCE_SHOWN


def test_the_overall_verdict_follows_p():
    assert findings_of(LOTS).responses[0].anova.verdict == DIFFERENCE_SHOWN
    alike = {"A": ["1", "2", "3"], "B": ["1.1", "2.1", "2.9"]}
    assert findings_of(alike).responses[0].anova.verdict == DIFFERENCE_NOT_SHOWN


@pytest.mark.parametrize(
    ("data", "words"),
    [
        ({"lot-1": ["4.2", "4.2"], "lot-2": ["4.2", "4.20"]}, "all values are equal"),
        ({"lot-1": ["4.2", "4.2"], "lot-2": ["4.3", "4.3"]}, "the values do not vary within any level"),
    ],
)
def test_without_variation_within_levels_descriptions_stay_and_inference_is_not_reported(data, words):
    parts = """\
comparisons: [{name: pairs, pairs: all, adjust: tukey-kramer}, {name: to 1, against: lot-1, adjust: holm}]
checks: {equal-variances: brown-forsythe, normality: shapiro-wilk}
"""
    findings = findings_of(data, parts)
    (response,) = findings.responses
    anova = response.anova
    assert (anova.f, anova.p, anova.log10_p, anova.f_critical) == (None, None, None, None)
    assert anova.verdict == NOT_ASSESSABLE
    assert anova.within.ss == 0
    assert [level.ci for level in response.levels] == [None, None]
    assert [float(level.mean) for level in response.levels] == [4.2, float(data["lot-2"][0])]
    assert response.comparisons == ()
    assert [item.what for item in findings.not_reported] == [
        "F test and intervals for means",
        "comparison: pairs",
        "comparison: to 1",
    ]
    assert findings.not_reported[0].reason.startswith(words)
    for check in response.checks:
        assert check.p is None
        assert check.statistic is None
        assert check.note.startswith(NOT_ASSESSABLE)


def test_values_that_span_more_than_a_double_can_hold_are_described_and_f_is_not_reported():
    data = {"lot-1": ["9" * 38 + "e60", "9" * 38 + "e60"], "lot-2": ["0", "1e-60"]}
    parts = "comparisons: [{name: pairs, pairs: all, adjust: tukey-kramer}]"
    findings = findings_of(data, parts)
    assert findings.responses[0].anova.f is None
    assert [(item.what, item.reason) for item in findings.not_reported] == [
        ("F test", "the values differ by more than 150 powers of ten")
    ]


def test_checks_say_what_they_show_and_that_they_do_not_choose():
    uneven = {"A": ["1.0", "1.1", "1.0", "1.1", "1.05", "1.02"], "B": ["1", "9", "5", "-4", "14", "2"]}
    parts = "checks: {equal-variances: brown-forsythe, normality: shapiro-wilk}"
    notes = [check.note for check in findings_of(uneven, parts).responses[0].checks]
    assert notes[0].startswith("the data show unequal variances at level 0.05")
    assert notes[1].startswith("the data do not show a departure")
    assert all("does not choose the analysis" in note for note in notes)


def test_a_check_states_the_level_as_it_was_planned():
    head = "study: T\ntitle: t\ndata: {file: f.csv, response: y, factor: x}\nalpha: 0.01234567\n"
    study = study_of("checks: {normality: shapiro-wilk}", head)
    (check,) = evaluate(study, observations_of(study, LOTS)).responses[0].checks
    assert "at level 0.01234567;" in check.note


def test_normality_of_too_many_values_is_not_assessable():
    data = {"A": [str(at % 13) for at in range(2501)], "B": [str(at % 11) for at in range(2500)]}
    (check,) = findings_of(data, "checks: {normality: shapiro-wilk}").responses[0].checks
    assert check.p is None
    assert check.note.startswith(f"{NOT_ASSESSABLE}: the Shapiro-Wilk test is defined for 3 to 5,000 values")


@pytest.mark.parametrize("power", [-50, -30, 0, 30])
def test_another_unit_changes_neither_p_nor_verdict(power):
    scaled = {level: [f"{text}e{power}" for text in texts] for level, texts in LOTS.items()}
    (plain,), (other,) = findings_of(LOTS, PARTS).responses, findings_of(scaled, PARTS).responses
    assert (other.anova.p, other.anova.verdict) == (plain.anova.p, plain.anova.verdict)
    for one, two in zip(plain.comparisons, other.comparisons, strict=True):
        assert [row.p_adjusted for row in two.rows] == [row.p_adjusted for row in one.rows]
    assert [check.p for check in other.checks] == pytest.approx([c.p for c in plain.checks], rel=1e-10)


def test_a_p_too_small_for_a_double_has_its_logarithm():
    # Three levels: p = (SS within / SS total)^(df within / 2), in closed form; here about 1e-537.
    steps = [f"{at % 10}e-3" for at in range(70)]
    data = {
        "A": steps,
        "B": [f"{500 + at % 10}e-3" for at in range(70)],
        "C": [f"{at % 10 - 900}e-3" for at in range(70)],
    }
    anova = findings_of(data).responses[0].anova
    assert anova.p == 0.0
    assert anova.log10_p is not None
    share = anova.within.ss / anova.total.ss
    assert anova.log10_p == pytest.approx(anova.within.df / 2 * log10(share), rel=1e-11)
    assert anova.verdict == DIFFERENCE_SHOWN


@pytest.mark.requirement("PLAN-4")
def test_the_power_of_a_plan_depends_on_the_plan_alone():
    head = (
        "study: T\ntitle: t\ndata: {file: f.csv, response: y, factor: x, levels: [a, b], replicates: 3}\n"
        "alpha: 0.05\n"
    )
    parts = "power: {difference: 1, sigma: 0.5, target: 0.9}\n"
    plain = findings_of({"a": ["1.01", "1.12", "1.33"], "b": ["2.01", "2.22", "2.43"]}, parts, head)
    other = findings_of({"a": ["7.01", "1.12", "9.33"], "b": ["2.01", "0.22", "2.43"]}, parts, head)
    assert plain.power is not None
    assert plain.power == other.power
    assert findings_of(LOTS).power is None


def test_a_plan_without_numbers_of_values_has_no_power_and_says_so():
    findings = findings_of(LOTS, "power: {difference: 1, sigma: 0.5, target: 0.9}\n")
    assert findings.power is None
    (gap,) = findings.not_reported
    assert gap.what == "power"
    assert gap.response is None


@pytest.mark.parametrize("name", ["brine-chloride", "whey-moisture"])
def test_the_demonstration_studies_can_be_evaluated(name):
    study, observations = demo_study(name)
    findings = evaluate(study, observations)
    assert findings.not_reported == ()
    assert [f.name for f in findings.responses[0].comparisons] == [c.name for c in study.comparisons]
    assert sum(level.n for level in findings.responses[0].levels) == len(observations[0].rows)


@pytest.mark.parametrize(
    ("data", "parts", "reason"),
    [
        ({"lot-1": ["1", "2"]}, "", "one level only (lot-1)"),
        ({"lot-1": ["1"], "lot-2": ["2"]}, "", "one value at every level"),
        (LOTS, "comparisons: [{name: c, against: lot-9, adjust: holm}]", "'lot-9'"),
        (LOTS, "comparisons: [{name: c, weights: {lot-1: 1, lot-8: -1}}]", "'lot-8'"),
    ],
)
def test_a_plan_that_does_not_fit_the_data_is_refused_with_its_reason(data, parts, reason):
    study = study_of(parts)
    observations = observations_of(study, data)
    with pytest.raises(DataError) as caught:
        check_fit(study, observations)
    assert reason in str(caught.value)
    with pytest.raises(DataError):
        evaluate(study, observations)


def test_every_level_that_is_named_and_absent_is_told_at_once():
    parts = """\
comparisons:
  - {name: to 8, against: lot-8, adjust: holm}
  - {name: pairs, pairs: all, adjust: holm}
  - {name: c, weights: {lot-1: 1, lot-9: -1}}
"""
    study = study_of(parts)
    with pytest.raises(DataError) as caught:
        check_fit(study, observations_of(study, LOTS))
    assert len(caught.value.faults) == 2
    assert {fault.place.line for fault in caught.value.faults} == {6, 8}
