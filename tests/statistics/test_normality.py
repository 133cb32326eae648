"""Residuals, and the tests of their normality."""

from fractions import Fraction

import mpmath as mp
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.stats import norm
from statsmodels.stats.diagnostic import normal_ad

from assayfolio.exact import Decimal10
from assayfolio.statistics.normality import anderson_darling, residuals, shapiro_wilk
from assayfolio.statistics.oneway import NotComputableError
from support.reference import decimals

values = st.builds(Decimal10, st.integers(-(10**5), 10**5), st.integers(-3, 1))
groups = st.lists(st.lists(values, min_size=1, max_size=8), min_size=2, max_size=5)


def test_residuals_are_differences_from_the_exact_mean_rounded_once():
    data = {"A": ["1000000000000.1", "1000000000000.2"], "B": ["0.1", "0.2", "0.4"]}
    expected = [-0.05, 0.05, *(float(Fraction(x) - Fraction(7, 30)) for x in ("1/10", "2/10", "4/10"))]
    assert list(residuals(decimals(data))) == expected


@given(groups)
def test_residuals_are_the_nearest_doubles(listed):
    named = [(f"L{at}", one) for at, one in enumerate(listed)]
    expected = []
    for one in listed:
        mean = sum((value.fraction for value in one), Fraction(0)) / len(one)
        expected.extend(float(value.fraction - mean) for value in one)
    assert list(residuals(named)) == expected


SAMPLE = (0.31, -0.12, 0.05, 0.44, -0.6, 0.02, -0.09, 0.17, -0.18)


@pytest.mark.parametrize("power", [-120, -80, 0, 80])
def test_normality_does_not_depend_on_the_unit(power):
    plain = shapiro_wilk(SAMPLE)
    scaled = shapiro_wilk([value * 10.0**power for value in SAMPLE])
    assert scaled.w == pytest.approx(plain.w, rel=1e-12)
    assert scaled.p == pytest.approx(plain.p, rel=1e-11)


def test_normality_does_not_depend_on_order():
    assert shapiro_wilk(sorted(SAMPLE)) == shapiro_wilk(SAMPLE)


@pytest.mark.parametrize("n", [0, 1, 2, 5001])
def test_normality_is_defined_for_3_to_5000_values(n):
    with pytest.raises(NotComputableError, match="3 to 5,000 values"):
        shapiro_wilk([float(at % 17) for at in range(n)])


@pytest.mark.parametrize("n", [3, 5000])
def test_normality_at_the_limits_of_its_definition(n):
    check = shapiro_wilk([float(at * at % 101) for at in range(n)])
    assert 0 < check.w <= 1
    assert 0 <= check.p <= 1


def test_equal_residuals_have_no_check_of_normality():
    with pytest.raises(NotComputableError, match="all residuals are equal"):
        shapiro_wilk([0.0, 0.0, 0.0, 0.0])


@pytest.mark.parametrize("power", [-120, -80, 0, 80])
def test_anderson_darling_does_not_depend_on_the_unit(power):
    plain = anderson_darling(SAMPLE)
    scaled = anderson_darling([value * 10.0**power for value in SAMPLE])
    assert scaled.a2 == pytest.approx(plain.a2, rel=1e-12)
    assert scaled.p == pytest.approx(plain.p, rel=1e-11)


def test_anderson_darling_does_not_depend_on_order():
    assert anderson_darling(sorted(SAMPLE)) == anderson_darling(SAMPLE)


@pytest.mark.parametrize("n", [8, 30, 500, 5000])
def test_anderson_darling_agrees_with_statsmodels(n):
    drawn = np.random.default_rng(n).normal(size=n)
    found = anderson_darling(drawn.tolist())
    a2, p = normal_ad(drawn)
    assert found.a2 == pytest.approx(a2, rel=1e-10)
    assert found.p == pytest.approx(p, rel=1e-9)


def test_anderson_darling_keeps_far_tails():
    # One value among ninety-nine equal ones is 9.9 standard deviations away: the tail there is 2e-23.
    sample = [0.0] * 99 + [1.0]
    with mp.workdps(50):
        sd = mp.sqrt(mp.mpf(99) / 100 / 99)
        z = [-mp.mpf(1) / 100 / sd] * 99 + [(1 - mp.mpf(1) / 100) / sd]
        total = mp.fsum(
            (2 * i - 1) * (mp.log(mp.ncdf(z[i - 1])) + mp.log(mp.ncdf(-z[100 - i]))) for i in range(1, 101)
        )
        expected = float(-100 - total / 100)
    assert anderson_darling(sample).a2 == pytest.approx(expected, rel=1e-13)


@pytest.mark.parametrize(("n", "low", "high"), [(12, 0.0, 0.2), (6, 0.2, 0.34)])
def test_samples_more_regular_than_chance_have_a_large_p(n, low, high):
    quantiles = norm.ppf((np.arange(n) + 0.5) / n)
    sample = quantiles if low == 0 else np.sign(quantiles) * np.abs(quantiles) ** 0.5
    found = anderson_darling(sample.tolist())
    assert low < found.modified < high
    assert found.p == pytest.approx(normal_ad(sample)[1], rel=1e-9)
    assert found.p > 0.45


def test_p_of_anderson_darling_never_rises_with_the_departure():
    samples = [[0.0] * n + [1.0] for n in (4, 8, 16, 40, 200, 2000)]
    found = [anderson_darling(sample) for sample in samples]
    assert sorted(found, key=lambda one: one.modified) == found
    assert sorted((one.p for one in found), reverse=True) == [one.p for one in found]
    assert found[-1].modified > 100
    assert found[-1].p == pytest.approx(3.7e-24, rel=0.02)


@pytest.mark.parametrize("sample", [[], [1.0], [1.0, 2.0]])
def test_anderson_darling_needs_three_values(sample):
    with pytest.raises(NotComputableError, match="needs 3 values"):
        anderson_darling(sample)


def test_equal_residuals_have_no_anderson_darling_test():
    with pytest.raises(NotComputableError, match="all residuals are equal"):
        anderson_darling([0.0, 0.0, 0.0, 0.0])
