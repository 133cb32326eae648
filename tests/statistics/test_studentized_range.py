"""What holds for the studentized range at any k and df: identities, order, limits, digits in hard corners."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.statistics.distributions import (
    studentized_range_isf,
    studentized_range_log10_sf,
    studentized_range_sf,
)
from assayfolio.statistics.tails import normal_log10_sf, t_isf, t_two_sided, t_two_sided_log10
from support.range_by_trapezoid import studentized_range_tails

means = st.integers(2, 200)
dfs = st.one_of(st.floats(1, 1e6), st.integers(1, 1000).map(float), st.just(math.inf))
levels = st.one_of(st.floats(1e-14, 1 - 1e-6), st.floats(-14, -1).map(lambda x: 10.0**x))


@given(st.floats(1e-6, 1e3), dfs)
def test_the_range_of_two_is_students_t(t: float, df: float) -> None:
    q = t * math.sqrt(2)
    # q is rounded once: that moves a far tail by up to df or q squared times as much.
    allowed = 1e-12 + 3e-16 * min(df, t * t)
    assert studentized_range_sf(q, 2, df) == pytest.approx(t_two_sided(t, df), rel=allowed, abs=1e-300)
    assert studentized_range_log10_sf(q, 2, df) == pytest.approx(
        t_two_sided_log10(t, df), rel=1e-14, abs=allowed
    )


@given(st.floats(1e-12, 0.999), dfs)
def test_the_point_of_two_is_students_t(p: float, df: float) -> None:
    assert studentized_range_isf(p, 2, df) == pytest.approx(math.sqrt(2) * t_isf(p / 2, df), rel=1e-12)


CORNERS = [
    (3.5, 3, 10.0),
    (0.05, 3, 7.0),
    (20.0, 200, 2.5),
    (60.0, 200, 1.5),
    (900.0, 7, 1.0),
    (6.0, 200, 40.0),
    (4.0, 200, 15.0),
    (9.0, 100, 1e4),
    (5.0, 50, 1e6),
    (60.0, 5, 12.0),
    (250.0, 12, 33.3),
    (7.0, 200, math.inf),
    (1.6, 8, math.inf),
    (30.0, 6, math.inf),
]


@pytest.mark.parametrize(("q", "k", "df"), CORNERS)
def test_a_tail_agrees_with_a_plain_nested_trapezoidal_rule(q: float, k: int, df: float) -> None:
    upper, lower = studentized_range_tails(q, k, df)
    assert upper + lower == pytest.approx(1, abs=1e-14)
    assert studentized_range_sf(q, k, df) == pytest.approx(upper, rel=1e-12)
    assert 10 ** studentized_range_log10_sf(q, k, df) == pytest.approx(upper, rel=1e-12)


LOW_POINTS = [
    (p, k, df) for df in (4.2, 60.0, 1e6, math.inf) for k in (2, 4, 30, 200) for p in (1 - 1e-6, 0.99, 0.5)
]


@pytest.mark.parametrize(("p", "k", "df"), [*LOW_POINTS, (1 - 1e-6, 30, 1.0), (0.5, 200, 1.5)])
def test_a_point_below_the_median_keeps_the_digits_of_the_lower_tail(p: float, k: int, df: float) -> None:
    point = studentized_range_isf(p, k, df)
    below, above = (studentized_range_tails(point * (1 + e), k, df)[1] for e in (-1e-11, 1e-11))
    assert below < 1 - p < above


@given(levels, means, dfs)
def test_points_and_tails_undo_each_other(p: float, k: int, df: float) -> None:
    point = studentized_range_isf(p, k, df)
    assert studentized_range_sf(point, k, df) == pytest.approx(p, rel=1e-11)


@given(st.floats(1e-3, 1e3), st.floats(1e-9, 1), means, dfs)
def test_a_wider_range_is_never_likelier(q: float, more: float, k: int, df: float) -> None:
    narrow, wide = studentized_range_sf(np.array([q, q * (1 + more)]), k, df)
    assert 0 <= wide <= narrow * (1 + 2e-13) <= 1 + 2e-13


@given(st.floats(0.01, 30), st.integers(2, 199), dfs)
def test_more_means_have_a_wider_range(q: float, k: int, df: float) -> None:
    fewer, more = studentized_range_sf(q, k, df), studentized_range_sf(q, k + 1, df)
    assert fewer <= more * (1 + 2e-13)


@given(st.floats(0.5, 200), means, dfs)
def test_a_tail_lies_between_that_of_one_pair_and_of_all_pairs_one_by_one(
    q: float, k: int, df: float
) -> None:
    one_pair = t_two_sided_log10(q / math.sqrt(2), df)
    tail = studentized_range_log10_sf(q, k, df)
    allowed = 1e-12 + 1e-14 * abs(one_pair)
    assert one_pair - allowed <= tail <= min(0, math.log10(k * (k - 1) / 2) + one_pair) + allowed


def test_far_out_all_pairs_count_one_by_one_and_the_logarithm_goes_on() -> None:
    for k in (3, 30, 200):
        pairs = math.log10(k * (k - 1) / 2)
        for q in (60.0, 500.0):
            together = pairs + math.log10(2) + normal_log10_sf(q / math.sqrt(2))
            assert studentized_range_log10_sf(q, k, math.inf) == pytest.approx(together, rel=1e-14)
    assert studentized_range_sf(500.0, 30, math.inf) == 0.0
    assert studentized_range_log10_sf(1e5, 5, 40.0) == pytest.approx(
        1 + t_two_sided_log10(1e5 / math.sqrt(2), 40), abs=1
    )


def test_at_large_df_the_range_tends_to_that_with_known_sigma() -> None:
    known = studentized_range_sf(4.5, 12, math.inf)
    distances = [abs(studentized_range_sf(4.5, 12, df) / known - 1) for df in (1e3, 1e5, 1e7)]
    assert distances[0] > 50 * distances[1] > 2500 * distances[2] > 0


def test_the_ends_of_the_scale_have_their_limits() -> None:
    for df in (1, 7.5, math.inf):
        assert studentized_range_sf(np.array([0.0, math.inf]), 5, df).tolist() == [1.0, 0.0]
        assert studentized_range_log10_sf(np.array([0.0, math.inf]), 5, df).tolist() == [0.0, -math.inf]
    assert studentized_range_sf(1e-3, 200, 20) == 1.0
    assert studentized_range_sf(1e200, 3, 1) == pytest.approx(
        3 * t_two_sided(1e200 / math.sqrt(2), 1), rel=0.5
    )


@pytest.mark.parametrize(("k", "df"), [(2, 3.0), (30, 1.0), (30, 210.0), (200, 12.5), (7, math.inf)])
def test_a_value_has_the_same_bits_alone_and_in_any_array(k: int, df: float) -> None:
    values = np.concatenate([np.zeros(1), np.geomspace(0.01, 200, 120)])
    for function in (studentized_range_sf, studentized_range_log10_sf):
        together = function(values, k, df)
        assert [function(float(value), k, df) for value in values] == together.tolist()
        assert function(values[::-7], k, df).tolist() == together[::-7].tolist()
        assert function(values[:120].reshape(3, 40), k, df).tolist() == together[:120].reshape(3, 40).tolist()
        assert function(values[:0], k, df).shape == (0,)
        assert type(function(3, k, df)) is float
    levels = np.array([0.999, 0.6, 0.05, 1e-9])
    points = studentized_range_isf(levels, k, df)
    assert [studentized_range_isf(float(level), k, df) for level in levels] == points.tolist()


REFUSED = [
    ((-1e-9, 3, 10), "a studentized range may not be negative"),
    ((math.nan, 3, 10), "a studentized range is not a number"),
    ((3.0, 1, 10), "the number of means must be a whole number from 2 to 200, not 1"),
    ((3.0, 201, 10), "the number of means must be a whole number from 2 to 200, not 201"),
    ((3.0, 3.0, 10), "the number of means must be a whole number"),
    ((3.0, True, 10), "the number of means must be a whole number"),
    ((3.0, 3, 0.99), "degrees of freedom must be a number from 1 upwards or infinite, not 0.99"),
    ((3.0, 3, math.nan), "degrees of freedom must be a number from 1 upwards or infinite, not nan"),
]


@pytest.mark.parametrize(("arguments", "words"), REFUSED)
def test_what_lies_outside_the_domain_is_refused_in_words(
    arguments: tuple[float, int, float], words: str
) -> None:
    for function in (studentized_range_sf, studentized_range_log10_sf):
        with pytest.raises(ValueError, match=words):
            function(*arguments)


@pytest.mark.parametrize("p", [0.0, 1.0, -0.05, 1.2, math.nan])
def test_a_level_that_is_no_probability_is_refused(p: float) -> None:
    with pytest.raises(ValueError, match="a probability between 0 and 1 is needed"):
        studentized_range_isf(p, 3, 10)
