"""The null distribution of the ratio of sums of squares without and with the two largest values."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from assayfolio.statistics import grubbs_pairs
from assayfolio.statistics.grubbs_pairs import (
    FEWEST_FOR_PAIRS,
    MOST_FOR_PAIRS,
    largest_pair_ratio,
    pair_limit,
    pair_tail,
)
from support.sphere_of_four import four_values_tail

sizes = st.integers(FEWEST_FOR_PAIRS, MOST_FOR_PAIRS)


@pytest.mark.parametrize("ratio", [1e-30, 1e-8, 1e-4, 0.01, 0.1, 0.3, 0.6, 0.66])
def test_four_values_against_an_integral_over_the_sphere(ratio):
    assert pair_tail(ratio, 4) == pytest.approx(float(four_values_tail(ratio)), rel=1e-13)


@pytest.mark.parametrize("n", [4, 5, 6, 9, 15, 40, 100])
def test_the_tail_agrees_with_simulated_samples(n):
    generator = np.random.default_rng(100 + n)
    draws = 40_000 if n < 40 else 10_000
    samples = np.sort(generator.normal(size=(draws, n)), axis=1)
    ratios = samples[:, :-2].var(axis=1) * (n - 2) / (samples.var(axis=1) * n)
    for chance in (0.005, 0.025, 0.2, 0.5, 0.9):
        seen = float(np.mean(ratios <= pair_limit(chance, n)))
        assert abs(seen - chance) < 4.5 * (chance * (1 - chance) / draws) ** 0.5


@pytest.mark.parametrize("n", [4, 7, 20, 40, 100])
def test_more_nodes_change_nothing(n, monkeypatch):
    ratios = [0.01, 0.1, 0.3, 0.5, 0.6]
    few = [pair_tail(ratio, n) for ratio in ratios]
    monkeypatch.setattr(grubbs_pairs, "_DEGREE", 44)
    monkeypatch.setattr(grubbs_pairs, "_NODES", 40)
    grubbs_pairs._largest_cosine.cache_clear()
    many = [pair_tail(ratio, n) for ratio in ratios]
    grubbs_pairs._largest_cosine.cache_clear()
    for one, other in zip(few, many, strict=True):
        if other > 1e-14:
            assert one == pytest.approx(other, rel=1e-12 if n <= 40 else 1e-10)


@settings(max_examples=60)
@given(sizes, st.floats(0, 1), st.floats(0, 1))
def test_the_tail_rises_with_the_ratio(n, one, other):
    low, high = sorted((one, other))
    assert 0 <= pair_tail(low, n) <= pair_tail(high, n) * (1 + 1e-12) <= 1 + 1e-12


@pytest.mark.parametrize("ratio", [0.01, 0.1, 0.4])
def test_the_tail_falls_with_the_number_of_values(ratio):
    tails = [pair_tail(ratio, n) for n in range(FEWEST_FOR_PAIRS, 41)]
    assert sorted(tails, reverse=True) == tails


@settings(max_examples=40)
@given(sizes, st.floats(1e-9, 0.999))
def test_limit_and_tail_are_inverse(n, alpha):
    assert pair_tail(pair_limit(alpha, n), n) == pytest.approx(alpha, rel=1e-11)


@pytest.mark.parametrize("n", [4, 5, 12, 100])
def test_the_ends_of_the_distribution(n):
    greatest = largest_pair_ratio(n)
    values = np.array([-1.0] + [0.0] * (n - 1))
    assert greatest == pytest.approx(values[:-2].var() * (n - 2) / (values.var() * n), rel=1e-12)
    assert pair_tail(0.0, n) == 0.0
    assert pair_tail(greatest, n) == 1.0
    assert pair_tail(1.0, n) == 1.0
    assert 0.99 < pair_tail(greatest * (1 - 1e-3), n) <= 1.0


@pytest.mark.parametrize("n", [0, 3, 101])
def test_other_sizes_are_refused(n):
    with pytest.raises(ValueError, match=f"4 to 100 values, not {n}"):
        pair_tail(0.1, n)
    with pytest.raises(ValueError, match=f"4 to 100 values, not {n}"):
        pair_limit(0.1, n)


@pytest.mark.parametrize("alpha", [0.0, 1.0, float("nan")])
def test_a_level_lies_between_zero_and_one(alpha):
    with pytest.raises(ValueError, match="between 0 and 1"):
        pair_limit(alpha, 8)
