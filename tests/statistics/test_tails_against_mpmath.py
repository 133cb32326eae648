"""F, t, chi-square and normal tails and points against 50-digit arithmetic.

Source: mpmath, by hypergeometric series and finite sums (tests/support/high_precision.py).
"""

import math

import mpmath as mp
import numpy as np
import pytest

from assayfolio.statistics.tails import (
    chi2_isf,
    chi2_log10_sf,
    chi2_ppf,
    chi2_sf,
    f_isf,
    f_log10_sf,
    f_sf,
    normal_isf,
    normal_log10_sf,
    normal_sf,
    t_isf,
    t_log10_sf,
    t_sf,
    t_two_sided,
    t_two_sided_log10,
)
from support.high_precision import (
    chi2_below,
    chi2_tail,
    distance,
    distance_by_log10,
    f_tail,
    normal_tail,
    t_tail,
)

RATIOS = [
    pytest.param(3.3, 3, 20, id="ordinary"),
    pytest.param(1.0, 3, 20, id="F is one"),
    pytest.param(0.999999, 5, 40, id="just below one"),
    pytest.param(1e-9, 4, 17, id="F next to nothing"),
    pytest.param(0.02, 1, 1, id="one and one"),
    pytest.param(1e10, 1, 1, id="one and one, far"),
    pytest.param(1e200, 1, 1.5, id="F of 1e200"),
    pytest.param(5.5, 2, 2, id="two and two"),
    pytest.param(2.0, 3.5, 2.25, id="fractional"),
    pytest.param(4.7, 2.817, 9.043, id="fractional, as Welch gives"),
    pytest.param(25.0, 1, 1e6, id="one and a million"),
    pytest.param(1300.0, 1, 1e6, id="one and a million, 1e-284"),
    pytest.param(3.0, 7.3, 1e6, id="fractional and a million"),
    pytest.param(4.0, 1e6, 7.3, id="a million and fractional"),
    pytest.param(0.3, 1e4, 12.0, id="lower side, many numerator df"),
    pytest.param(1.01, 1e6, 3001.5, id="a million and 3001.5"),
    pytest.param(120.0, 9, 180, id="far out"),
]


@pytest.mark.parametrize(("f", "dfn", "dfd"), RATIOS)
def test_an_f_tail_has_twelve_digits(f: float, dfn: float, dfd: float) -> None:
    truth = f_tail(f, dfn, dfd)
    assert distance(f_sf(f, dfn, dfd), truth) < 1e-12
    assert distance_by_log10(f_log10_sf(f, dfn, dfd), truth) < 1e-12


@pytest.mark.parametrize(
    ("f", "dfn", "dfd"),
    [(1.0005, 20_000, 1e6), (1.3, 2_000, 1e6), (9.0, 200, 18_000), (9.0, 18_000, 200), (3.0, 2, 1e6)],
)
def test_an_f_tail_keeps_its_digits_where_both_df_are_large(f: float, dfn: float, dfd: float) -> None:
    truth = f_tail(f, dfn, dfd)
    assert distance(f_sf(f, dfn, dfd), truth) < 1e-12
    assert distance_by_log10(f_log10_sf(f, dfn, dfd), truth) < 1e-12


def test_an_f_tail_below_the_smallest_double_keeps_its_logarithm() -> None:
    truth = f_tail(14.0, 200, 18_000)
    assert mp.log10(truth) < -330
    assert f_sf(14.0, 200, 18_000) == 0.0
    assert distance_by_log10(f_log10_sf(14.0, 200, 18_000), truth) < 1e-12


@pytest.mark.parametrize("dfd", [1.0, 2.5, 30.0, 1e4])
@pytest.mark.parametrize("dfn", [1.0, 2.5, 30.0, 1e4])
@pytest.mark.parametrize("p", [1e-100, 1e-10, 0.01, 0.5, 0.99, 1 - 1e-9])
def test_an_f_point_has_the_tail_it_was_asked_for(p: float, dfn: float, dfd: float) -> None:
    point = f_isf(p, dfn, dfd)
    lower, upper = f_tail(point * (1 + 1e-12), dfn, dfd), f_tail(point * (1 - 1e-12), dfn, dfd)
    assert lower < p < upper


