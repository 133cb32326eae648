"""Noncentral F and t: digits against 50-digit arithmetic, identities, order, and the inverse."""

import math

import mpmath as mp
import numpy as np
import pytest
from hypothesis import assume, example, given
from hypothesis import strategies as st

from assayfolio.statistics import poisson_mixture
from assayfolio.statistics.noncentral import (
    noncentral_f_cdf,
    noncentral_f_noncentrality,
    noncentral_f_sf,
    noncentral_t_cdf,
    noncentral_t_sf,
)
from assayfolio.statistics.tails import f_sf, normal_sf, t_sf
from support.high_precision import distance
from support.noncentral_in_high_precision import noncentral_f_tails, noncentral_t_tails

SMALLEST = 1e-14
TOLERANCE = 1e-12

RATIOS = [
    pytest.param(3.9, 3, 20, 12.0, id="ordinary"),
    pytest.param(0.4, 3, 1e6, 12.0, id="a million denominator df, lower side"),
    pytest.param(9.5, 3, 1e6, 12.0, id="a million denominator df, upper side"),
    pytest.param(1e6, 1, 1, 12.0, id="one and one, far"),
    pytest.param(1e-6, 2.5, 3.5, 0.3, id="F next to nothing"),
    pytest.param(100.0, 1, 1.5, 300.0, id="fractional"),
    pytest.param(60.0, 8, 20, 300.0, id="lambda of 300"),
    pytest.param(9.0, 8, 3000, 300.0, id="far below"),
    pytest.param(130.0, 8, 300, 300.0, id="far above"),
    pytest.param(4.0, 1000, 300, 12.0, id="a thousand numerator df"),
    pytest.param(5e4, 2, 20, 1e5, id="lambda of 1e5"),
    pytest.param(3.3e4, 3, 300, 1e5, id="lambda of 1e5, centre"),
    pytest.param(2.2e3, 40, 300, 1e5, id="lambda of 1e5, lower side"),
]


@pytest.mark.parametrize(("f", "df1", "df2", "noncentrality"), RATIOS)
def test_both_tails_of_f_have_twelve_digits(f, df1, df2, noncentrality):
    above, below = noncentral_f_tails(f, df1, df2, noncentrality)
    assert max(above, below) > SMALLEST
    if above > SMALLEST:
        assert distance(noncentral_f_sf(f, df1, df2, noncentrality), above) < TOLERANCE
    if below > SMALLEST:
        assert distance(noncentral_f_cdf(f, df1, df2, noncentrality), below) < TOLERANCE


DEVIATES = [
    (5.0, 1, 0.3),
    (2.0, 1, -3.0),
    (1e6, 1, 2.0),
    (-2.0, 2.7, 2.5),
    (30.0, 8, 2.5),
    (4.0, 8, -5.0),
    (60.0, 8, 40.0),
    (1e-3, 8, -2.0),
    (4.0, 50, 8.0),
    (16.0, 50, 8.0),
    (35.0, 1000, 40.0),
    (310.0, 1000, 300.0),
    (2.0, 1e6, 8.0),
    (305.0, 1e6, 300.0),
]


@pytest.mark.parametrize(("t", "df", "delta"), DEVIATES)
def test_both_tails_of_t_have_twelve_digits(t, df, delta):
    above, below = noncentral_t_tails(t, df, delta)
    with mp.workdps(25):
        assert abs(above + below - 1) < 1e-18
    if above > SMALLEST:
        assert distance(noncentral_t_sf(t, df, delta), above) < TOLERANCE
    if below > SMALLEST:
        assert distance(noncentral_t_cdf(t, df, delta), below) < TOLERANCE


positive = st.floats(-4, 4).map(lambda x: 10.0**x)


@given(positive, st.floats(0, 6).map(lambda x: 10.0**x), st.floats(-300, 300))
def test_t_squared_is_f_with_one_numerator_df(t, df, delta):
    assume(delta == 0 or delta * delta > 1e-300)
    upper = noncentral_f_sf(t * t, 1, df, delta * delta)
    assume(upper > SMALLEST)
    both = noncentral_t_sf(t, df, delta) + noncentral_t_cdf(-t, df, delta)
    # t squared is rounded once: that moves a far tail by up to t squared times as much.
    assert both == pytest.approx(upper, rel=1e-11 + 3e-16 * min(df, t * t))


@given(positive, st.floats(0, 6).map(lambda x: 10.0**x), st.floats(-30, 30))
def test_turning_the_signs_round_swaps_the_tails_of_t(t, df, delta):
    assert noncentral_t_sf(t, df, delta) == noncentral_t_cdf(-t, df, -delta)


@given(positive, st.integers(1, 200), st.floats(1, 1e5), st.floats(0, 1e4))
def test_the_tails_sum_to_one(f, df1, df2, noncentrality):
    upper = noncentral_f_sf(f, df1, df2, noncentrality)
    lower = noncentral_f_cdf(f, df1, df2, noncentrality)
    assert upper + lower == pytest.approx(1, abs=1e-12)


