"""Power of the F test and of single comparisons: what holds for every plan, and what is refused."""

import math
from itertools import combinations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.statistics.comparisons import GREATER, LESS, TWO_SIDED
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.statistics.power import (
    contrast_power,
    f_noncentrality,
    f_power,
    f_power_of_means,
    least_favourable_pair,
    pair_power,
)
from assayfolio.statistics.tails import t_isf

sizes = st.lists(st.integers(1, 30), min_size=2, max_size=7).filter(lambda n: sum(n) > len(n))


def pattern(k: int, low: int, high: int, difference: float) -> list[float]:
    return [-difference / 2 if at == low else difference / 2 if at == high else 0.0 for at in range(k)]


@given(sizes, st.floats(0.1, 4))
def test_the_extremes_are_the_pair_with_the_least_power(n, difference):
    stated = f_power(n, difference, 1.0, 0.05)
    every = [
        f_power_of_means(pattern(len(n), a, b, difference), n, 1.0, 0.05)
        for a, b in combinations(range(len(n)), 2)
    ]
    assert stated == pytest.approx(min(every), rel=1e-11)
    a, b = least_favourable_pair(n)
    means = pattern(len(n), a, b, difference)
    assert f_power_of_means(means, n, 1.0, 0.05) == pytest.approx(stated, rel=1e-11)


def test_the_extremes_may_be_a_large_and_a_small_level():
    # With three levels of which one is vast, what counts is how far the other two are from it.
    assert least_favourable_pair((5, 5, 5)) == (0, 1)
    assert least_favourable_pair((9, 3, 4)) == (1, 2)
    assert least_favourable_pair((100, 2, 3)) == (1, 2)


def test_noncentrality_of_equal_n_by_hand():
    assert f_noncentrality((10, 10.5, 11), (5, 5, 5), 0.5) == pytest.approx(5 * 0.5 / 0.25)
    assert f_noncentrality((1e9, 1e9 + 1), (4, 4), 1.0) == 2.0


@given(sizes, st.floats(0.05, 5), st.floats(0.1, 10))
def test_only_the_ratio_of_difference_to_sigma_counts(n, difference, sigma):
    scaled = f_power(n, difference * sigma, sigma, 0.05)
    assert scaled == pytest.approx(f_power(n, difference, 1.0, 0.05), rel=1e-10)


@given(st.integers(2, 40), st.integers(2, 40), st.floats(0.05, 3), st.sampled_from([0.1, 0.05, 0.001]))
def test_for_two_levels_the_f_test_is_the_two_sided_t_test(n_a, n_b, difference, alpha):
    by_t = contrast_power((1, -1), (n_a, n_b), difference, 1.0, alpha, TWO_SIDED)
    assert f_power((n_a, n_b), difference, 1.0, alpha) == pytest.approx(by_t, rel=1e-11)


def test_power_rises_from_alpha_to_one_with_the_difference():
    powers = [f_power((6,) * 4, difference, 1.0, 0.05) for difference in np.geomspace(1e-6, 20, 30)]
    assert powers[0] == pytest.approx(0.05, rel=1e-9)
    assert powers == sorted(powers)
    assert powers[-1] == pytest.approx(1, abs=1e-12)


def test_power_rises_with_the_number_of_values_and_with_alpha():
    by_n = [f_power((n,) * 4, 1.0, 1.0, 0.05) for n in range(2, 30)]
    by_alpha = [f_power((6,) * 4, 1.0, 1.0, alpha) for alpha in (0.001, 0.01, 0.05, 0.2)]
    assert by_n == sorted(by_n)
    assert by_alpha == sorted(by_alpha)


@given(st.floats(-4, 4), st.sampled_from([0.05, 0.01]))
def test_the_direction_of_a_contrast(value, alpha):
    plan = ((1, -2, 1), (4, 5, 6))
    greater = contrast_power(*plan, value, 1.0, alpha, GREATER)
    less = contrast_power(*plan, value, 1.0, alpha, LESS)
    assert less == contrast_power(*plan, -value, 1.0, alpha, GREATER)
    assert (greater > alpha) == (value > 0) or abs(value) < 1e-9
    both = contrast_power(*plan, value, 1.0, alpha, TWO_SIDED)
    halves = [contrast_power(*plan, value, 1.0, alpha / 2, alternative) for alternative in (GREATER, LESS)]
    assert both == pytest.approx(sum(halves), rel=1e-12)


