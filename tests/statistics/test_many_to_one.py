"""What holds for the many-to-one distribution at any sizes and df: identities, order, limits, corners."""

import math
from collections.abc import Sequence

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from assayfolio.statistics.distributions import (
    many_to_one_isf,
    many_to_one_log10_sf,
    many_to_one_sf,
)
from assayfolio.statistics.tails import (
    normal_sf,
    t_isf,
    t_log10_sf,
    t_sf,
    t_two_sided,
    t_two_sided_log10,
)
from support.high_precision import distance
from support.many_to_one_by_trapezoid import many_to_one_tail
from support.many_to_one_in_high_precision import normal_maximum_tail

controls = st.sampled_from([1, 3, 6, 40])
sizes = st.lists(st.sampled_from([1, 2, 6, 7, 50, 1000]), min_size=2, max_size=12)
dfs = st.one_of(st.floats(1, 1e6), st.integers(1, 1000).map(float), st.just(math.inf))
levels = st.one_of(st.floats(1e-14, 1 - 1e-6), st.floats(-14, -1).map(lambda x: 10.0**x))
sidedness = st.booleans()
few = settings(max_examples=40, deadline=None)


@given(st.floats(-1e3, 1e3), controls, controls, dfs)
def test_one_treatment_against_a_control_is_students_t(d: float, n: int, n_control: int, df: float) -> None:
    assert many_to_one_sf(d, n_control, [n], df, two_sided=False) == t_sf(d, df)
    assert many_to_one_log10_sf(d, n_control, [n], df, two_sided=False) == t_log10_sf(d, df)
    assert many_to_one_sf(abs(d), n_control, [n], df) == t_two_sided(d, df)
    assert many_to_one_log10_sf(abs(d), n_control, [n], df) == t_two_sided_log10(d, df)


@given(levels, controls, controls, dfs)
def test_the_point_of_one_treatment_is_students_t(p: float, n: int, n_control: int, df: float) -> None:
    assert many_to_one_isf(p, n_control, [n], df, two_sided=False) == t_isf(p, df)
    assert many_to_one_isf(p, n_control, [n], df) == t_isf(p / 2, df)


@pytest.mark.parametrize("df", [1.0, 7.3, 200.0, math.inf])
@pytest.mark.parametrize("m", [2, 3, 19, 199])
def test_with_equal_sizes_any_of_the_means_is_as_likely_the_largest(m: int, df: float) -> None:
    # Some treatment lies above the control unless the control has the largest of m + 1 means.
    assert many_to_one_sf(0.0, 5, [5] * m, df, two_sided=False) == pytest.approx(m / (m + 1), rel=1e-14)
    point = many_to_one_isf(m / (m + 1), 5, [5] * m, df, two_sided=False)
    assert point == pytest.approx(0, abs=1e-13)


@pytest.mark.parametrize("df", [1.0, 12.0, 1e4])
@pytest.mark.parametrize(("n_control", "a", "b", "c"), [(5, 5, 9, 2), (1, 1000, 3, 40), (500, 1, 4, 900)])
def test_that_three_treatments_all_lie_below_the_control_has_sheppards_probability(
    n_control: int, a: int, b: int, c: int, df: float
) -> None:
    def angle(n: int, m: int) -> float:
        return math.asin(math.sqrt(n / (n_control + n) * m / (n_control + m)))

    above = 1 - (1 / 8 + (angle(a, b) + angle(a, c) + angle(b, c)) / (4 * math.pi))
    assert many_to_one_sf(0.0, n_control, [a, b, c], df, two_sided=False) == pytest.approx(above, rel=1e-14)


@pytest.mark.parametrize("d", [0.7, 2.5, 6.0])
def test_against_a_control_known_exactly_treatments_are_independent(d: float) -> None:
    for m in (2, 7, 199):
        alone = 1e30, [1.0] * m, math.inf
        two, one = -math.expm1(m * math.log1p(-2 * normal_sf(d))), -math.expm1(m * math.log1p(-normal_sf(d)))
        assert many_to_one_sf(d, *alone) == pytest.approx(two, rel=1e-13)
        assert many_to_one_sf(d, *alone, two_sided=False) == pytest.approx(one, rel=1e-13)


