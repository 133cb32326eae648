"""Scheffe's procedure: one interval width for every contrast, tied to the F test."""

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from assayfolio.statistics.comparisons import TWO_SIDED, compare
from assayfolio.statistics.estimates import contrast_estimate, pair_estimates
from assayfolio.statistics.inference import omnibus_test
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.statistics.simultaneous import compare_scheffe, compare_tukey_kramer
from support.drawn import ALPHAS, analysed_tenths, excludes_zero, levels_that_vary, without_direction
from support.reference import analysed

FARTHEST = f"9{'0' * 37}e60"


@given(levels_that_vary(), ALPHAS)
def test_interval_and_verdict_agree(data, alpha):
    analysis = analysed_tenths(data)
    for row in compare_scheffe(analysis, pair_estimates(analysis), alpha):
        assume(abs(row.adjusted.p - alpha) > 1e-9 * alpha)
        assert excludes_zero(row.interval) == (row.adjusted.p <= alpha)


@given(levels_that_vary())
def test_the_contrast_that_follows_the_means_has_the_p_of_the_f_test(data):
    # Its weights are n_i (mean_i - grand mean): no contrast has a larger t, and its t^2 is (k - 1) F.
    analysis = analysed_tenths(data)
    assume(analysis.ss_between)
    weights = {level.level: level.n * (level.mean - analysis.grand_mean) for level in analysis.levels}
    (row,) = compare_scheffe(analysis, [contrast_estimate(analysis, "most", weights)], 0.05)
    assert row.statistic.square == analysis.df_between * analysis.f
    assert row.adjusted.p == pytest.approx(omnibus_test(analysis, 0.05).tail.p, rel=1e-12)


@given(levels_that_vary(fewest=3))
def test_for_pairs_it_is_wider_than_tukey_kramer(data):
    analysis = analysed_tenths(data)
    pairs = pair_estimates(analysis)
    for one, other in zip(
        compare_scheffe(analysis, pairs, 0.05), compare_tukey_kramer(analysis, pairs, 0.05), strict=True
    ):
        assert one.adjusted.p >= other.adjusted.p * (1 - 1e-10)
        assert one.interval[0] < other.interval[0]
        assert one.interval[1] > other.interval[1]


@given(levels_that_vary(most=2), ALPHAS)
def test_for_two_levels_it_is_the_t_test(data, alpha):
    analysis = analysed_tenths(data)
    pairs = pair_estimates(analysis)
    assert compare_scheffe(analysis, pairs, alpha) == compare(analysis, pairs, "none", TWO_SIDED, alpha)


@given(levels_that_vary(fewest=3), st.randoms(use_true_random=False), st.integers(-(10**9), 10**9))
def test_order_and_zero_point_change_nothing(data, random, constant):
    shuffled = {
        level: random.sample(data[level], len(data[level]))
        for level in random.sample(sorted(data), len(data))
    }
    before, after = analysed_tenths(data), analysed_tenths(shuffled, plus=constant)
    rows = without_direction(compare_scheffe(before, pair_estimates(before), 0.05))
    assert without_direction(compare_scheffe(after, pair_estimates(after), 0.05)) == rows


def test_the_number_of_contrasts_does_not_matter():
    analysis = analysed({"A": ["1", "2", "4"], "B": ["2", "3", "3"], "C": ["5", "6", "8"]})
    pairs = pair_estimates(analysis)
    assert compare_scheffe(analysis, pairs[:1], 0.05) == compare_scheffe(analysis, pairs, 0.05)[:1]


def test_what_cannot_be_compared_is_told():
    still = analysed({"A": ["1", "1"], "B": ["2", "2"], "C": ["3", "3"]})
    with pytest.raises(NotComputableError, match="no error to compare with"):
        compare_scheffe(still, pair_estimates(still), 0.05)
    far = analysed({"A": ["0", "1e-60"], "B": [FARTHEST, FARTHEST], "C": ["1", "1"]})
    with pytest.raises(NotComputableError, match="more than 150 powers of ten"):
        compare_scheffe(far, pair_estimates(far), 0.05)