def test_weights_may_be_multiplied_with_the_value():
    once = contrast_power((1, -0.5, -0.5), (4, 5, 6), 0.7, 1.0, 0.05, TWO_SIDED)
    twice = contrast_power((2, -1, -1), (4, 5, 6), 1.4, 1.0, 0.05, TWO_SIDED)
    assert once == pytest.approx(twice, rel=1e-13)


def test_a_pair_is_the_contrast_of_its_levels():
    n, df = (4, 7, 9), 17
    critical = float(t_isf(0.025, df))
    contrast = contrast_power((1, 0, -1), n, 0.8, 1.0, 0.05, TWO_SIDED)
    assert pair_power(4, 9, df, 0.8, 1.0, critical, TWO_SIDED) == pytest.approx(contrast, rel=1e-13)


def test_a_pair_is_looked_for_in_its_true_direction():
    critical = float(t_isf(0.05, 20))
    assert pair_power(6, 6, 20, 1.0, 1.0, critical, GREATER) == pair_power(6, 6, 20, 1.0, 1.0, critical, LESS)


def test_simulated_f_tests_agree():
    generator = np.random.default_rng(2024)
    n, difference, sigma, runs = (3, 5, 4, 8), 1.5, 0.8, 40_000
    a, b = least_favourable_pair(n)
    means = pattern(4, a, b, difference)
    df = sum(n) - 4
    level_means = generator.normal(means, sigma / np.sqrt(n), (runs, 4))
    within = sigma**2 * generator.chisquare(df, runs)
    centre = level_means @ np.array(n) / sum(n)
    between = ((level_means - centre[:, None]) ** 2) @ np.array(n)
    f = (between / 3) / (within / df)
    found = np.mean(f > 3.238871517453586)  # F(3, 16) at 5 %
    power = f_power(n, difference, sigma, 0.05)
    assert abs(found - power) < 5 * math.sqrt(power * (1 - power) / runs)
    assert 0.2 < power < 0.8


def test_no_error_term_is_refused():
    with pytest.raises(NotComputableError, match="replicates"):
        f_power((1, 1, 1), 1.0, 1.0, 0.05)


@pytest.mark.parametrize(
    ("call", "words"),
    [
        (lambda: f_power((5, 5), 0.0, 1.0, 0.05), "difference"),
        (lambda: f_power((5, 5), -1.0, 1.0, 0.05), "difference"),
        (lambda: f_power((5, 5), 1.0, 0.0, 0.05), "sigma"),
        (lambda: f_power((5, 5), 1.0, math.nan, 0.05), "sigma"),
        (lambda: f_power((5, 5), math.inf, 1.0, 0.05), "difference"),
        (lambda: f_power((5,), 1.0, 1.0, 0.05), "two levels"),
        (lambda: f_power((5, 0), 1.0, 1.0, 0.05), "at least one value"),
        (lambda: f_power((5, 5), 1.0, 1.0, 1.5), "probability"),
        (lambda: f_power_of_means((1, 2), (5, 5), -1.0, 0.05), "sigma"),
        (lambda: contrast_power((1, -2), (5, 5), 1.0, 1.0, 0.05, TWO_SIDED), "sum to zero"),
        (lambda: contrast_power((0, 0), (5, 5), 1.0, 1.0, 0.05, TWO_SIDED), "sum to zero"),
        (lambda: contrast_power((1, -1), (5, 5), 1.0, 1.0, 0.05, "both"), "alternative"),
        (lambda: pair_power(5, 5, 8, 0.0, 1.0, 2.0, TWO_SIDED), "difference"),
    ],
)
def test_plans_that_make_no_sense_are_refused(call, words):
    with pytest.raises(ValueError, match=words):
        call()
