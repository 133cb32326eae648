"""Checks inform: each says in words what it shows, and none of them chooses the analysis."""

from fractions import Fraction

import pytest

from assayfolio.evaluation.apply import evaluate
from assayfolio.findings import NOT_ASSESSABLE
from support.studies import HEAD, findings_of, observations_of, study_of

UNEVEN = {
    "A": ["10.11", "10.13", "10.09", "10.12", "10.10", "10.08"],
    "B": ["10.91", "9.02", "11.45", "8.57", "10.04", "9.76"],
}
ALL = """\
checks:
  equal-variances: [bartlett, brown-forsythe, cochran, levene]
  normality: [anderson-darling, shapiro-wilk]
"""
NAMES = [
    "Bartlett test of equal variances",
    "Brown-Forsythe test of equal variances",
    "Cochran test of the largest variance",
    "Levene test of equal variances",
    "Anderson-Darling test on residuals",
    "Shapiro-Wilk test on residuals",
]


def checks_of(data, parts: str = ALL):
    return {check.name: check for check in findings_of(data, parts).responses[0].checks}


@pytest.mark.requirement("PLAN-8")
def test_every_check_of_the_plan_is_there_in_its_order():
    assert list(checks_of(UNEVEN)) == NAMES


def test_tests_of_equal_variances_find_unequal_ones():
    found = checks_of(UNEVEN)
    for name in NAMES[:4]:
        assert found[name].p < 0.05
        assert found[name].note.startswith("the data show")
    assert "a larger variance of B" in found[NAMES[2]].note
    assert [found[name].df for name in NAMES[:4]] == [(1,), (1, 10), (5, 5), (1, 10)]


@pytest.mark.requirement("PLAN-8")
def test_no_check_chooses_the_analysis():
    plain, checked = findings_of(UNEVEN).responses[0], findings_of(UNEVEN, ALL).responses[0]
    assert plain.anova == checked.anova
    assert all("does not choose the analysis" in check.note for check in checked.checks)


def test_levels_with_one_value_are_named_where_a_test_leaves_them_out():
    assert "without C, with one value each" in checks_of({**UNEVEN, "C": ["10.0"]})[NAMES[0]].note


def test_the_p_value_of_a_test_is_not_given_where_it_was_not_made_for_so_few_values():
    few = {"A": ["1.01", "1.02", "1.05"], "B": ["1.11", "1.14"]}
    check = checks_of(few)["Anderson-Darling test on residuals"]
    assert check.p is check.statistic is None
    assert check.note.startswith(f"{NOT_ASSESSABLE}: ")
    assert "from 8 values" in check.note


def test_a_check_that_cannot_be_formed_says_why():
    constant = {"A": ["1.0", "1.0"], "B": ["2.0", "2.0"]}
    for check in checks_of(constant).values():
        assert check.p is check.statistic is None
        assert check.note.startswith(NOT_ASSESSABLE)


ORDERED = HEAD.replace("unit: mg/kg", "unit: mg/kg, order: position")


def trend_of(values_by_level, order):
    study = study_of("", ORDERED)
    (response,) = evaluate(study, observations_of(study, values_by_level, order)).responses
    return {check.name: check for check in response.checks}.get("Trend in run order within levels")


def test_a_drift_in_measuring_order_is_found_wherever_the_plan_names_an_order_column():
    order = [1, 4, 6, 7, 2, 3, 5, 8]
    drift = [f"{10 + 0.1 * place + 0.003 * (-1) ** place:.3f}" for place in order]
    trend = trend_of({"A": drift[:4], "B": drift[4:]}, order)
    assert trend.p < 0.001
    assert trend.note.startswith("the data show a trend in run order at level 0.05")
    assert "slope 0.1 mg/kg a place" in trend.note
    assert trend.df == (5,)


def test_values_without_a_drift_show_none():
    trend = trend_of(
        {"A": ["10.12", "10.15", "10.11", "10.14"], "B": ["10.31", "10.28", "10.33", "10.30"]},
        [3, 1, 8, 5, 2, 7, 4, 6],
    )
    assert trend.p > 0.05
    assert trend.note.startswith("the data do not show a trend in run order")


def test_without_an_order_column_nothing_is_said_about_run_order():
    assert "Trend in run order within levels" not in checks_of(UNEVEN)


def resolution_of(data):
    return checks_of(data, "").get("Resolution of the values")


def test_coarsely_recorded_values_get_a_note_without_being_asked_for():
    coarse = {"A": ["1.1", "1.2", "1.1", "1.2"], "B": ["1.3", "1.2", "1.3", "1.3"]}
    check = resolution_of(coarse)
    assert check.p is None
    assert "steps of 0.1 mg/kg" in check.note
    assert check.statistic.square == Fraction("0.1") ** 2 / (Fraction("0.0175") / 6)


def test_finely_recorded_values_get_no_note():
    assert resolution_of(UNEVEN) is None


def test_values_that_do_not_vary_are_not_called_coarse_beside_the_missing_f_test():
    assert resolution_of({"A": ["1.0", "1.0"], "B": ["2.0", "2.0"]}) is None


SEPARATE = "design: {variances: separate}\n"


def test_with_separate_variances_levels_are_checked_for_normality_one_by_one():
    data = {
        "A": ["10.11", "10.34", "10.09", "10.52", "10.20", "10.38", "10.27", "10.41"],
        "B": ["10.91", "9.02", "11.45", "8.57", "10.04", "9.76", "10.30", "9.90"],
        "C": ["10.31", "10.45", "10.20"],
        "D": ["10.3"],
    }
    found = checks_of(data, SEPARATE + ALL)
    assert list(found)[4:] == [
        "Anderson-Darling tests of the levels, joined",
        "Shapiro-Wilk tests of the levels, joined",
    ]
    for name, fewest in zip(list(found)[4:], (8, 4), strict=True):
        note = found[name].note
        assert note.startswith("the data do not show a departure of the values within levels from normality")
        assert "each level tested by itself, since each has its own variance" in note
        assert f"without C, D (fewer than {fewest} values)" in note
        assert found[name].p > 0.05


def test_levels_that_differ_in_spread_alone_are_no_departure_from_normality_with_separate_variances():
    quantiles = ["-1.53", "-0.89", "-0.49", "-0.16", "0.16", "0.49", "0.89", "1.53"]
    data = {f"L{at}": [f"{float(q) * 10**at:.3f}" for q in quantiles] for at in range(4)}
    normality = "checks: {normality: shapiro-wilk}\n"
    assert next(iter(checks_of(data, normality).values())).p < 1e-5
    assert next(iter(checks_of(data, SEPARATE + normality).values())).p > 0.5


def test_with_separate_variances_unequal_ones_are_no_alarm():
    words = "this plan does not assume equal variances, so a departure is no alarm"
    for name in NAMES[:4]:
        assert words in checks_of(UNEVEN, SEPARATE + ALL)[name].note
        assert words not in checks_of(UNEVEN)[name].note


def test_the_trend_in_run_order_says_where_it_assumes_more_than_the_plan():
    def note(design: str) -> str:
        study = study_of(design, ORDERED)
        data = {"A": ["10.12", "10.15", "10.11"], "B": ["10.31", "10.28", "10.33"]}
        (response,) = evaluate(study, observations_of(study, data, [3, 1, 6, 5, 2, 4])).responses
        return response.checks[0].note

    assert "assumes one variance for all levels, which the plan does not" in note(SEPARATE)
    assert "one variance" not in note("")
