"""The power of a plan: which tests it lists, that its numbers reach what they claim, what it cannot give."""

from fractions import Fraction

import pytest

from assayfolio.errors import StudyError
from assayfolio.planning.plan_power import plan_power, power_curves
from assayfolio.statistics.distributions import many_to_one_isf, studentized_range_isf
from assayfolio.statistics.noncentral import noncentral_t_cdf, noncentral_t_sf
from assayfolio.statistics.power import f_power
from assayfolio.statistics.tails import t_isf
from assayfolio.study.availability import check_plannable
from support.studies import study_of

HEAD = """\
study: TST-1
title: A test of planning
data: {file: d.csv, response: content, factor: lot, unit: mg/kg, levels: [a, b, c, d], replicates: 6}
alpha: 0.05
"""
POWER = "power: {difference: 0.5, sigma: 0.3, target: 0.9}\n"


def rows_of(parts: str, head: str = HEAD, power: str = POWER):
    found, gaps = plan_power(study_of(parts + power, head))
    return found.rows, gaps


def either_side(critical, df, delta):
    return float(noncentral_t_sf(critical, df, delta) + noncentral_t_cdf(-critical, df, delta))


def test_a_plan_without_power_has_none():
    assert plan_power(study_of("", HEAD)) == (None, ())


def test_the_overall_test_comes_first_and_is_the_power_of_f():
    (overall, *_), _ = rows_of("")
    assert overall.method == "F test"
    assert overall.power == pytest.approx(f_power((6,) * 4, 0.5, 0.3, 0.05), rel=1e-11)


def test_every_family_is_listed_with_what_its_power_is_the_chance_of():
    rows, gaps = rows_of(
        "comparisons:\n"
        "  - {name: pairs, pairs: all, adjust: tukey-kramer}\n"
        "  - {name: to a, against: a, adjust: dunnett}\n"
        "  - {name: ends, weights: {a: 1, d: -1}}\n"
        "  - {name: trend, trend: linear, scores: {a: 1, b: 2, c: 3, d: 4}}\n"
        "equivalence: [{name: alike, against: a, margin: 0.6, adjust: holm}]\n"
    )
    assert [row.question for row in rows] == [
        "overall: do the means differ?",
        *["pairs"] * 3,
        *["to a"] * 3,
        "ends",
        "trend: linear",
        "alike",
    ]
    assert gaps == ()
    assert all(0 < row.power <= 1 for row in rows)
    assert len({(row.question, row.meaning) for row in rows}) == len(rows)


def test_one_pair_under_tukey_is_noncentral_t_beyond_the_range_point():
    rows, _ = rows_of("comparisons: [{name: pairs, pairs: all, adjust: tukey-kramer}]\n")
    critical = float(studentized_range_isf(0.05, 4, 20)) / 2**0.5
    assert rows[1].power == pytest.approx(either_side(critical, 20, 0.5 / (0.3 * (2 / 6) ** 0.5)), rel=1e-10)
    assert rows[1].half_width == pytest.approx(critical * 0.3 * (2 / 6) ** 0.5, rel=1e-10)


def test_one_level_under_dunnett_is_noncentral_t_beyond_the_many_to_one_point():
    rows, _ = rows_of("comparisons: [{name: to a, against: a, adjust: dunnett, alternative: greater}]\n")
    critical = float(many_to_one_isf(0.05, 6, (6, 6, 6), 20, two_sided=False))
    expected = float(noncentral_t_sf(critical, 20, 0.5 / (0.3 * (2 / 6) ** 0.5)))
    assert rows[1].power == pytest.approx(expected, rel=1e-10)


