"""Power against statsmodels' FTestAnovaPower, TTestIndPower and TTestPower, and scipy's noncentral F.

statsmodels builds on scipy's noncentral distributions, which hold ten digits of ordinary powers.
"""

from math import sqrt

import numpy as np
import pytest
from scipy import stats
from statsmodels.stats.power import FTestAnovaPower, TTestIndPower, TTestPower

from assayfolio.statistics.comparisons import GREATER, LESS, TWO_SIDED
from assayfolio.statistics.noncentral import noncentral_f_cdf, noncentral_f_sf
from assayfolio.statistics.power import contrast_power, f_power, pair_power
from assayfolio.statistics.sample_size import detectable_difference
from assayfolio.statistics.tails import t_isf


@pytest.mark.parametrize(("k", "n", "ratio"), [(3, 4, 0.9), (4, 8, 1.6), (6, 15, 0.8), (12, 3, 2.5)])
@pytest.mark.parametrize("alpha", [0.05, 0.01])
def test_the_f_test(k, n, ratio, alpha):
    effect = ratio / sqrt(2 * k)
    other = FTestAnovaPower().power(effect_size=effect, nobs=k * n, alpha=alpha, k_groups=k)
    assert f_power((n,) * k, ratio * 0.3, 0.3, alpha) == pytest.approx(float(other), rel=1e-10)


def test_the_difference_that_the_f_test_detects():
    difference = detectable_difference(lambda d: f_power((7,) * 5, d, 2.0, 0.05), 0.9, 2.0)
    assert difference is not None
    effect = difference / 2.0 / sqrt(2 * 5)
    other = FTestAnovaPower().power(effect_size=effect, nobs=35, alpha=0.05, k_groups=5)
    assert float(other) == pytest.approx(0.9, abs=1e-10)


@pytest.mark.parametrize("alternative", [TWO_SIDED, GREATER])
@pytest.mark.parametrize(("n_a", "n_b", "ratio"), [(5, 5, 1.1), (4, 10, 0.3), (30, 20, 0.8)])
def test_two_levels(n_a, n_b, ratio, alternative):
    words = {TWO_SIDED: "two-sided", GREATER: "larger"}
    other = TTestIndPower().power(ratio, n_a, 0.05, ratio=n_b / n_a, alternative=words[alternative])
    power = contrast_power((1, -1), (n_a, n_b), ratio, 1.0, 0.05, alternative)
    assert power == pytest.approx(float(other), rel=1e-9)


def test_a_pair_with_the_error_of_more_levels():
    df, n, ratio = 28, 8, 1.2
    other = TTestPower().power(ratio / sqrt(2), nobs=n, alpha=0.05, df=df, alternative="larger")
    for alternative in (GREATER, LESS):
        power = pair_power(n, n, df, ratio, 1.0, float(t_isf(0.05, df)), alternative)
        assert power == pytest.approx(float(other), rel=1e-9)


def test_noncentral_f_in_ordinary_places():
    generator = np.random.default_rng(7)
    for _ in range(40):
        df1, df2 = (int(df) for df in generator.integers(1, 60, 2))
        noncentrality = float(generator.uniform(0.1, 40))
        f = float(generator.uniform(0.5, 1.5)) * (df1 + noncentrality) / df1
        other = stats.ncf(df1, df2, noncentrality)
        assert noncentral_f_sf(f, df1, df2, noncentrality) == pytest.approx(other.sf(f), abs=1e-11)
        assert noncentral_f_cdf(f, df1, df2, noncentrality) == pytest.approx(other.cdf(f), abs=1e-11)