@given(positive, st.integers(1, 60), st.floats(1, 1e4))
@example(239.1798631379276, 9, 1580.2667004812083)  # 1.9e-287
@example(457.04431637464126, 5, 1152.2812518533867)  # 1.9e-270
def test_without_noncentrality_they_are_the_central_distributions(x, df1, df2):
    upper = f_sf(x, df1, df2)
    # A tail is the exponential of its logarithm, whose last digit is worth more the farther out it lies; both
    # ways are within 2.1e-13 of the truth at 1e-270.
    far = 1e-15 * abs(math.log(max(upper, 1e-300)))
    assert noncentral_f_sf(x, df1, df2, 0.0) == pytest.approx(upper, rel=1e-13 + far, abs=1e-300)
    tail = t_sf(x, df2)
    if tail > SMALLEST:
        assert noncentral_t_sf(x, df2, 0.0) == pytest.approx(tail, rel=1e-12)


def test_a_known_sigma_makes_t_normal():
    assert noncentral_t_sf(2.5, math.inf, 1.0) == normal_sf(1.5)
    assert noncentral_t_sf(2.5, 1e6, 1.0) == pytest.approx(normal_sf(1.5), rel=1e-5)


def test_f_becomes_more_likely_to_exceed_a_value_as_the_noncentrality_rises():
    tails = [noncentral_f_sf(3.0, 4, 15, noncentrality) for noncentrality in np.linspace(0, 60, 25)]
    assert tails == sorted(tails)
    assert len(set(tails)) == 25


def test_an_array_gives_an_array_of_the_same_digits():
    f = np.array([[0.0, 1.5], [4.0, math.inf]])
    tails = noncentral_f_sf(f, 3, 12, 5.0)
    assert tails.shape == (2, 2)
    assert tails[0, 0] == 1.0
    assert tails[1, 1] == 0.0
    assert tails[1, 0] == noncentral_f_sf(4.0, 3, 12, 5.0)
    t = noncentral_t_sf(np.array([-math.inf, 0.0, 2.0, math.inf]), 12, 1.0)
    assert list(t[[0, 3]]) == [1.0, 0.0]
    assert t[1] == normal_sf(-1.0)


def test_taking_every_mth_term_of_the_mixture_changes_no_digit(monkeypatch):
    places = [(3.3e4, 3, 20.0, 1e5), (2.0e4, 3, 300.0, 1e5), (3.31e4, 3, 1e4, 1e5), (26.0, 40, 7.0, 1e3)]
    whole = [poisson_mixture.mixture_tails(*place) for place in places]
    monkeypatch.setattr(poisson_mixture, "_MOST_STEPS", 1)
    for place, expected in zip(places, whole, strict=True):
        sampled = poisson_mixture.mixture_tails(*place)
        assert sampled.upper == pytest.approx(expected.upper, rel=1e-11)
        assert sampled.lower == pytest.approx(expected.lower, rel=1e-11)
        assert sampled.slope == pytest.approx(expected.slope, rel=1e-11)


@given(
    st.floats(-1, 3).map(lambda x: 10.0**x),
    st.integers(1, 100),
    st.floats(1, 1e4),
    st.sampled_from([1e-6, 0.005, 0.025, 0.5, 0.95, 0.975, 0.999]),
)
def test_the_noncentrality_that_is_found_has_the_tail_that_was_asked_for(f, df1, df2, p):
    found = noncentral_f_noncentrality(f, df1, df2, p)
    if found == 0:
        assert noncentral_f_cdf(f, df1, df2, 0.0) <= p
    else:
        assert noncentral_f_cdf(f, df1, df2, found) == pytest.approx(p, rel=1e-11)


def test_a_vast_f_still_has_its_noncentralities():
    # The numerator hardly varies then: lambda over df1 f is chi-square over df2, at a rate free of f.
    near, far = (noncentral_f_noncentrality(f, 3, 20, 0.025) / f for f in (1e10, 1e14))
    assert near == pytest.approx(far, rel=1e-4)


@pytest.mark.parametrize(
    ("function", "arguments", "words"),
    [
        (noncentral_f_sf, (-1.0, 2, 5, 1.0), "negative"),
        (noncentral_f_sf, (math.nan, 2, 5, 1.0), "not a number"),
        (noncentral_f_sf, (1.0, 2, 5, -1.0), "noncentrality"),
        (noncentral_f_sf, (1.0, 2, 5, math.inf), "noncentrality"),
        (noncentral_f_sf, (1.0, 0.5, 5, 1.0), "numerator"),
        (noncentral_f_cdf, (1.0, 2, math.inf, 1.0), "denominator"),
        (noncentral_t_sf, (1.0, 0, 1.0), "degrees of freedom"),
        (noncentral_t_cdf, (1.0, 5, math.nan), "noncentrality"),
        (noncentral_f_noncentrality, (1.0, 2, 5, 1.0), "probability"),
        (noncentral_f_noncentrality, (1e101, 2, 5, 0.5), "too large"),
    ],
)
def test_what_is_outside_their_domain_is_refused(function, arguments, words):
    with pytest.raises(ValueError, match=words):
        function(*arguments)
