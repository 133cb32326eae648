"""The interval of the standard deviation between levels."""

from math import sqrt

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from assayfolio.exact import Decimal10, ExactSums, to_double
from assayfolio.statistics.between_interval import between_sd_interval
from assayfolio.statistics.oneway import one_way
from support.measured import analysed as analysed_decimals
from support.measured import scaled, varying
from support.reference import analysed

DAYS = {
    "day 1": ["10.12", "10.31", "10.24"],
    "day 2": ["10.41", "10.52", "10.33"],
    "day 3": ["10.01", "10.22", "10.11"],
    "day 4": ["10.64", "10.48", "10.55"],
}


def test_for_equal_n_it_is_formed_from_the_mean_squares():
    analysis = analysed(DAYS)
    a, w = to_double(analysis.ms_between), to_double(analysis.ms_within)
    lower = 3 * (a - stats.f.isf(0.025, 3, 8) * w) / (3 * stats.chi2.isf(0.025, 3))
    upper = 3 * (a - stats.f.isf(0.975, 3, 8) * w) / (3 * stats.chi2.isf(0.975, 3))
    assert between_sd_interval(analysis, 0.05) == pytest.approx((sqrt(lower), sqrt(upper)), rel=1e-9)


def test_its_lower_end_leaves_zero_where_the_f_test_shows_a_difference():
    analysis = analysed(DAYS)
    p = stats.f.sf(to_double(analysis.f), 3, 8)
    assert between_sd_interval(analysis, 1.999 * p)[0] == 0
    assert between_sd_interval(analysis, 2.001 * p)[0] > 0


def test_levels_closer_than_chance_would_have_them_give_zero_to_zero():
    data = {"a": ["0", "10", "20"], "b": ["0.1", "10", "20"], "c": ["0", "10.1", "20"]}
    assert between_sd_interval(analysed(data), 0.05) == (0, 0)


def test_equal_values_have_no_interval():
    assert between_sd_interval(analysed({"a": ["3", "3"], "b": ["3", "3", "3"]}), 0.05) is None


def test_without_variation_within_levels_it_is_that_of_the_means_alone():
    low, high = between_sd_interval(analysed({"a": ["1", "1"], "b": ["2", "2"], "c": ["4", "4"]}), 0.05)
    ss = 2 * np.var([1, 2, 4], ddof=1)
    expected = (sqrt(ss / stats.chi2.isf(0.025, 2)), sqrt(ss / stats.chi2.isf(0.975, 2)))
    assert (low, high) == pytest.approx(expected, rel=1e-9)


@given(varying(levels=4), st.integers(-20, 20))
def test_another_unit_scales_it(data, power):
    before = between_sd_interval(analysed_decimals(data), 0.05)
    after = between_sd_interval(analysed_decimals(scaled(data, power)), 0.05)
    assert after == pytest.approx([end * 10.0**power for end in before], rel=1e-9)


@pytest.mark.parametrize("numbers", [[3] * 6, [2] * 10, [2, 2, 2, 12, 12], [2, 3, 4, 5, 6]])
@pytest.mark.parametrize("spread", [0.3, 1.0, 3.0])
def test_it_covers_the_true_value_as_often_as_stated(numbers, spread):
    generator = np.random.default_rng(6)
    covered = 0
    for _ in range(500):
        groups = []
        for at, n in enumerate(numbers):
            values = generator.normal(generator.normal(0, spread), 1, size=n)
            groups.append((str(at), ExactSums.of(Decimal10(round(1e6 * float(v)), -6) for v in values)))
        low, high = between_sd_interval(one_way(groups), 0.05)
        covered += low <= spread <= high
    assert covered / 500 > 0.933 - 3 * sqrt(0.933 * 0.067 / 500)
