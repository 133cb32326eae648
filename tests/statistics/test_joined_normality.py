"""Normality of levels with a variance each: levels are tested one by one and joined."""

from fractions import Fraction
from math import sqrt

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from assayfolio.exact import Decimal10
from assayfolio.statistics.joined_normality import anderson_darling_joined, shapiro_wilk_joined
from assayfolio.statistics.normality import anderson_darling, residuals
from assayfolio.statistics.oneway import NotComputableError
from support.reference import decimals

STEP = Fraction(1, 1000)


def recorded(samples):
    """Samples, each a level, recorded to three decimals."""
    return [
        (f"L{at}", [Decimal10(round(1000 * float(one)), -3) for one in sample])
        for at, sample in enumerate(samples)
    ]


def drawn(generator, sizes, spreads):
    return recorded(generator.normal(100, spread, size=n) for n, spread in zip(sizes, spreads, strict=True))


def test_the_joined_deviate_is_the_sum_of_those_of_the_levels_over_the_root_of_their_number():
    groups = drawn(np.random.default_rng(3), [4, 6, 12], [0.1, 1.0, 10.0])
    found = shapiro_wilk_joined(groups, STEP)
    p = [stats.shapiro([float(one.fraction) for one in values]).pvalue for _, values in groups]
    assert found.z == pytest.approx(sum(stats.norm.ppf(p)) / sqrt(3), rel=1e-6)
    assert found.p == pytest.approx(stats.norm.cdf(found.z), rel=1e-12)
    assert (found.used, found.left_out) == (("L0", "L1", "L2"), ())


def test_one_level_keeps_its_own_p():
    groups = drawn(np.random.default_rng(4), [10], [2.0])
    found = anderson_darling_joined(groups, STEP)
    assert found.p == pytest.approx(anderson_darling(residuals(groups)).p, rel=1e-12)


@settings(max_examples=30)
@given(st.randoms(use_true_random=False), st.lists(st.integers(-3, 3), min_size=4, max_size=4))
def test_neither_order_nor_the_unit_or_place_of_a_level_matters(random, powers):
    groups = drawn(np.random.default_rng(random.randint(0, 10**6)), [5, 6, 8, 9], [0.5, 1, 2, 3])
    moved = [
        (level, [Decimal10(one.mantissa * 10**power + 7, one.exponent) for one in values])
        for (level, values), power in zip(groups, [0, 1, 2, 3], strict=True)
    ]
    random.shuffle(moved)
    before, after = shapiro_wilk_joined(groups, STEP), shapiro_wilk_joined(moved, STEP)
    assert after.p == pytest.approx(before.p, rel=1e-6)


def test_levels_that_say_nothing_are_left_out_with_the_reason():
    groups = decimals(
        {
            "one": ["5.00"],
            "three": ["5.00", "5.10", "5.31"],
            "equal": ["5.10", "5.10", "5.10", "5.10"],
            "coarse": ["5.10", "5.11", "5.13", "5.12", "5.10"],
            "good": ["5.10", "5.22", "5.47", "5.31", "5.02"],
        }
    )
    found = shapiro_wilk_joined(groups, Fraction(1, 100))
    assert found.used == ("good",)
    assert dict(found.left_out) == {
        "one": "fewer than 4 values",
        "three": "fewer than 4 values",
        "equal": "all values equal",
        "coarse": "step of recording above a quarter of the standard deviation",
    }
    with pytest.raises(
        NotComputableError, match=r"can be tested \(one, three, equal, coarse, good: fewer than 8 values\)"
    ):
        anderson_darling_joined(groups, Fraction(1, 100))


@pytest.mark.parametrize("joined", [shapiro_wilk_joined, anderson_darling_joined])
def test_normal_levels_of_any_variances_are_seldom_called_otherwise(joined):
    generator = np.random.default_rng(8)
    spreads = [0.1, 0.5, 2.0, 10.0]
    p = [joined(drawn(generator, [8, 10, 8, 12], spreads), STEP).p for _ in range(400)]
    assert np.mean(np.array(p) <= 0.05) < 0.05 + 3 * sqrt(0.05 * 0.95 / 400)


def test_skew_levels_are_found():
    generator = np.random.default_rng(9)
    p = [
        shapiro_wilk_joined(
            recorded(100 + spread * generator.exponential(size=12) for spread in (0.5, 2, 8, 30)), STEP
        ).p
        for _ in range(100)
    ]
    assert np.mean(np.array(p) <= 0.05) > 0.7
