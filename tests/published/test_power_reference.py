"""Power and sample sizes against values of 36 to 50 digit arithmetic.

Source: tests/vectors/power.json (its `source` says how it was made). Nine F tests, eleven equivalence tests
down to a power of 0.0005, six contrasts, and eight smallest numbers of values a level.
"""

from fractions import Fraction
from math import prod, sqrt

import pytest

from assayfolio.statistics.comparisons import GREATER, LESS, TWO_SIDED
from assayfolio.statistics.power import contrast_power, f_noncentrality, f_power, f_power_of_means
from assayfolio.statistics.power_equivalence import equivalence_power
from assayfolio.statistics.sample_size import smallest_n
from assayfolio.statistics.tails import f_isf, t_isf
from support.reference import cases_of, relative_error

CASES = cases_of("power")
TOLERANCE = 1e-11


def named(start: str) -> tuple[str, ...]:
    return tuple(name for name in CASES if name.startswith(start))


F_TESTS, F_SIZES = named("power_F_"), named("n_for_F_")
EQUIVALENCE, EQUIVALENCE_SIZES = named("power_tost_"), named("n_for_tost_")
CONTRASTS = named("power_contrast_")


def test_every_case_is_compared():
    assert {*F_TESTS, *F_SIZES, *EQUIVALENCE, *EQUIVALENCE_SIZES, *CONTRASTS} == set(CASES)
    assert len(CASES) == 34


@pytest.mark.parametrize("name", F_TESTS)
def test_power_of_the_f_test(name):
    inputs, expected = CASES[name]["inputs"], CASES[name]["expected"]
    means, n = [Fraction(mean) for mean in inputs["means"]], inputs["n"]
    sigma, alpha = float(inputs["sigma"]), float(inputs["alpha"])
    noncentrality = f_noncentrality(means, n, sigma)
    power = f_power_of_means(means, n, sigma, alpha)
    assert relative_error(noncentrality, expected["lambda"]) < TOLERANCE
    assert relative_error(sqrt(noncentrality / sum(n)), expected["cohen_f"]) < TOLERANCE
    assert relative_error(float(f_isf(alpha, len(n) - 1, sum(n) - len(n))), expected["F_crit"]) < TOLERANCE
    assert relative_error(power, expected["power"]) < TOLERANCE
    assert abs(1 - power - float(expected["beta"])) < TOLERANCE


@pytest.mark.parametrize("name", F_SIZES)
def test_values_a_level_for_the_f_test(name):
    inputs, expected = CASES[name]["inputs"], CASES[name]["expected"]
    k, alpha, target = inputs["k"], float(inputs["alpha"]), float(inputs["target_power"])
    # Two extremes and the rest midway have f squared = difference squared / (2 k sigma squared).
    difference = float(inputs["cohen_f"]) * sqrt(2 * k)

    def power_at(n: int) -> float:
        return f_power((n,) * k, difference, 1.0, alpha)

    n = smallest_n(power_at, target)
    assert n == expected["n_per_group"]
    assert relative_error(power_at(n), expected["power_at_n"]) < TOLERANCE
    assert relative_error(power_at(n - 1), expected["power_at_n_minus_1"]) < TOLERANCE


@pytest.mark.parametrize("name", EQUIVALENCE)
def test_power_of_equivalence(name):
    inputs, expected = CASES[name]["inputs"], CASES[name]["expected"]
    lower, upper = (Fraction(margin) for margin in inputs["margin"])
    alpha, df = float(inputs["alpha"]), inputs["df"]
    power = equivalence_power(
        *inputs["n"], df, Fraction(inputs["true_difference"]), lower, upper, float(inputs["sigma"]), alpha
    )
    assert relative_error(float(t_isf(alpha, df)), expected["t_crit"]) < TOLERANCE
    assert relative_error(power, expected["power"]) < TOLERANCE


@pytest.mark.parametrize("name", EQUIVALENCE_SIZES)
def test_values_a_level_for_equivalence(name):
    inputs, expected = CASES[name]["inputs"], CASES[name]["expected"]
    lower, upper = (Fraction(margin) for margin in inputs["margin"])
    k, true_difference = inputs["k_groups"], Fraction(inputs["true_difference"])
    sigma, alpha = float(inputs["sigma"]), float(inputs["alpha"])

    def power_at(n: int) -> float:
        return equivalence_power(n, n, k * (n - 1), true_difference, lower, upper, sigma, alpha)

    n = smallest_n(power_at, float(inputs["target_power"]))
    assert n == expected["n_per_group"]
    assert relative_error(power_at(n), expected["power_at_n"]) < TOLERANCE
    assert relative_error(power_at(n - 1), expected["power_at_n_minus_1"]) < TOLERANCE


@pytest.mark.parametrize("name", CONTRASTS)
def test_power_of_a_contrast(name):
    inputs, expected = CASES[name]["inputs"], CASES[name]["expected"]
    weights = [Fraction(weight) for weight in inputs["coefficients"]]
    value = sum(map(prod, zip(weights, map(Fraction, inputs["means"]), strict=True)))
    plan = (weights, inputs["n"], value, float(inputs["sigma"]), float(inputs["alpha"]))
    towards = LESS if value < 0 else GREATER
    assert relative_error(contrast_power(*plan, TWO_SIDED), expected["power_two_sided"]) < TOLERANCE
    assert relative_error(contrast_power(*plan, towards), expected["power_one_sided"]) < TOLERANCE
