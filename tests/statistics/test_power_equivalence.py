"""Power of equivalence and of non-inferiority."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.statistics.comparisons import GREATER, LESS, TWO_SIDED
from assayfolio.statistics.noncentral import noncentral_t_cdf, noncentral_t_sf
from assayfolio.statistics.power_equivalence import equivalence_power, non_inferiority_power
from assayfolio.statistics.tails import t_isf

PLAN = {"n_a": 6, "n_b": 9, "df": 21}


@given(st.floats(-2, 2), st.floats(0.1, 2))
def test_mirrored_margins_and_difference_have_the_same_power(difference, margin):
    one = equivalence_power(**PLAN, true_difference=difference, lower=-margin, upper=1, sigma=0.4, alpha=0.05)
    other = equivalence_power(
        **PLAN, true_difference=-difference, lower=-1, upper=margin, sigma=0.4, alpha=0.05
    )
    assert one == pytest.approx(other, rel=1e-9, abs=1e-300)


@given(st.floats(-0.5, 0.5), st.floats(0.2, 2))
def test_it_is_below_the_power_of_either_one_sided_test(difference, margin):
    both = equivalence_power(6, 9, 21, difference, -margin, margin, 0.5, 0.05)
    above = non_inferiority_power(6, 9, 21, difference, -margin, 0.5, 0.05, GREATER)
    below = non_inferiority_power(6, 9, 21, difference, margin, 0.5, 0.05, LESS)
    assert 0 <= both <= min(above, below) + 1e-14
    assert both >= above + below - 1 - 1e-12


def test_where_the_margins_are_wide_two_tails_of_noncentral_t_say_the_same():
    n, df, margin = 10, 18, 3.0
    critical, delta = float(t_isf(0.05, df)), margin / math.sqrt(2 / n)
    two_tails = noncentral_t_sf(critical, df, delta) + noncentral_t_cdf(-critical, df, -delta) - 1
    assert equivalence_power(n, n, df, 0, -margin, margin, 1.0, 0.05) == pytest.approx(two_tails, rel=1e-8)


def test_where_they_are_narrow_two_tails_would_be_negative():
    n, df, margin = 5, 8, 0.5
    critical, delta = float(t_isf(0.05, df)), margin / math.sqrt(2 / n)
    assert noncentral_t_sf(critical, df, delta) + noncentral_t_cdf(-critical, df, -delta) - 1 < -0.5
    assert 0 < equivalence_power(n, n, df, 0, -margin, margin, 1.0, 0.05) < 0.001


def test_power_falls_as_the_true_difference_leaves_the_middle():
    powers = [equivalence_power(8, 8, 14, d, -1, 1, 0.5, 0.05) for d in np.linspace(0, 3, 30)]
    assert powers == sorted(powers, reverse=True)
    assert powers[0] > 0.9
    assert powers[-1] < 1e-6


def test_at_the_margin_it_is_at_most_alpha():
    for n in (2, 5, 20, 100):
        assert equivalence_power(n, n, 2 * n - 2, 1, -1, 1, 0.5, 0.05) <= 0.05
    assert equivalence_power(100, 100, 198, 1, -1, 1, 0.5, 0.05) == pytest.approx(0.05, rel=1e-9)


def test_at_the_bound_non_inferiority_is_shown_with_probability_alpha():
    for alternative in (GREATER, LESS):
        power = non_inferiority_power(7, 5, 30, -0.4, -0.4, 0.8, 0.05, alternative)
        assert power == pytest.approx(0.05, rel=1e-12)
    assert non_inferiority_power(7, 5, 30, 0, -0.8, 0.8, 0.05, GREATER) > 0.3
    assert non_inferiority_power(7, 5, 30, 0, -0.8, 0.8, 0.05, LESS) < 0.05


def test_simulated_experiments_agree():
    generator = np.random.default_rng(11)
    runs, df, sigma = 60_000, 21, 0.5
    se = sigma * math.sqrt(1 / 6 + 1 / 9)
    difference = generator.normal(0.15, se, runs)
    s = np.sqrt(generator.chisquare(df, runs) / df)
    reach = float(t_isf(0.05, df)) * se * s
    found = np.mean((difference - reach > -0.6) & (difference + reach < 0.8))
    power = equivalence_power(6, 9, df, 0.15, -0.6, 0.8, sigma, 0.05)
    assert abs(found - power) < 5 * math.sqrt(power * (1 - power) / runs)
    assert 0.2 < power < 0.9


@pytest.mark.parametrize(
    ("call", "words"),
    [
        (lambda: equivalence_power(5, 5, 8, 0, 1, 1, 1.0, 0.05), "margin"),
        (lambda: equivalence_power(5, 5, 8, 0, -1, 1, 0.0, 0.05), "sigma"),
        (lambda: equivalence_power(5, 5, 8, 0, -1, 1, 1.0, 0.5), "below 1/2"),
        (lambda: non_inferiority_power(5, 5, 8, 0, -1, 1.0, 0.05, TWO_SIDED), "direction"),
        (lambda: non_inferiority_power(5, 5, 8, 0, -1, -1.0, 0.05, GREATER), "sigma"),
    ],
)
def test_plans_that_make_no_sense_are_refused(call, words):
    with pytest.raises(ValueError, match=words):
        call()
