"""Every level against a reference: in one step with intervals, and stepping down without."""

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from assayfolio.exact import to_double
from assayfolio.statistics.comparisons import GREATER, LESS, TWO_SIDED, compare
from assayfolio.statistics.estimates import reference_estimates
from assayfolio.statistics.many_to_one_comparisons import compare_dunnett, compare_dunnett_step_down
from assayfolio.statistics.oneway import NotComputableError
from support.closed_many_to_one import closed_p_values, maximum_exceeds
from support.drawn import (
    ALPHAS,
    ALTERNATIVES,
    analysed_tenths,
    excludes_zero,
    in_another_unit,
    levels_that_vary,
)
from support.reference import analysed

ROUNDING = 1 + 1e-10
DESIGNS = {
    "equal": (6, (6, 6, 6, 6)),
    "a large reference": (12, (4, 4, 4, 4)),
    "unequal": (5, (2, 9, 4, 15)),
    "a reference of one": (1, (8, 2, 3)),
    "two levels": (4, (3, 11)),
}


def drawn(design: str, seed: int):
    n_reference, sizes = DESIGNS[design]
    generator = np.random.default_rng(seed)
    levels = {"ref": generator.normal(5.0, 0.4, n_reference)}
    levels |= {f"x{at}": generator.normal(5.0 + 0.25 * at * (-1) ** at, 0.4, n) for at, n in enumerate(sizes)}
    return analysed({level: [f"{value:.3f}" for value in values] for level, values in levels.items()})


@pytest.mark.parametrize("alternative", ALTERNATIVES)
@pytest.mark.parametrize("design", DESIGNS)
@pytest.mark.parametrize("seed", [1, 2])
def test_stepping_down_is_closed_testing_over_every_set_of_levels(design, alternative, seed):
    analysis = drawn(design, seed)
    rows = compare_dunnett_step_down(analysis, "ref", alternative)
    n_reference, sizes = DESIGNS[design]
    towards = {TWO_SIDED: abs, GREATER: float, LESS: lambda t: -t}[alternative]
    statistics = [towards(to_double(row.statistic)) for row in rows]
    in_full = closed_p_values(statistics, n_reference, sizes, analysis.df_within, alternative == TWO_SIDED)
    assert [row.adjusted.p for row in rows] == pytest.approx(in_full, abs=2e-11)


@pytest.mark.parametrize("alternative", ALTERNATIVES)
@pytest.mark.parametrize("design", DESIGNS)
def test_in_one_step_each_statistic_is_held_against_the_maximum_over_all(design, alternative):
    analysis = drawn(design, 3)
    n_reference, sizes = DESIGNS[design]
    for row in compare_dunnett(analysis, "ref", alternative, 0.05):
        t = to_double(row.statistic)
        d = {TWO_SIDED: abs(t), GREATER: t, LESS: -t}[alternative]
        expected = maximum_exceeds(d, n_reference, sizes, analysis.df_within, alternative == TWO_SIDED)
        assert row.adjusted.p == pytest.approx(expected, abs=1e-11)


def test_levels_with_equal_statistics_step_together():
    analysis = analysed({"ref": ["1", "3"], "a": ["4", "6"], "b": ["3", "5", "4"], "c": ["4", "6"]})
    a, b, c = compare_dunnett_step_down(analysis, "ref", TWO_SIDED)
    assert a.statistic == c.statistic
    assert a.adjusted == c.adjusted
    assert a.adjusted.p < b.adjusted.p


def test_a_level_between_two_that_differ_more_steps_down_past_them():
    # In one step b is not shown to differ; once d and c are out of the way it is.
    data = {
        "ref": ["5.0", "5.2", "4.9", "5.1", "5.3"],
        "a": ["5.1", "5.0", "5.2", "5.2", "5.1"],
        "b": ["5.3", "5.4", "5.2", "5.5", "5.25"],
        "c": ["5.9", "6.1", "6.0", "6.2", "5.8"],
        "d": ["6.4", "6.6", "6.5", "6.3", "6.7"],
    }
    analysis = analysed(data)
    single = {row.label[0]: row for row in compare_dunnett(analysis, "ref", TWO_SIDED, 0.05)}
    stepped = {row.label[0]: row for row in compare_dunnett_step_down(analysis, "ref", TWO_SIDED)}
    assert single["b"].adjusted.p > 0.05 >= stepped["b"].adjusted.p
    assert stepped["d"].adjusted == single["d"].adjusted
    assert stepped["a"].adjusted.p < single["a"].adjusted.p
    assert all(row.interval is None for row in stepped.values())
    assert all(row.interval is not None for row in single.values())


