"""Comparisons with separate variances: each row with its own error and its own degrees of freedom."""

from fractions import Fraction

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy import stats

from assayfolio.exact import to_double
from assayfolio.statistics.adjustment import P_ADJUSTMENTS, Tail
from assayfolio.statistics.comparisons import GREATER, LESS, TWO_SIDED, compare
from assayfolio.statistics.estimates import contrast_estimate, pair_estimates, reference_estimates
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.statistics.separate_variances import compare_games_howell, compare_separate
from assayfolio.statistics.welch import welch_test
from support.drawn import (
    ALPHAS,
    ALTERNATIVES,
    analysed_tenths,
    excludes_zero,
    in_another_unit,
    levels_that_vary,
    without_direction,
)
from support.reference import analysed

ADJUSTMENTS = st.sampled_from(sorted(P_ADJUSTMENTS))
WITH_INTERVALS = st.sampled_from(["none", "bonferroni", "sidak"])
LOTS = {
    "lot-1": ["10.1", "10.3", "10.0", "10.2"],
    "lot-2": ["10.9", "11.9", "11.0"],
    "lot-3": ["10.2", "10.4", "10.1", "10.6", "10.3"],
}


def test_error_and_degrees_of_freedom_are_exact():
    analysis = analysed({"A": ["1", "3"], "B": ["2", "4", "6"], "C": ["0", "4"]})
    a_b, a_c, _ = compare_separate(pair_estimates(analysis), "none", TWO_SIDED, 0.05)
    # Variances 2 and 4: 2/2 + 4/3 = 7/3, and (7/3)^2 / (1 + (4/3)^2 / 2) = 49/17.
    assert a_b.se.square == Fraction(7, 3)
    assert a_b.df == 49 / 17
    assert a_b.statistic.square == Fraction(4) / Fraction(7, 3)
    # Variances 2 and 8: 1 + 4 = 5, and 25 / (1 + 16).
    assert (a_c.se.square, a_c.df) == (5, 25 / 17)


def test_weights_enter_with_their_squares():
    analysis = analysed({"A": ["1", "3"], "B": ["2", "4", "6"], "C": ["0", "4"]})
    weights = {"A": Fraction(1, 2), "B": Fraction(1, 2), "C": Fraction(-1)}
    (row,) = compare_separate([contrast_estimate(analysis, "c", weights)], "none", TWO_SIDED, 0.05)
    parts = [Fraction(1, 4), Fraction(1, 3), Fraction(4)]
    assert row.se.square == sum(parts)
    assert row.df == to_double(sum(parts) ** 2 / (parts[0] ** 2 + parts[1] ** 2 / 2 + parts[2] ** 2))


@pytest.mark.parametrize("alternative", ALTERNATIVES)
def test_a_pair_is_welchs_t_test(alternative):
    analysis = analysed(LOTS)
    values = [[float(text) for text in texts] for texts in LOTS.values()]
    rows = compare_separate(pair_estimates(analysis), "none", alternative, 0.05)
    for row, (a, b) in zip(rows, [(0, 1), (0, 2), (1, 2)], strict=True):
        other = stats.ttest_ind(values[a], values[b], equal_var=False, alternative=alternative)
        assert to_double(row.statistic) == pytest.approx(other.statistic, rel=1e-10)
        assert row.df == pytest.approx(other.df, rel=1e-10)
        assert row.tail.p == pytest.approx(other.pvalue, rel=1e-10)
        for end, expected in zip(row.interval, other.confidence_interval(0.95), strict=True):
            assert end == (pytest.approx(expected, rel=1e-10) if np.isfinite(expected) else None)


@given(levels_that_vary(), ADJUSTMENTS, st.sampled_from(ALTERNATIVES))
def test_adjusting_is_that_of_the_raw_p(data, adjust, alternative):
    pairs = pair_estimates(analysed_tenths(data))
    rows = compare_separate(pairs, adjust, alternative, 0.05)
    assert tuple(row.adjusted for row in rows) == P_ADJUSTMENTS[adjust]([row.tail for row in rows])
    for row in rows:
        assert row.adjusted.p >= row.tail.p * (1 - 1e-15)
        assert (row.interval is None) == (adjust in ("holm", "hochberg"))


@given(levels_that_vary())
def test_degrees_of_freedom_lie_between_the_smallest_and_the_sum(data):
    analysis = analysed_tenths(data)
    for estimate, row in zip(
        pair_estimates(analysis),
        compare_separate(pair_estimates(analysis), "none", TWO_SIDED, 0.05),
        strict=True,
    ):
        own = [level.n - 1 for level, _ in estimate.weights]
        assert min(own) <= row.df <= sum(own)


@given(levels_that_vary(), WITH_INTERVALS, st.sampled_from(ALTERNATIVES), ALPHAS)
def test_interval_and_verdict_agree(data, adjust, alternative, alpha):
    for row in compare_separate(pair_estimates(analysed_tenths(data)), adjust, alternative, alpha):
        assume(abs(row.adjusted.p - alpha) > 1e-9 * alpha)
        assert excludes_zero(row.interval) == (row.adjusted.p <= alpha)


@settings(max_examples=30)
@given(levels_that_vary(fewest=3), ALPHAS)
def test_interval_and_verdict_of_games_and_howell_agree(data, alpha):
    analysis = analysed_tenths(data)
    for row in compare_games_howell(analysis, pair_estimates(analysis), alpha):
        assume(abs(row.adjusted.p - alpha) > 1e-9 * alpha)
        assert excludes_zero(row.interval) == (row.adjusted.p <= alpha)
        assert row.adjusted.p >= row.tail.p * (1 - 1e-10)


