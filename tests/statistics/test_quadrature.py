"""The quadrature that the distributions stand on."""

import math

import mpmath as mp
import numpy as np
import pytest

from assayfolio.statistics.quadrature import (
    PiecewiseCurve,
    chebyshev_points,
    composite_rule,
    gauss_legendre,
)


@pytest.mark.parametrize("n", [1, 2, 5, 16, 20, 64])
def test_nodes_are_the_roots_of_the_legendre_polynomial_to_the_last_place(n: int) -> None:
    nodes, weights = gauss_legendre(n)
    assert (np.diff(nodes) > 0).all()
    for node, weight in zip(nodes, weights, strict=True):
        with mp.workdps(40):
            root = mp.findroot(lambda x: mp.legendre(n, x), mp.mpf(float(node)))
            slope = mp.diff(lambda x: mp.legendre(n, x), root)
            assert abs(root - float(node)) < 2e-16
            assert abs(2 / ((1 - root**2) * slope**2) / float(weight) - 1) < 1e-13


@pytest.mark.parametrize("n", [2, 7, 16, 20])
def test_a_rule_of_n_nodes_is_exact_for_polynomials_up_to_degree_2n_minus_1(n: int) -> None:
    nodes, weights = gauss_legendre(n)
    for degree in range(2 * n):
        exact = 0.0 if degree % 2 else 2 / (degree + 1)
        assert math.fsum(weights * nodes**degree) == pytest.approx(exact, abs=3e-15)
    highest = 2 * n
    assert abs(math.fsum(weights * nodes**highest) * (highest + 1) / 2 - 1) > 1e-13


def test_the_kept_rules_cannot_be_altered() -> None:
    nodes, weights = gauss_legendre(20)
    for array in (nodes, weights):
        with pytest.raises(ValueError, match="read-only"):
            array[0] = 0.0


def test_a_composite_rule_covers_unequal_panels() -> None:
    nodes, weights = composite_rule(np.array([0.0, 0.5, 3.0, 10.0]), 16)
    assert math.fsum(weights * np.exp(-nodes)) == pytest.approx(-math.expm1(-10), rel=1e-14)


def test_a_piecewise_curve_meets_a_smooth_function_and_stays_level_beyond_its_ends() -> None:
    bounds = np.arange(0.0, 6.0)
    curve = PiecewiseCurve.through(np.exp(-chebyshev_points(bounds, 16)), 0.0, 1.0)
    x = np.linspace(0, 5, 777)
    assert curve(x) == pytest.approx(np.exp(-x), rel=1e-14)
    assert curve(np.array([-3.0, 9.0])) == pytest.approx([1.0, math.exp(-5)], rel=1e-14)
    assert curve(x.reshape(7, 111)).tolist() == curve(x).reshape(7, 111).tolist()