@settings(max_examples=40)
@given(levels_that_vary(fewest=3), st.sampled_from(ALTERNATIVES))
def test_stepping_down_lies_between_raw_and_one_step_and_that_below_bonferroni(data, alternative):
    analysis = analysed_tenths(data)
    single = compare_dunnett(analysis, "L0", alternative, 0.05)
    stepped = compare_dunnett_step_down(analysis, "L0", alternative)
    bonferroni = compare(analysis, reference_estimates(analysis, "L0"), "bonferroni", alternative, 0.05)
    holm = compare(analysis, reference_estimates(analysis, "L0"), "holm", alternative, 0.05)
    for down, one, most, down_most in zip(stepped, single, bonferroni, holm, strict=True):
        assert down.tail == one.tail == most.tail
        assert down.tail.p <= down.adjusted.p * ROUNDING
        assert down.adjusted.p <= one.adjusted.p * ROUNDING
        assert one.adjusted.p <= most.adjusted.p * ROUNDING
        assert down.adjusted.p <= down_most.adjusted.p * ROUNDING


@settings(max_examples=40)
@given(levels_that_vary(fewest=3), st.sampled_from(ALTERNATIVES))
def test_stepping_down_a_larger_statistic_never_has_the_larger_p(data, alternative):
    analysis = analysed_tenths(data)
    rows = compare_dunnett_step_down(analysis, "L0", alternative)
    towards = {TWO_SIDED: abs, GREATER: float, LESS: lambda t: -t}[alternative]
    ranked = sorted(rows, key=lambda row: towards(to_double(row.statistic)), reverse=True)
    assert [row.adjusted.p for row in ranked] == sorted(row.adjusted.p for row in rows)
    assert [row.adjusted.log10_p for row in ranked] == sorted(row.adjusted.log10_p for row in rows)


@settings(max_examples=40)
@given(levels_that_vary(fewest=3), st.sampled_from(ALTERNATIVES), ALPHAS)
def test_interval_and_verdict_agree(data, alternative, alpha):
    for row in compare_dunnett(analysed_tenths(data), "L0", alternative, alpha):
        assume(abs(row.adjusted.p - alpha) > 1e-9 * alpha)
        assert excludes_zero(row.interval) == (row.adjusted.p <= alpha)
        assert (row.interval[0] is None, row.interval[1] is None) == (
            alternative == LESS,
            alternative == GREATER,
        )


@given(levels_that_vary(most=2), st.sampled_from(ALTERNATIVES), ALPHAS)
def test_for_two_levels_both_are_the_t_test(data, alternative, alpha):
    analysis = analysed_tenths(data)
    plain = compare(analysis, reference_estimates(analysis, "L0"), "none", alternative, alpha)
    assert compare_dunnett(analysis, "L0", alternative, alpha) == plain
    (stepped,) = compare_dunnett_step_down(analysis, "L0", alternative)
    assert (stepped.statistic, stepped.adjusted) == (plain[0].statistic, plain[0].adjusted)


@settings(max_examples=30)
@given(
    levels_that_vary(fewest=3),
    st.randoms(use_true_random=False),
    st.integers(-(10**9), 10**9),
    st.integers(-20, 20),
)
def test_order_zero_point_and_unit_change_nothing(data, random, constant, power):
    shuffled = {
        level: random.sample(data[level], len(data[level]))
        for level in random.sample(sorted(data), len(data))
    }
    before = analysed_tenths(data)
    after = analysed_tenths(shuffled, plus=constant, exponent=power - 1)
    for alternative in ALTERNATIVES:
        single = [compare_dunnett(analysis, "L0", alternative, 0.05) for analysis in (before, after)]
        stepped = [compare_dunnett_step_down(analysis, "L0", alternative) for analysis in (before, after)]
        for rows, others in (single, stepped):
            expected = {row.label: in_another_unit(row, 0) for row in rows}
            assert {row.label: in_another_unit(row, power) for row in others} == expected


def test_a_tail_too_small_for_a_double_keeps_its_logarithm():
    still = {f"x{at}": ["0.1", "0.1", "0.1", "0.100001"] for at in range(25)}
    analysis = analysed({"ref": ["900000.1", "900000.1", "900000.1", "900000.100001"], **still})
    for row in (
        *compare_dunnett(analysis, "ref", LESS, 0.05),
        *compare_dunnett_step_down(analysis, "ref", LESS),
    ):
        assert row.adjusted.p == 0.0
        assert -2000 < row.adjusted.log10_p < -700
        assert row.tail.log10_p <= row.adjusted.log10_p + 1e-9


@pytest.mark.parametrize(
    "procedure",
    [
        lambda analysis: compare_dunnett(analysis, "A", TWO_SIDED, 0.05),
        lambda analysis: compare_dunnett_step_down(analysis, "A", TWO_SIDED),
    ],
)
def test_what_cannot_be_compared_is_told(procedure):
    with pytest.raises(NotComputableError, match="no error to compare with"):
        procedure(analysed({"A": ["1", "1"], "B": ["2", "2"], "C": ["3", "3"]}))
    many = {"A": ["1", "2"]} | {f"L{at}": [f"{at}", f"{at}.5"] for at in range(200)}
    with pytest.raises(
        NotComputableError, match="up to 199 levels are compared with a reference; here are 200"
    ):
        procedure(analysed(many))
    with pytest.raises(KeyError):
        procedure(analysed({"X": ["1", "2"], "B": ["2", "3"], "C": ["3", "4"]}))