@pytest.mark.parametrize("alternative", ["two-sided", "greater", "less"])
def test_a_contrast_has_the_difference_as_its_value_in_the_direction_asked_for(alternative):
    parts = f"comparisons: [{{name: ends, weights: {{a: 1, d: -1}}, alternative: {alternative}}}]\n"
    rows, _ = rows_of(parts)
    delta = 0.5 / (0.3 * (2 / 6) ** 0.5)
    critical = float(t_isf(0.025 if alternative == "two-sided" else 0.05, 20))
    expected = either_side(critical, 20, delta)
    if alternative != "two-sided":
        expected = float(noncentral_t_sf(critical, 20, delta))
    assert rows[1].power == pytest.approx(expected, rel=1e-10)


def test_a_scheffe_contrast_is_held_against_the_scheffe_point():
    plain, _ = rows_of("comparisons: [{name: ends, weights: {a: 1, d: -1}}]\n")
    scheffe, _ = rows_of("comparisons: [{name: ends, weights: {a: 1, d: -1}, adjust: scheffe}]\n")
    assert scheffe[1].power < plain[1].power


def test_the_linear_trend_of_two_ends_is_their_difference():
    head = HEAD.replace("[a, b, c, d]", '["1", "2"]')
    rows, _ = rows_of(
        "comparisons: [{name: trend, trend: linear}, {name: ends, weights: {'1': -1, '2': 1}}]\n", head
    )
    assert rows[1].power == pytest.approx(rows[2].power, rel=1e-11)


@pytest.mark.parametrize("allocation", ["equal", "control"])
def test_the_numbers_for_the_target_reach_it_and_one_less_does_not(allocation):
    parts = "comparisons: [{name: to b, against: b, adjust: dunnett}]\n"
    power = POWER.replace("}", f", allocation: {allocation}}}")
    for row in rows_of(parts, power=power)[0]:
        sizes = row.n_for_target
        assert sizes is not None
        reached = {at: _power_at(parts, power, sizes, at, row) for at in (0, 1)}
        assert reached[0] >= 0.9 > reached[1]
        if allocation == "control":
            assert sizes[1] > sizes[0] == sizes[2]


def _power_at(parts, power, sizes, fewer, row):
    smaller = min(sizes) - fewer
    control = smaller
    if len(set(sizes)) > 1:
        control = next(n for n in range(1, 100 * smaller) if n * n >= 3 * smaller * smaller)
    replicates = f"{{a: {smaller}, b: {control}, c: {smaller}, d: {smaller}}}"
    rows, _ = rows_of(parts, HEAD.replace("replicates: 6", f"replicates: {replicates}"), power)
    return next(one.power for one in rows if (one.question, one.meaning) == (row.question, row.meaning))


def test_the_detectable_difference_has_the_target_power():
    parts = "comparisons: [{name: pairs, pairs: all, adjust: bonferroni}]\n"
    for row in rows_of(parts)[0]:
        again, _ = rows_of(parts, power=POWER.replace("0.5", repr(row.detectable_difference)))
        match = next(one for one in again if (one.question, one.meaning) == (row.question, row.meaning))
        assert match.power == pytest.approx(0.9, abs=1e-9)


def test_equivalence_has_no_detectable_difference_and_less_power_off_the_middle():
    parts = "equivalence: [{name: alike, against: a, margin: 0.6, adjust: bonferroni}]\n"
    middle = rows_of(parts)[0][-1]
    off = rows_of(parts, power=POWER.replace("}", ", true-difference: 0.2}"))[0][-1]
    assert middle.detectable_difference is None
    assert off.power < middle.power


def test_non_inferiority_looks_at_its_own_side():
    parts = "equivalence: [{name: n, against: a, non-inferiority: %s, margin: 0.4, adjust: none}]\n"
    lower = rows_of(parts % "not-lower", power=POWER.replace("}", ", true-difference: 0.1}"))[0][-1]
    higher = rows_of(parts % "not-higher", power=POWER.replace("}", ", true-difference: 0.1}"))[0][-1]
    assert lower.power > higher.power