@pytest.mark.parametrize("df", [1.0, 2.5, 30.0, 1e5, math.inf])
@pytest.mark.parametrize("p", [0.999, 0.4, 1e-3, 1e-14, 1e-100])
def test_treatments_known_exactly_differ_from_the_control_all_together(p: float, df: float) -> None:
    d = t_isf(p / 2, df)
    many = 1.0, [1e30, 1e30, 3e30], df
    # d is rounded once: that moves a far tail by up to df or d squared times as much.
    allowed = 1e-12 + 3e-16 * min(df, d * d)
    assert many_to_one_log10_sf(d, *many) == pytest.approx(math.log10(p), rel=0, abs=allowed)
    assert many_to_one_log10_sf(d, *many, two_sided=False) == pytest.approx(
        math.log10(p / 2), rel=0, abs=allowed
    )


CORNERS = [
    (2.3, 6, [6] * 5, 25.0),
    (0.8, 5, [3, 9], 14.0),
    (0.05, 4, [2, 40], 3.0),
    (12.0, 10, [4, 6, 20], 12.5),
    (300.0, 6, [6] * 4, 1.0),
    (4e4, 1, [30, 5, 5], 2.2),
    (7.6, 6, [6] * 20, 300.0),
    (3.1, 20, [3, 4, 5, 6, 7], 1e6),
    (3.4, 7, [7] * 199, 1e3),
    (2.0, 60, [2] * 30, math.inf),
    (9.0, 2, [50, 1, 7], math.inf),
]


@pytest.mark.parametrize("sides", [1, 2])
@pytest.mark.parametrize(("d", "n_control", "n_others", "df"), CORNERS)
def test_a_tail_agrees_with_a_plain_nested_trapezoidal_rule(
    d: float, n_control: int, n_others: list[int], df: float, sides: int
) -> None:
    tail = many_to_one_tail(d, n_control, n_others, df, sides)
    arguments = d, n_control, n_others, df
    assert many_to_one_sf(*arguments, two_sided=sides == 2) == pytest.approx(tail, rel=1e-12)
    assert 10 ** many_to_one_log10_sf(*arguments, two_sided=sides == 2) == pytest.approx(tail, rel=1e-12)


@pytest.mark.parametrize(
    ("d", "df"), [(-0.3, 1.0), (-1.5, 6.5), (-40.0, 1.5), (-2.2, 200.0), (-2.9, math.inf)]
)
def test_a_one_sided_tail_from_below_zero_agrees_with_the_trapezoidal_rule(d: float, df: float) -> None:
    for n_control, n_others in ((6, [6] * 4), (3, [10, 2])):
        tail = many_to_one_tail(d, n_control, n_others, df, 1)
        assert many_to_one_sf(d, n_control, n_others, df, two_sided=False) == pytest.approx(tail, rel=1e-13)


UNEQUAL = [
    (0.05, 1, [1e6] * 5, 2),
    (1e-14, 1, [1e6] * 5, 1),
    (0.05, 1, [1e6, 30], 1),
    (0.05, 1e6, [1] * 199, 1),
    (1e-14, 1e6, [1] * 199, 2),
    (0.9, 1, [1e4] * 199, 1),
    (0.9, 1, [1e4] * 199, 2),
    (1e-200, 1, [1e4] * 199, 1),
]


@pytest.mark.parametrize(("p", "n_control", "n_others", "sides"), UNEQUAL)
def test_sizes_a_million_apart_keep_the_digits(
    p: float, n_control: float, n_others: Sequence[float], sides: int
) -> None:
    d = many_to_one_isf(p, n_control, n_others, math.inf, two_sided=sides == 2)
    truth = normal_maximum_tail(d, n_control, n_others, sides)
    assert distance(many_to_one_sf(d, n_control, n_others, math.inf, two_sided=sides == 2), truth) < 1e-12


LOW_POINTS = [
    (p, n_control, n_others, df)
    for p in (1 - 1e-6, 0.999, 0.9)
    for n_control, n_others in ((5, [5] * 3), (2, [50, 4]))
    for df in (4.2, 1e6, math.inf)
]


