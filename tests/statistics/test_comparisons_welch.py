"""Tests of equal means, and intervals for means, that do not pool the variances."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats
from statsmodels.stats.oneway import anova_oneway

from assayfolio.exact import Decimal10, ExactSums, to_double
from assayfolio.statistics.oneway import NotComputableError, one_way
from assayfolio.statistics.welch import brown_forsythe_means, separate_mean_interval, welch_test
from support.drawn import analysed_tenths, levels_that_vary
from support.reference import analysed

LOTS = {
    "lot-1": ["10.1", "10.3", "10.0", "10.2"],
    "lot-2": ["10.9", "11.9", "11.0"],
    "lot-3": ["10.2", "10.4", "10.1", "10.6", "10.3"],
    "lot-4": ["9.2", "9.9"],
}


def test_against_statsmodels_and_scipy():
    analysis = analysed(LOTS)
    values = [np.array([float(text) for text in texts]) for texts in LOTS.values()]
    welch, other = welch_test(analysis, 0.05), stats.f_oneway(*values, equal_var=False)
    assert to_double(welch.f) == pytest.approx(other.statistic, rel=1e-10)
    assert welch.tail.p == pytest.approx(other.pvalue, rel=1e-10)
    means, other = brown_forsythe_means(analysis), anova_oneway(values, use_var="bf")
    assert to_double(means.f) == pytest.approx(other.statistic, rel=1e-10)
    assert to_double(means.df1_mehrotra) == pytest.approx(other.df_num, rel=1e-10)
    assert to_double(means.df2) == pytest.approx(other.df_denom, rel=1e-10)
    assert means.tail_mehrotra.p == pytest.approx(other.pvalue, rel=1e-10)
    assert means.tail.p == pytest.approx(other.pvalue2, rel=1e-10)


@given(levels_that_vary())
def test_p_and_critical_value_agree(data):
    for alpha in (0.05, 0.2):
        test = welch_test(analysed_tenths(data), alpha)
        if abs(test.tail.p - alpha) > 1e-9 * alpha:
            assert (to_double(test.f) >= test.f_critical) == (test.tail.p <= alpha)


@given(levels_that_vary(most=2))
def test_for_two_levels_both_tests_are_one(data):
    analysis = analysed_tenths(data)
    welch, means = welch_test(analysis, 0.05), brown_forsythe_means(analysis)
    assert (welch.f, welch.df1, welch.df2) == (means.f, means.df1, means.df2)
    assert means.df1_mehrotra == 1
    assert welch.tail == means.tail == means.tail_mehrotra


@given(levels_that_vary())
def test_degrees_of_freedom_lie_in_their_limits(data):
    analysis = analysed_tenths(data)
    means = brown_forsythe_means(analysis)
    assert 1 <= means.df1_mehrotra <= means.df1 == analysis.k - 1
    assert min(level.n - 1 for level in analysis.levels) <= means.df2 <= analysis.df_within
    assert welch_test(analysis, 0.05).df2 >= 1


@given(
    levels_that_vary(),
    st.randoms(use_true_random=False),
    st.integers(-(10**9), 10**9),
    st.integers(-20, 20),
)
def test_order_zero_point_and_unit_change_nothing(data, random, constant, power):
    shuffled = {
        level: random.sample(data[level], len(data[level]))
        for level in random.sample(sorted(data), len(data))
    }
    before, after = analysed_tenths(data), analysed_tenths(shuffled, plus=constant, exponent=power - 1)
    assert welch_test(after, 0.05) == welch_test(before, 0.05)
    assert brown_forsythe_means(after) == brown_forsythe_means(before)


def test_equal_means_give_zero_and_p_one():
    analysis = analysed({"A": ["1", "3"], "B": ["0", "4"], "C": ["2", "2.5", "1.5"]})
    welch, means = welch_test(analysis, 0.05), brown_forsythe_means(analysis)
    assert (welch.f, welch.tail.p) == (0, 1.0)
    assert (means.f, means.tail.p, means.tail_mehrotra.p) == (0, 1.0, 1.0)


def test_levels_of_one_value_are_named():
    analysis = analysed({"A": ["1", "2"], "B": ["3"], "C": ["4"]})
    for test in (lambda: welch_test(analysis, 0.05), lambda: brown_forsythe_means(analysis)):
        with pytest.raises(
            NotComputableError, match="B has one value, so its variance cannot be estimated; C has"
        ):
            test()


def test_the_error_and_degrees_of_freedom_of_f_star_are_exact():
    analysis = analysed({"A": ["1", "2"], "B": ["3", "4"], "C": ["4", "6"]})
    # (1 - 1/3) (1/2 + 1/2 + 2) = 2, with degrees of freedom 2^2 / (1/9 + 1/9 + 16/9) = 2.
    means = brown_forsythe_means(analysis)
    assert means.f == analysis.ss_between / 2
    assert means.df2 == 2


def test_a_level_that_does_not_vary_is_not_taken_for_exactly_known():
    analysis = analysed({"A": ["1", "2"], "B": ["3", "3"], "C": ["4", "6"]})
    for test in (lambda: welch_test(analysis, 0.05), lambda: brown_forsythe_means(analysis)):
        with pytest.raises(NotComputableError, match="B do not vary at the recorded resolution"):
            test()


def test_values_too_far_apart_are_told():
    far = 10**400
    data = {"A": [0, 1], "B": [far, far + 1], "C": [-far, 2 - far]}
    groups = [(level, ExactSums.of(Decimal10(one, 0) for one in units)) for level, units in data.items()]
    analysis = one_way(groups)
    with pytest.raises(NotComputableError, match="more than 150 powers of ten"):
        brown_forsythe_means(analysis)


def test_the_interval_of_a_mean_uses_its_own_spread():
    a, b, c = analysed({"A": ["1", "3"], "B": ["5"], "C": ["4", "4", "4"]}).levels
    lower, upper = separate_mean_interval(a, 0.05)
    assert (lower + upper) / 2 == pytest.approx(2, rel=1e-12)
    assert (upper - lower) / 2 == pytest.approx(stats.t(1).isf(0.025), rel=1e-11)
    assert separate_mean_interval(b, 0.05) is None
    assert separate_mean_interval(c, 0.05) is None