@given(levels_that_vary(most=2), ALPHAS)
def test_for_two_levels_everything_is_welchs_t_test(data, alpha):
    analysis = analysed_tenths(data)
    pairs = pair_estimates(analysis)
    (row,) = compare_separate(pairs, "none", TWO_SIDED, alpha)
    assert compare_games_howell(analysis, pairs, alpha) == (row,)
    test = welch_test(analysis, alpha)
    assert row.statistic.square == test.f
    assert row.df == to_double(test.df2)
    assert row.tail.p == pytest.approx(test.tail.p, rel=1e-12)


@given(levels_that_vary(most=2))
def test_for_equal_numbers_and_two_levels_the_statistic_is_that_with_the_pooled_error(data):
    n = min(len(listed) for listed in data.values())
    analysis = analysed_tenths({level: listed[:n] for level, listed in data.items()})
    assume(all(level.ss for level in analysis.levels))
    pairs = pair_estimates(analysis)
    (separate,) = compare_separate(pairs, "none", TWO_SIDED, 0.05)
    (pooled,) = compare(analysis, pairs, "none", TWO_SIDED, 0.05)
    assert (separate.statistic, separate.se) == (pooled.statistic, pooled.se)
    assert separate.df <= pooled.df


@settings(max_examples=30)
@given(
    levels_that_vary(),
    st.randoms(use_true_random=False),
    st.integers(-(10**9), 10**9),
    st.integers(-20, 20),
)
def test_order_zero_point_and_unit_change_nothing(data, random, constant, power):
    rows_shuffled = {level: random.sample(listed, len(listed)) for level, listed in data.items()}
    before = analysed_tenths(data)
    after = analysed_tenths(rows_shuffled, plus=constant, exponent=power - 1)
    for procedure in (
        lambda analysis: compare_separate(pair_estimates(analysis), "hochberg", TWO_SIDED, 0.05),
        lambda analysis: compare_separate(reference_estimates(analysis, "L1"), "sidak", LESS, 0.05),
        lambda analysis: compare_games_howell(analysis, pair_estimates(analysis), 0.05),
    ):
        assert [in_another_unit(row, power) for row in procedure(after)] == [
            in_another_unit(row, 0) for row in procedure(before)
        ]
    levels_shuffled = analysed_tenths(
        {level: data[level] for level in random.sample(sorted(data), len(data))}
    )
    for procedure in (
        lambda analysis: compare_separate(pair_estimates(analysis), "holm", TWO_SIDED, 0.05),
        lambda analysis: compare_games_howell(analysis, pair_estimates(analysis), 0.05),
    ):
        assert without_direction(procedure(levels_shuffled)) == without_direction(procedure(before))


def test_greater_asks_for_a_positive_and_less_for_a_negative_difference():
    higher = reference_estimates(analysed(LOTS), "lot-1")[:1]
    (greater,) = compare_separate(higher, "none", GREATER, 0.05)
    (less,) = compare_separate(higher, "none", LESS, 0.05)
    assert greater.tail.p < 0.1 < 0.9 < less.tail.p
    assert greater.interval[1] is None
    assert less.interval[0] is None


def test_a_level_of_one_value_is_named():
    analysis = analysed({"A": ["1", "2"], "B": ["3"], "C": ["4", "6"]})
    with pytest.raises(NotComputableError, match="B has one value, so its variance cannot be estimated"):
        compare_separate(pair_estimates(analysis), "none", TWO_SIDED, 0.05)
    with pytest.raises(NotComputableError, match="B has one value, so its variance cannot be estimated"):
        compare_games_howell(analysis, pair_estimates(analysis), 0.05)
    without_b = contrast_estimate(analysis, "c", {"A": Fraction(1), "B": Fraction(0), "C": Fraction(-1)})
    assert compare_separate([without_b], "none", TWO_SIDED, 0.05)[0].estimate == Fraction(-7, 2)


def test_a_level_that_does_not_vary_is_not_taken_for_exactly_known():
    analysis = analysed({"A": ["1", "2"], "B": ["3", "3"], "C": ["4", "6"]})
    reason = "the values of B do not vary at the recorded resolution, so its variance cannot be estimated"
    with pytest.raises(NotComputableError, match=reason):
        compare_separate(pair_estimates(analysis), "none", TWO_SIDED, 0.05)
    with pytest.raises(NotComputableError, match=reason):
        compare_games_howell(analysis, pair_estimates(analysis), 0.05)
    assert len(compare_separate(pair_estimates(analysis)[1:2], "none", TWO_SIDED, 0.05)) == 1


@given(levels_that_vary(), ADJUSTMENTS, st.integers(1, 4))
def test_rows_that_cannot_be_given_count_as_p_one(data, adjust, missing):
    pairs = pair_estimates(analysed_tenths(data))
    rows = compare_separate(pairs, adjust, TWO_SIDED, 0.05, missing)
    whole = P_ADJUSTMENTS[adjust]([*(row.tail for row in rows), *[Tail(1.0, 0.0)] * missing])
    assert tuple(row.adjusted for row in rows) == whole[: len(rows)]
    for row in rows:
        assert (row.critical is None) == (row.interval is None)
        if adjust == "bonferroni":
            assert row.critical == pytest.approx(
                stats.t.isf(0.025 / (len(pairs) + missing), row.df), rel=1e-9
            )


def test_games_and_howell_for_more_than_two_hundred_levels_is_told_not_to_be_available():
    analysis = analysed({f"L{at:03d}": [f"{at % 7}", f"{at % 5}.5"] for at in range(201)})
    with pytest.raises(NotComputableError, match="up to 200 levels; here are 201"):
        compare_games_howell(analysis, pair_estimates(analysis)[:1], 0.05)
