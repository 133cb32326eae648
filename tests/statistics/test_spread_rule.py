"""The quadrature rule over the spread: moments and a tail that are known otherwise."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.statistics.spread_rule import spread_rule
from assayfolio.statistics.tails import chi2_sf, normal_sf, t_sf

dfs = st.floats(0, 6).map(lambda x: 10.0**x)


@given(dfs)
def test_the_weights_sum_to_one_and_the_variance_is_unbiased(df):
    s, weights = spread_rule(df, 0.0, (0.0, 0.0))
    assert np.sum(weights) == pytest.approx(1, abs=1e-13)
    assert np.sum(weights * s * s) == pytest.approx(1, abs=1e-13)


@given(st.floats(1, 100))
def test_the_mean_spread_is_the_known_one(df):
    s, weights = spread_rule(df, 0.0, (0.0, 0.0))
    known = math.sqrt(2 / df) * math.exp(math.lgamma((df + 1) / 2) - math.lgamma(df / 2))
    assert np.sum(weights * s) == pytest.approx(known, rel=1e-12)


@given(dfs, st.floats(-5, 9).map(lambda x: 10.0**x))
def test_the_average_of_a_normal_tail_is_students_t(df, t):
    s, weights = spread_rule(df, t, (-13.0, 13.0))
    tail = t_sf(t, df)
    if tail > 1e-14:
        assert np.sum(weights * normal_sf(t * s)) == pytest.approx(tail, rel=1e-12)


@given(st.floats(1, 1e4), st.floats(0.3, 1.8))
def test_what_exceeds_a_spread_is_left_out(df, most):
    _, weights = spread_rule(df, 0.0, (0.0, 0.0), upto=most)
    assert np.sum(weights) == pytest.approx(1 - chi2_sf(df * most * most, df), abs=1e-12)


def test_nothing_is_left_where_all_is_left_out():
    assert spread_rule(1e6, 1.0, (0.0, 1.0), upto=0.5)[1].size == 0
    assert spread_rule(5.0, 1.0, (0.0, 1.0), upto=0.0)[1].size == 0