@pytest.mark.parametrize("sides", [1, 2])
@pytest.mark.parametrize(("p", "n_control", "n_others", "df"), LOW_POINTS)
def test_a_point_below_the_median_keeps_the_digits_of_the_lower_tail(
    p: float, n_control: int, n_others: list[int], df: float, sides: int
) -> None:
    point = many_to_one_isf(p, n_control, n_others, df, two_sided=sides == 2)
    width = 1e-15 / (1 - p) + 1e-12 * abs(point)
    above, below = (many_to_one_tail(point + e, n_control, n_others, df, sides) for e in (-width, width))
    assert below - 1e-15 < p < above + 1e-15


@few
@given(levels, controls, sizes, dfs, sidedness)
def test_points_and_tails_undo_each_other(
    p: float, n_control: int, n_others: list[int], df: float, two_sided: bool
) -> None:
    point = many_to_one_isf(p, n_control, n_others, df, two_sided)
    assert many_to_one_sf(point, n_control, n_others, df, two_sided) == pytest.approx(p, rel=1e-12)


@few
@given(st.floats(-10, 1e3), st.floats(1e-9, 1), controls, sizes, dfs, sidedness)
def test_a_larger_statistic_is_never_likelier(
    d: float, more: float, n_control: int, n_others: list[int], df: float, two_sided: bool
) -> None:
    low = abs(d) if two_sided else d
    both = np.array([low, low + more * abs(low) + 1e-12])
    near, far = many_to_one_sf(both, n_control, n_others, df, two_sided)
    assert 0 <= far <= near * (1 + 2e-13) <= 1 + 2e-13


@few
@given(st.floats(0, 50), controls, sizes, st.sampled_from([1, 5, 300]), dfs, sidedness)
def test_more_treatments_have_a_larger_maximum(
    d: float, n_control: int, n_others: list[int], another: int, df: float, two_sided: bool
) -> None:
    fewer = many_to_one_sf(d, n_control, n_others, df, two_sided)
    more = many_to_one_sf(d, n_control, [*n_others, another], df, two_sided)
    assert fewer <= more * (1 + 2e-13)


@few
@given(st.floats(0, 200), controls, sizes, dfs, sidedness)
def test_a_tail_lies_between_that_of_one_treatment_and_of_all_one_by_one(
    d: float, n_control: int, n_others: list[int], df: float, two_sided: bool
) -> None:
    one = (t_two_sided_log10 if two_sided else t_log10_sf)(d, df)
    tail = many_to_one_log10_sf(d, n_control, n_others, df, two_sided)
    allowed = 1e-12 + 1e-14 * abs(one)
    assert one - allowed <= tail <= min(0, math.log10(len(n_others)) + one) + allowed


@few
@given(st.floats(0, 20), controls, sizes, dfs, sidedness, st.randoms(use_true_random=False))
def test_the_order_of_the_treatments_changes_no_bit(
    d: float, n_control: int, n_others: list[int], df: float, two_sided: bool, random: object
) -> None:
    shuffled = list(n_others)
    random.shuffle(shuffled)  # type: ignore[attr-defined]
    first = many_to_one_sf(d, n_control, n_others, df, two_sided)
    assert many_to_one_sf(d, n_control, shuffled, df, two_sided) == first
    assert many_to_one_sf(d, n_control, iter(shuffled), df, two_sided) == first


@few
@given(st.floats(0.1, 8), controls, sizes, dfs)
def test_either_direction_together_are_no_likelier_than_both_one_by_one(
    d: float, n_control: int, n_others: list[int], df: float
) -> None:
    one = many_to_one_sf(d, n_control, n_others, df, two_sided=False)
    two = many_to_one_sf(d, n_control, n_others, df)
    assert one * (1 - 1e-12) <= two <= 2 * one * (1 + 1e-12)


def test_at_large_df_the_maximum_tends_to_that_with_known_sigma() -> None:
    known = many_to_one_sf(3.1, 8, [8] * 6, math.inf)
    distances = [abs(many_to_one_sf(3.1, 8, [8] * 6, df) / known - 1) for df in (1e3, 1e5, 1e7)]
    assert distances[0] > 50 * distances[1] > 2500 * distances[2] > 0


