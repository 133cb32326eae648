"""The smallest number of values, the smallest difference, the share of the reference, the half width."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.statistics.power import f_power
from assayfolio.statistics.power_families import tukey_all_power
from assayfolio.statistics.sample_size import (
    MOST_VALUES,
    control_size,
    detectable_difference,
    half_width,
    smallest_n,
)
from assayfolio.statistics.tails import t_isf


@given(st.integers(1, MOST_VALUES))
def test_the_smallest_n_is_found_wherever_it_is(n):
    found = smallest_n(lambda size: 0.9 if size >= n else 0.1, 0.5)
    assert found == max(n, 2)


def test_more_than_ten_thousand_values_are_no_plan():
    assert smallest_n(lambda size: 0.9 if size > MOST_VALUES else 0.1, 0.5) is None
    assert smallest_n(lambda n: f_power((n,) * 3, 0.01, 1.0, 0.05), 0.9) is None


@given(st.floats(0.3, 2), st.floats(0.2, 0.95), st.integers(2, 8))
def test_one_value_fewer_falls_short(difference, target, k):
    n = smallest_n(lambda n: f_power((n,) * k, difference, 1.0, 0.05), target)
    assert n is not None
    assert f_power((n,) * k, difference, 1.0, 0.05) >= target
    assert n == 2 or f_power((n - 1,) * k, difference, 1.0, 0.05) < target


@given(st.integers(2, 10), st.floats(0.1, 0.99), st.floats(-9, 9).map(lambda x: 10.0**x))
def test_the_detectable_difference_has_the_power_that_was_aimed_at(n, target, sigma):
    difference = detectable_difference(lambda d: f_power((n,) * 4, d, sigma, 0.05), target, sigma)
    assert difference is not None
    assert f_power((n,) * 4, difference, sigma, 0.05) == pytest.approx(target, rel=1e-10)


def test_the_detectable_difference_of_all_pairs():
    difference = detectable_difference(lambda d: tukey_all_power(8, 4, d, 0.3, 0.05), 0.9, 0.3)
    assert difference is not None
    assert tukey_all_power(8, 4, difference, 0.3, 0.05) == pytest.approx(0.9, rel=1e-10)


def test_a_power_that_is_there_without_any_difference_has_no_smallest_one():
    assert detectable_difference(lambda d: f_power((5,) * 3, d, 1.0, 0.05), 0.05, 1.0) is None


def test_a_power_that_is_never_reached_has_no_difference():
    assert detectable_difference(lambda _: 0.3, 0.5, 1.0) is None


@given(st.integers(1, 10_000), st.integers(2, 200))
def test_the_reference_gets_the_root_of_the_number_of_others_as_many_values(n, k):
    size = control_size(n, k)
    assert (size - 1) ** 2 < (k - 1) * n * n <= size**2


def test_the_share_of_the_reference_by_hand():
    assert [control_size(6, k) for k in (2, 3, 4, 5)] == [6, 9, 11, 12]


def test_the_half_width_of_a_difference_at_the_planned_spread():
    critical = float(t_isf(0.025, 14))
    assert half_width(critical, 1 / 8 + 1 / 8, 0.3) == pytest.approx(2.144786687917804 * 0.15, rel=1e-12)
    assert half_width(critical, 0.25, 0.6) == 2 * half_width(critical, 0.25, 0.3)


@pytest.mark.parametrize("target", [0.0, 1.0, math.nan])
def test_a_power_to_aim_at_lies_between_none_and_certainty(target):
    with pytest.raises(ValueError, match="between 0 and 1"):
        smallest_n(lambda _: 0.5, target)
    with pytest.raises(ValueError, match="between 0 and 1"):
        detectable_difference(lambda _: 0.5, target, 1.0)


def test_a_spread_is_positive():
    with pytest.raises(ValueError, match="sigma"):
        half_width(2.0, 0.25, 0.0)
    with pytest.raises(ValueError, match="sigma"):
        detectable_difference(lambda _: 0.5, 0.8, 0.0)
