"""The overall question: F, and the tests of means that do not pool the variances."""

import pytest

from assayfolio.findings import DIFFERENCE_SHOWN, NOT_ASSESSABLE
from support.studies import findings_of

DATA = {
    "A": ["10.12", "10.31", "10.04", "10.22", "10.18"],
    "B": ["10.41", "10.92", "10.03"],
    "C": ["10.31", "10.28", "10.36", "10.33"],
}


def separate(omnibus: str = ""):
    planned = f", omnibus: {omnibus}" if omnibus else ""
    return findings_of(DATA, f"design: {{variances: separate{planned}}}\n")


def test_a_pooled_analysis_has_the_f_test_alone():
    (response,) = findings_of(DATA).responses
    assert response.omnibus == "f"
    assert response.welch is response.brown_forsythe_means is None
    assert response.overall_verdict == response.anova.verdict
    assert response.anova.p_adjusted == response.anova.p


@pytest.mark.parametrize("omnibus", ["", "welch", "brown-forsythe"])
def test_separate_variances_have_both_tests_and_the_planned_one_answers(omnibus):
    (response,) = separate(omnibus).responses
    assert response.omnibus == (omnibus or "welch")
    assert response.welch is not None
    assert response.brown_forsythe_means is not None
    planned = response.brown_forsythe_means if omnibus == "brown-forsythe" else response.welch
    assert response.overall_verdict == planned.verdict
    assert response.anova.f is not None


def test_the_two_tests_that_bear_the_same_names_are_told_apart():
    parts = "design: {variances: separate}\nchecks: {equal-variances: brown-forsythe}\n"
    (response,) = findings_of(DATA, parts).responses
    assert response.brown_forsythe_means.f != response.checks[0].statistic
    assert response.checks[0].name == "Brown-Forsythe test of equal variances"


def test_two_levels_give_the_same_p_by_all_tests_without_pooling():
    pair = {"A": DATA["A"], "B": DATA["B"]}
    parts = """\
design: {variances: separate}
comparisons: [{name: c, pairs: all, adjust: none}]
"""
    (response,) = findings_of(pair, parts).responses
    p = response.comparisons[0].rows[0].p
    assert response.welch.p == pytest.approx(p, rel=1e-11)
    assert response.brown_forsythe_means.p == pytest.approx(p, rel=1e-11)
    assert response.brown_forsythe_means.p_mehrotra == pytest.approx(p, rel=1e-11)


def test_intervals_of_means_rest_on_the_error_of_the_plan():
    pooled, own = findings_of(DATA).responses[0].levels, separate().responses[0].levels
    width = [[level.ci[1] - level.ci[0] for level in levels] for levels in (pooled, own)]
    assert width[0][2] > width[1][2]  # C is the precise level
    assert width[0][1] < width[1][1]  # B is the imprecise one, with few values


def test_a_level_without_an_error_of_its_own_has_no_interval_and_the_reason_is_given():
    data = {**DATA, "D": ["10.2"], "E": ["10.3", "10.3"]}
    findings = findings_of(data, "design: {variances: separate}\n")
    assert [level.ci is None for level in findings.responses[0].levels] == [False, False, False, True, True]
    reasons = {item.what: item.reason for item in findings.not_reported}
    assert "two or more values" in reasons["interval for the mean: D, E"]
    assert findings.responses[0].overall_verdict == NOT_ASSESSABLE
    assert "D" in reasons["Welch's test of equal means"]
    assert "Brown-Forsythe test of equal means" in reasons


def test_effect_sizes_go_with_every_f_under_fixed_effects():
    (response,) = findings_of(DATA).responses
    effect, anova = response.effect, response.anova
    assert effect.eta_squared == anova.r_squared
    assert effect.omega_squared < effect.epsilon_squared < effect.eta_squared
    assert effect.cohen_f.square == effect.eta_squared / (1 - effect.eta_squared)
    assert effect.confidence == 1 - response.alpha
    assert effect.cohen_f_ci[0] < float(effect.cohen_f.square) ** 0.5 < effect.cohen_f_ci[1]


@pytest.mark.requirement("REPORT-10")
def test_random_levels_have_no_effect_size_and_no_comparison():
    (response,) = findings_of(DATA, "design: {effects: random}\n").responses
    assert response.effect is None
    assert response.anova.f is not None
    assert response.comparisons == ()


def test_the_overall_verdict_follows_the_adjusted_p():
    (response,) = separate().responses
    for test in (response.anova, response.welch, response.brown_forsythe_means):
        assert (test.verdict == DIFFERENCE_SHOWN) == (test.p_adjusted <= 0.05)
