"""Power of all pairs: identities, order, a plain quadrature of the range, and seeded simulation."""

import math
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.polynomial.legendre import leggauss
from scipy.special import ndtr

from assayfolio.statistics.comparisons import TWO_SIDED
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.statistics.power import contrast_power
from assayfolio.statistics.power_families import (
    all_pairs_power,
    any_pair_power,
    common_size,
    tukey_all_power,
    tukey_any_power,
    tukey_critical,
    tukey_pair_power,
)


def some_pair_of_three(n: int, difference: float, sigma: float, critical: float) -> float:
    """P(range of three means with a true pattern > critical s sqrt(2/n)), by plain nested quadrature.

    With three levels every pair is truly different, so this is the any-pair power: the range is at most r
    where all others lie within r above the least.
    """
    df = 3 * (n - 1)
    apart = difference / sigma * math.sqrt(n)
    means = np.array([-apart / 2, 0.0, apart / 2])
    x, wx = leggauss(400)
    x, wx = 30 * x, 30 * wx
    v, wv = leggauss(300)
    top = df + 14 * math.sqrt(2 * df) + 60
    chi2, w_chi2 = top * (v + 1) / 2, top / 2 * wv
    density = np.exp((df / 2 - 1) * np.log(chi2) - chi2 / 2 - math.lgamma(df / 2) - df / 2 * math.log(2))
    none = 0.0
    for value, weight in zip(chi2, w_chi2 * density, strict=True):
        r = critical * math.sqrt(2) * math.sqrt(value / df)
        within = ndtr(x[:, None] + r - means) - ndtr(x[:, None] - means)
        least = np.exp(-((x[:, None] - means) ** 2) / 2) / math.sqrt(2 * math.pi)
        for j in range(3):
            others = [i for i in range(3) if i != j]
            none += weight * float(np.sum(wx * least[:, j] * within[:, others[0]] * within[:, others[1]]))
    return 1 - none


@pytest.mark.parametrize(("n", "difference"), [(4, 1.5), (8, 0.9), (15, 0.2)])
def test_for_three_levels_any_pair_is_the_range(n, difference):
    critical = tukey_critical(3, 3 * (n - 1), 0.05)
    expected = some_pair_of_three(n, difference, 1.0, critical)
    assert any_pair_power(n, 3, difference, 1.0, critical) == pytest.approx(expected, abs=1e-9)


@pytest.mark.parametrize("n", [2, 5, 30])
@pytest.mark.parametrize("alpha", [0.05, 0.01])
def test_next_to_no_difference_leaves_the_family_its_error_rate(n, alpha):
    assert tukey_any_power(n, 3, 1e-7, 1.0, alpha) == pytest.approx(alpha, rel=1e-9)


@given(st.integers(2, 40), st.floats(0.05, 3), st.sampled_from([0.1, 0.05, 0.001]))
def test_for_two_levels_every_power_is_that_of_the_t_test(n, difference, alpha):
    by_t = contrast_power((1, -1), (n, n), difference, 1.0, alpha, TWO_SIDED)
    assert tukey_pair_power(n, n, 2, 2 * n - 2, difference, 1.0, alpha) == pytest.approx(by_t, rel=1e-10)
    assert tukey_any_power(n, 2, difference, 1.0, alpha) == pytest.approx(by_t, rel=1e-10)
    in_true_direction = tukey_all_power(n, 2, difference, 1.0, alpha)
    assert by_t - alpha / 2 < in_true_direction <= by_t + 1e-14


@given(st.integers(2, 20), st.integers(2, 30), st.floats(0.1, 6))
def test_every_pair_is_harder_than_one_and_one_harder_than_any(n, k, difference):
    critical = tukey_critical(k, k * (n - 1), 0.05)
    one = tukey_pair_power(n, n, k, k * (n - 1), difference, 1.0, 0.05)
    at_least_one = any_pair_power(n, k, difference, 1.0, critical)
    every = all_pairs_power(n, k, difference, 1.0, critical)
    assert 0 <= every <= one + 1e-12
    assert one <= at_least_one + 1e-12
    assert at_least_one <= 1


@pytest.mark.parametrize("power", [tukey_any_power, tukey_all_power])
def test_power_rises_to_one_with_the_difference(power):
    powers = [power(6, 5, difference, 1.0, 0.05) for difference in np.geomspace(0.01, 100, 25)]
    assert all(later >= earlier - 1e-14 for earlier, later in pairwise(powers))
    assert powers[-1] == pytest.approx(1, abs=1e-11)


def test_a_vast_difference_is_shown_for_certain():
    assert tukey_any_power(5, 4, 1e6, 1.0, 0.05) == 1
    assert tukey_all_power(5, 4, 1e6, 1.0, 0.05) == pytest.approx(1, abs=1e-11)


def test_only_the_ratio_of_difference_to_sigma_counts():
    assert tukey_any_power(6, 5, 0.3, 0.2, 0.05) == pytest.approx(
        tukey_any_power(6, 5, 1.5, 1.0, 0.05), rel=1e-12
    )
    assert tukey_all_power(6, 5, 0.6, 0.2, 0.05) == pytest.approx(
        tukey_all_power(6, 5, 3.0, 1.0, 0.05), rel=1e-12
    )


RUNS = 60_000


@pytest.mark.parametrize(
    ("n", "k", "difference"), [(4, 3, 3.0), (8, 4, 1.6), (20, 4, 1.9), (5, 6, 2.4), (2, 8, 6.0), (30, 6, 2.2)]
)
def test_simulated_experiments_agree(n, k, difference):
    generator = np.random.default_rng([n, k])
    df = k * (n - 1)
    critical = tukey_critical(k, df, 0.05)
    true = np.zeros(k)
    true[0], true[-1] = -difference / 2, difference / 2
    means = generator.normal(true, 1 / math.sqrt(n), (RUNS, k))
    needed = critical * np.sqrt(generator.chisquare(df, RUNS) / df) * math.sqrt(2 / n)
    declared, right = np.zeros(RUNS, bool), np.ones(RUNS, bool)
    for low in range(k):
        for high in range(low + 1, k):
            if true[high] > true[low]:
                apart = means[:, high] - means[:, low]
                declared |= np.abs(apart) > needed
                right &= apart > needed
    for found, power in (
        (declared.mean(), any_pair_power(n, k, difference, 1.0, critical)),
        (right.mean(), all_pairs_power(n, k, difference, 1.0, critical)),
    ):
        assert abs(found - power) < 5 * math.sqrt(power * (1 - power) / RUNS) + 1e-4


def test_unequal_numbers_of_values_are_refused_with_what_there_is_instead():
    assert common_size((6, 6, 6)) == 6
    with pytest.raises(NotComputableError, match=r"here are 6, 5, 6\. The power of one pair"):
        common_size((6, 5, 6))


def test_no_error_term_is_refused():
    with pytest.raises(NotComputableError, match="replicates"):
        tukey_any_power(1, 4, 1.0, 1.0, 0.05)


@pytest.mark.parametrize("power", [tukey_any_power, tukey_all_power])
def test_a_difference_and_a_spread_are_positive(power):
    with pytest.raises(ValueError, match="difference"):
        power(5, 4, 0.0, 1.0, 0.05)
    with pytest.raises(ValueError, match="sigma"):
        power(5, 4, 1.0, 0.0, 0.05)
