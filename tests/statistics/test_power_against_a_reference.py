"""Power of comparisons with a reference: identities, order, and seeded simulation."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.statistics.comparisons import GREATER, LESS, TWO_SIDED
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.statistics.power import contrast_power
from assayfolio.statistics.power_reference import (
    all_reference_power,
    any_reference_power,
    dunnett_all_power,
    dunnett_any_power,
    dunnett_critical,
    dunnett_one_power,
)

sizes = st.lists(st.integers(2, 20), min_size=1, max_size=5)


@given(st.integers(2, 30), st.integers(2, 30), st.floats(0.05, 3), st.sampled_from([TWO_SIDED, GREATER]))
def test_for_one_other_level_it_is_the_t_test(n_control, n, difference, alternative):
    plan = (n_control, (n,), difference, 1.0, 0.05)
    by_t = contrast_power((-1, 1), (n_control, n), difference, 1.0, 0.05, alternative)
    assert dunnett_any_power(*plan, alternative) == pytest.approx(by_t, rel=1e-10)
    one = dunnett_one_power(n_control, (n,), 0, difference, 1.0, 0.05, alternative)
    assert one == pytest.approx(by_t, rel=1e-10)
    if alternative == GREATER:
        assert dunnett_all_power(*plan, alternative) == pytest.approx(by_t, rel=1e-10)


@pytest.mark.parametrize("n_others", [(4, 4, 4), (3, 9, 5), (2, 40)])
@pytest.mark.parametrize("alternative", [TWO_SIDED, GREATER])
@pytest.mark.parametrize("alpha", [0.05, 0.01])
def test_next_to_no_difference_leaves_the_family_its_error_rate(n_others, alternative, alpha):
    power = dunnett_any_power(6, n_others, 1e-10, 1.0, alpha, alternative)
    assert power == pytest.approx(alpha, rel=1e-8)


@given(st.integers(2, 20), sizes, st.floats(0.1, 5), st.sampled_from([TWO_SIDED, GREATER]))
def test_every_level_is_harder_than_one_and_one_harder_than_any(n_control, n_others, difference, alternative):
    critical = dunnett_critical(n_control, n_others, 0.05, alternative)
    at_least_one = any_reference_power(n_control, n_others, difference, 1.0, critical, alternative)
    every = all_reference_power(n_control, n_others, difference, 1.0, critical)
    for which in range(len(n_others)):
        one = dunnett_one_power(n_control, n_others, which, difference, 1.0, 0.05, alternative)
        assert every - 1e-12 <= one <= at_least_one + 1e-12
    assert at_least_one <= 1


@given(st.integers(2, 20), sizes, st.floats(0.1, 5))
def test_the_order_of_the_levels_does_not_matter(n_control, n_others, difference):
    forth = any_reference_power(n_control, n_others, difference, 1.0, 2.5, TWO_SIDED)
    assert any_reference_power(n_control, n_others[::-1], difference, 1.0, 2.5, TWO_SIDED) == forth


def test_both_directions_of_a_one_sided_test_have_the_same_power():
    plan = (5, (4, 6), 1.0, 1.0, 0.05)
    assert dunnett_any_power(*plan, LESS) == dunnett_any_power(*plan, GREATER)
    assert dunnett_all_power(*plan, LESS) == dunnett_all_power(*plan, GREATER)


def test_a_vast_difference_is_shown_for_certain():
    assert dunnett_any_power(4, (3, 5), 1e6, 1.0, 0.05, TWO_SIDED) == 1
    assert dunnett_all_power(4, (3, 5), 1e6, 1.0, 0.05, TWO_SIDED) == pytest.approx(1, abs=1e-12)


RUNS = 60_000
PLANS = [
    (8, (8, 8, 8), 1.7),
    (4, (5, 9, 3, 7), 2.0),
    (6, (3, 3), 0.4),
    (2, (30, 2), 2.0),
    (12, (5,) * 6, 1.4),
]


@pytest.mark.parametrize(("n_control", "n_others", "difference"), PLANS)
@pytest.mark.parametrize("alternative", [TWO_SIDED, GREATER])
def test_simulated_experiments_agree(n_control, n_others, difference, alternative):
    generator = np.random.default_rng([n_control, *n_others])
    df = n_control + sum(n_others) - len(n_others) - 1
    critical = dunnett_critical(n_control, n_others, 0.05, alternative)
    n = np.array(n_others)
    control = generator.normal(0, 1 / math.sqrt(n_control), (RUNS, 1))
    means = generator.normal(difference, 1 / np.sqrt(n), (RUNS, n.size))
    s = np.sqrt(generator.chisquare(df, RUNS) / df)[:, None]
    t = (means - control) / s / np.sqrt(1 / n + 1 / n_control)
    declared = np.abs(t) > critical if alternative == TWO_SIDED else t > critical
    for found, power in (
        (
            declared.any(axis=1).mean(),
            any_reference_power(n_control, n_others, difference, 1.0, critical, alternative),
        ),
        (
            (t > critical).all(axis=1).mean(),
            all_reference_power(n_control, n_others, difference, 1.0, critical),
        ),
    ):
        assert abs(found - power) < 5 * math.sqrt(power * (1 - power) / RUNS)


def test_no_error_term_is_refused():
    with pytest.raises(NotComputableError, match="replicates"):
        dunnett_any_power(1, (1, 1), 1.0, 1.0, 0.05, TWO_SIDED)


@pytest.mark.parametrize("power", [dunnett_any_power, dunnett_all_power])
def test_a_difference_and_a_spread_are_positive(power):
    with pytest.raises(ValueError, match="difference"):
        power(5, (4, 4), 0.0, 1.0, 0.05, TWO_SIDED)
    with pytest.raises(ValueError, match="sigma"):
        power(5, (4, 4), 1.0, -1.0, 0.05, TWO_SIDED)