def test_the_ends_of_the_scale_have_their_limits() -> None:
    ends = np.array([0.0, math.inf])
    for df in (1, 7.5, math.inf):
        assert many_to_one_sf(ends, 5, [5, 5], df).tolist() == [1.0, 0.0]
        assert many_to_one_log10_sf(ends, 5, [5, 5], df).tolist() == [0.0, -math.inf]
        assert many_to_one_sf(-ends, 5, [5, 5], df, two_sided=False)[1] == 1.0
    assert many_to_one_sf(-30.0, 5, [5, 6], 20, two_sided=False) == pytest.approx(1, rel=1e-14)
    assert many_to_one_sf(1e200, 6, [6, 6], 1) == pytest.approx(2 * t_two_sided(1e200, 1), rel=0.5)


def test_far_out_the_logarithm_goes_on() -> None:
    for d in (40.0, 500.0):
        one = t_two_sided_log10(d, math.inf)
        assert many_to_one_log10_sf(d, 5, [5] * 8, math.inf) == pytest.approx(one + math.log10(8), rel=1e-14)
    assert many_to_one_sf(500.0, 5, [5] * 8, math.inf) == 0.0


@pytest.mark.parametrize("two_sided", [True, False])
@pytest.mark.parametrize(
    ("n_control", "n_others", "df"), [(6, [6] * 20, 100.0), (1, [40, 2, 3], 1.0), (9, [4, 4, 7], math.inf)]
)
def test_a_value_has_the_same_bits_alone_and_in_any_array(
    n_control: int, n_others: list[int], df: float, two_sided: bool
) -> None:
    values = np.concatenate([np.zeros(1), np.geomspace(0.01, 200, 120)])
    rest = n_control, n_others, df, two_sided
    for function in (many_to_one_sf, many_to_one_log10_sf):
        together = function(values, *rest)
        assert [function(float(value), *rest) for value in values] == together.tolist()
        assert function(values[::-7], *rest).tolist() == together[::-7].tolist()
        assert function(values[:120].reshape(3, 40), *rest).tolist() == together[:120].reshape(3, 40).tolist()
        assert function(values[:0], *rest).shape == (0,)
        assert type(function(3, *rest)) is float
    some = np.array([0.999, 0.6, 0.05, 1e-9])
    points = many_to_one_isf(some, *rest)
    assert [many_to_one_isf(float(level), *rest) for level in some] == points.tolist()


REFUSED = [
    ((-1e-9, 5, [5, 5], 10), "a many-to-one statistic without its sign may not be negative"),
    ((math.nan, 5, [5, 5], 10), "a many-to-one statistic without its sign is not a number"),
    ((2.0, 5, [], 10), "one to 199 others are compared with a control, not 0"),
    ((2.0, 5, [5] * 200, 10), "one to 199 others are compared with a control, not 200"),
    ((2.0, 0, [5, 5], 10), "a mean is of at least one value, not of 0"),
    ((2.0, 5, [5, -3], 10), "a mean is of at least one value, not of -3"),
    ((2.0, 5, [5, math.nan], 10), "a mean is of at least one value, not of nan"),
    ((2.0, 5, [5, 5], 0.99), "degrees of freedom must be a number from 1 upwards or infinite, not 0.99"),
    ((2.0, 5, [5], math.nan), "degrees of freedom must be a number from 1 upwards or infinite, not nan"),
]


@pytest.mark.parametrize(("arguments", "words"), REFUSED)
def test_what_lies_outside_the_domain_is_refused_in_words(
    arguments: tuple[float, float, list[float], float], words: str
) -> None:
    for function in (many_to_one_sf, many_to_one_log10_sf):
        with pytest.raises(ValueError, match=words):
            function(*arguments)


@pytest.mark.parametrize("p", [0.0, 1.0, -0.05, 1.2, math.nan])
def test_a_level_that_is_no_probability_is_refused(p: float) -> None:
    with pytest.raises(ValueError, match="a probability between 0 and 1 is needed"):
        many_to_one_isf(p, 5, [5, 5], 10)