def test_f_with_a_known_variance_is_chi_square_over_its_df() -> None:
    for f, dfn in [(0.2, 3), (1.7, 8), (40.0, 2.5), (1.02, 1e5)]:
        assert distance(f_sf(f, dfn, math.inf), chi2_tail(f * dfn, dfn)) < 1e-12


@pytest.mark.parametrize("df", [1, 2, 3.7, 12, 210, 1e4, 1e6, math.inf])
@pytest.mark.parametrize("t", [-30.0, -2.5, -1e-5, 0.0, 1e-9, 0.7, 1.0, 2.2, 9.0, 31.0])
def test_a_t_tail_has_twelve_digits(t: float, df: float) -> None:
    truth = t_tail(t, df)
    assert distance(t_sf(t, df), truth) < 1e-12
    assert distance_by_log10(t_log10_sf(t, df), truth) < 1e-12
    both = 2 * t_tail(abs(t), df)
    assert distance(t_two_sided(t, df), both) < 1e-12
    assert distance_by_log10(t_two_sided_log10(t, df), both) < 1e-12


def test_t_on_one_df_is_cauchys_distribution_out_to_1e300() -> None:
    for t in (1e5, 1e150, 1e200, 1e299):
        assert distance(t_sf(t, 1), mp.atan(1 / mp.mpf(t)) / mp.pi) < 1e-12
    assert distance(t_isf(1e-300, 1), 1 / (mp.pi * mp.mpf(1e-300))) < 1e-12


@pytest.mark.parametrize("df", [1, 2.5, 19, 1e4, math.inf])
@pytest.mark.parametrize("p", [1e-200, 1e-14, 0.005, 0.025, 0.4999, 0.75, 0.975])
def test_a_t_point_has_the_tail_it_was_asked_for(p: float, df: float) -> None:
    point = t_isf(p, df)
    step = 1e-12 * abs(point)
    assert t_tail(point + step, df) < p < t_tail(point - step, df)


@pytest.mark.parametrize("df", [1, 1.5, 2, 9, 33.3, 1000, 1e6])
@pytest.mark.parametrize("share", [1e-6, 0.3, 0.98, 1.0, 1.004, 2.5, 30.0])
def test_a_chi_square_tail_has_twelve_digits(share: float, df: float) -> None:
    x = share * df
    truth = chi2_tail(x, df)
    log10_sf = chi2_log10_sf(x, df)
    if truth > 1e-300:
        assert distance(chi2_sf(x, df), truth) < 1e-12
        assert distance_by_log10(log10_sf, truth) < 1e-12
    else:
        assert distance(log10_sf, mp.log10(truth)) < 4e-15


@pytest.mark.parametrize("df", [1, 2.5, 9, 210, 1e5])
@pytest.mark.parametrize("p", [1e-100, 1e-12, 0.025, 0.5, 0.975])
def test_chi_square_points_on_both_sides_have_their_tails(p: float, df: float) -> None:
    upper, lower = chi2_isf(p, df), chi2_ppf(p, df)
    assert chi2_tail(upper * (1 + 1e-12), df) < p < chi2_tail(upper * (1 - 1e-12), df)
    assert chi2_below(lower * (1 - 1e-12), df) < p < chi2_below(lower * (1 + 1e-12), df)


@pytest.mark.parametrize(
    "z", [-38.0, -3.0, -1e-8, 0.0, 0.3, 1.96, 5.0, 12.3456, 27.7, 33.337, 35.123, 36.71, 37.0]
)
def test_a_normal_tail_has_fourteen_digits(z: float) -> None:
    assert distance(normal_sf(z), normal_tail(z)) < 1e-14
    assert distance_by_log10(normal_log10_sf(z), normal_tail(z)) < 1e-12


@pytest.mark.parametrize("p", [1e-300, 1e-20, 0.025, 0.3, 0.9])
def test_a_normal_point_has_the_tail_it_was_asked_for(p: float) -> None:
    point = normal_isf(p)
    step = 1e-13 * abs(point)
    assert normal_tail(point + step) < p < normal_tail(point - step)


def test_published_one_way_points_are_met() -> None:
    """Textbook values to their printed digits: F(3, 20) and t(20) at 5 %, chi-square(10) at 2.5 %."""
    assert round(f_isf(0.05, 3, 20), 2) == 3.10
    assert round(t_isf(0.025, 20), 3) == 2.086
    assert np.round(chi2_isf(np.array([0.025, 0.975]), 10), 3).tolist() == [20.483, 3.247]