def test_percent_margins_and_unequal_numbers_are_named_where_power_cannot_be_given():
    head = HEAD.replace("replicates: 6", "replicates: {a: 6, b: 5, c: 6, d: 6}")
    rows, gaps = rows_of(
        "comparisons: [{name: pairs, pairs: all, adjust: tukey-kramer}]\n"
        "equivalence: [{name: alike, against: a, margin-percent: 5, adjust: holm}]\n",
        head,
    )
    assert [row.question for row in rows] == ["overall: do the means differ?", "pairs"]
    assert [gap.what for gap in gaps] == ["power of any and of all pairs: pairs", "power: alike"]


def test_one_value_at_each_level_leaves_nothing_to_plan_with():
    rows, gaps = rows_of("", HEAD.replace("replicates: 6", "replicates: 1"))
    assert rows == ()
    assert "one value at every level" in gaps[0].reason


def test_alpha_is_shared_out_over_the_responses_where_so_planned():
    head = HEAD.replace("response: content", "response: [content, water]")
    power = POWER.replace("}", ", response: water}")
    found, _ = plan_power(study_of("design: {across-responses: bonferroni}\n" + power, head))
    assert found.alpha == Fraction(1, 40)
    assert found.response == "water"


def test_curves_rise_and_pass_through_the_planned_power():
    study = study_of("comparisons: [{name: to a, against: a, adjust: dunnett-step-down}]\n" + POWER, HEAD)
    found, _ = plan_power(study)
    curves = power_curves(study, found)
    assert len(curves) == len(found.rows)
    for curve, row in zip(curves, found.rows, strict=True):
        assert list(curve.power) == sorted(curve.power)
        assert curve.power[curve.n.index(6)] == pytest.approx(row.power, rel=1e-11)


def test_what_is_missing_for_planning_is_named_all_at_once():
    head = HEAD.replace(", levels: [a, b, c, d], replicates: 6", "")
    with pytest.raises(StudyError) as caught:
        check_plannable(study_of("", head))
    found = " ".join(str(fault) for fault in caught.value.faults)
    assert all(key in found for key in ("`power`", "`data.levels`", "`data.replicates`"))


def test_a_one_sided_question_is_about_its_side_and_has_the_distance_to_its_bound():
    rows, _ = rows_of(
        "comparisons:\n"
        "  - {name: up, against: a, adjust: dunnett, alternative: greater}\n"
        "  - {name: down, weights: {a: 1, d: -1}, alternative: less}\n"
    )
    assert rows[1].meaning == "showing a given level that lies above the reference by the difference"
    assert rows[3].meaning == "showing every level, where all lie above the reference by the difference"
    assert rows[4].meaning == "showing the contrast, where its true value lies below zero by the difference"
    assert rows[4].half_width == pytest.approx(float(t_isf(0.05, 20)) * 0.3 * (2 / 6) ** 0.5, rel=1e-10)


@pytest.mark.parametrize("adjust", ["holm", "hochberg", "dunnett-step-down"])
def test_a_stepwise_method_has_no_interval_and_so_no_half_width(adjust):
    rows, _ = rows_of(f"comparisons: [{{name: to a, against: a, adjust: {adjust}}}]\n")
    assert [row.half_width for row in rows] == [None] * len(rows)


def test_an_equivalence_row_under_holm_has_the_interval_of_one_test():
    rows, _ = rows_of("equivalence: [{name: alike, against: a, margin: 0.6, adjust: holm}]\n")
    assert rows[1].half_width == pytest.approx(float(t_isf(0.05, 20)) * 0.3 * (2 / 6) ** 0.5, rel=1e-10)


def test_with_unequal_numbers_a_given_level_is_the_one_with_the_fewest_values():
    head = HEAD.replace("replicates: 6", "replicates: {a: 8, b: 6, c: 4, d: 6}")
    parts = (
        "comparisons: [{name: to a, against: a, adjust: dunnett}, {name: pairs, pairs: all, adjust: none}]\n"
    )
    rows, _ = rows_of(parts, head)
    assert rows[1].meaning.startswith("showing a given level, that with the fewest values, that differs from")
    assert rows[4].meaning.startswith("showing a given pair, that with the fewest values, that differs by")
