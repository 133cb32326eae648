"""What holds for every tail and point: limits, identities, order, and the same bits in any company."""

import math
from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from assayfolio.statistics import tails

positive = st.floats(1e-6, 1e6)
dfs = st.floats(1, 1e6)
whole_dfs = st.integers(1, 100_000).map(float)
levels = st.floats(1e-12, 1 - 1e-12)


@given(positive, st.floats(1e-3, 0.5), dfs, dfs)
def test_a_larger_f_is_never_likelier(f: float, more: float, dfn: float, dfd: float) -> None:
    assert tails.f_sf(f * (1 + more), dfn, dfd) <= tails.f_sf(f, dfn, dfd) * (1 + 1e-12)
    assert tails.f_log10_sf(f * (1 + more), dfn, dfd) <= tails.f_log10_sf(f, dfn, dfd) + 1e-12


@given(st.floats(1e-3, 1e3), st.floats(1, 300), st.floats(1, 300))
@example(1.0, 1.0, 1.0)
def test_the_two_tails_of_f_are_one_another_s_upside_down(f: float, dfn: float, dfd: float) -> None:
    assert tails.f_sf(f, dfn, dfd) + tails.f_sf(1 / f, dfd, dfn) == pytest.approx(1, abs=1e-13)


@given(st.floats(-1e3, 1e3), dfs)
def test_t_is_symmetric(t: float, df: float) -> None:
    assert tails.t_sf(t, df) + tails.t_sf(-t, df) == pytest.approx(1, abs=2e-16)


@given(st.floats(1e-3, 50), dfs)
def test_the_square_of_t_is_f_on_one_df(t: float, df: float) -> None:
    # What t squared loses in rounding moves a far tail by up to t squared times as much.
    allowed = 1e-15 * (20 + t * t)
    assert tails.t_two_sided(t, df) == pytest.approx(tails.f_sf(t * t, 1, df), rel=allowed, abs=1e-300)
    assert tails.t_two_sided(-t, df) == tails.t_two_sided(t, df)


@given(st.floats(0, 300), st.integers(1, 50))
def test_chi_square_on_even_df_is_a_poisson_sum(x: float, pairs: int) -> None:
    terms = [math.exp(-x / 2)]
    for j in range(1, pairs):
        terms.append(terms[-1] * (x / 2) / j)
    assert tails.chi2_sf(x, 2 * pairs) == pytest.approx(math.fsum(terms), rel=1e-12)


@given(levels, whole_dfs, whole_dfs)
def test_f_points_and_tails_undo_each_other(p: float, dfn: float, dfd: float) -> None:
    point = tails.f_isf(p, dfn, dfd)
    smaller = min(p, 1 - p)
    assert tails.f_sf(point, dfn, dfd) == pytest.approx(p, abs=1e-10 * smaller + 2e-16)


@given(levels, dfs)
def test_t_points_and_tails_undo_each_other(p: float, df: float) -> None:
    assert tails.t_sf(tails.t_isf(p, df), df) == pytest.approx(p, rel=1e-12)


@given(levels, dfs)
def test_chi_square_points_and_tails_undo_each_other(p: float, df: float) -> None:
    point = tails.chi2_isf(p, df)
    assert tails.chi2_sf(point, df) == pytest.approx(p, rel=2e-15 * (20 + 10 * math.sqrt(df)))


@given(levels)
def test_the_lower_chi_square_point_is_the_upper_one_of_the_rest(p: float) -> None:
    # Over a range where 1 - p keeps enough digits to say so.
    share = 0.001 + 0.998 * p
    assert tails.chi2_ppf(share, 7.5) == pytest.approx(tails.chi2_isf(1 - share, 7.5), rel=1e-12)


LIMITS = [
    ("f_sf", (0.0, 3, 5), 1.0),
    ("f_sf", (math.inf, 3, 5), 0.0),
    ("f_log10_sf", (0.0, 3, 5), 0.0),
    ("f_log10_sf", (math.inf, 3, 5), -math.inf),
    ("f_log10_sf", (math.inf, 3, math.inf), -math.inf),
    ("f_isf", (1e-300, 1, 1), math.inf),
    ("t_sf", (0.0, 5), 0.5),
    ("t_sf", (math.inf, 5), 0.0),
    ("t_sf", (-math.inf, 5), 1.0),
    ("t_log10_sf", (math.inf, 5), -math.inf),
    ("t_two_sided", (0.0, 5), 1.0),
    ("t_two_sided", (-math.inf, 5), 0.0),
    ("t_isf", (0.5, 5), 0.0),
    ("chi2_sf", (0.0, 5), 1.0),
    ("chi2_sf", (math.inf, 5), 0.0),
    ("chi2_log10_sf", (math.inf, 5), -math.inf),
    ("normal_sf", (0.0,), 0.5),
    ("normal_sf", (math.inf,), 0.0),
    ("normal_sf", (-math.inf,), 1.0),
    ("normal_log10_sf", (math.inf,), -math.inf),
]


@pytest.mark.parametrize(("name", "arguments", "value"), LIMITS)
def test_the_ends_of_the_scale_have_their_limits(
    name: str, arguments: tuple[float, ...], value: float
) -> None:
    assert getattr(tails, name)(*arguments) == value


REFUSED = [
    ("f_sf", (-0.1, 3, 5), "F may not be negative"),
    ("f_sf", (math.nan, 3, 5), "F is not a number"),
    ("f_sf", (1.0, 0.5, 5), "numerator degrees of freedom must be a number from 1 upwards, not 0.5"),
    ("f_sf", (1.0, math.inf, 5), "numerator degrees of freedom"),
    ("f_sf", (1.0, 3, 0), "denominator degrees of freedom"),
    ("f_sf", (1.0, 3, math.nan), "denominator degrees of freedom"),
    ("f_isf", (0.0, 3, 5), "a probability between 0 and 1 is needed, not 0.0"),
    ("f_isf", (1.0, 3, 5), "a probability between 0 and 1 is needed, not 1.0"),
    ("t_sf", (math.nan, 5), "t is not a number"),
    ("t_sf", (1.0, 0.9), "degrees of freedom must be a number from 1 upwards or infinite, not 0.9"),
    ("t_isf", (math.nan, 5), "a probability between 0 and 1 is needed"),
    ("chi2_sf", (-1.0, 5), "chi-square may not be negative"),
    ("chi2_sf", (1.0, math.inf), "degrees of freedom must be a number from 1 upwards"),
    ("chi2_ppf", (-0.1, 5), "a probability between 0 and 1 is needed"),
    ("normal_isf", (1.5,), "a probability between 0 and 1 is needed"),
]


@pytest.mark.parametrize(("name", "arguments", "words"), REFUSED)
def test_what_lies_outside_the_domain_is_refused_in_words(
    name: str, arguments: tuple[float, ...], words: str
) -> None:
    with pytest.raises(ValueError, match=words):
        getattr(tails, name)(*arguments)


ONE_ARGUMENT: list[Callable[..., object]] = [
    lambda x: tails.f_sf(x, 3, 20),
    lambda x: tails.f_log10_sf(x, 3, 1e6),
    lambda x: tails.t_sf(x, 4.5),
    lambda x: tails.chi2_log10_sf(x, 7),
    lambda x: tails.normal_sf(x),
    lambda x: tails.f_isf(x / (1 + x) / 2 + 1e-4, 5, 33),
    lambda x: tails.t_isf(x / (1 + x) / 2 + 1e-4, 12),
]


@pytest.mark.parametrize("function", ONE_ARGUMENT)
def test_a_value_has_the_same_bits_alone_and_in_any_array(function: Callable[..., object]) -> None:
    values = np.concatenate([np.linspace(0.0, 2.0, 61), np.geomspace(2.1, 90.0, 40)])
    together = np.asarray(function(values))
    alone = [function(float(value)) for value in values]
    assert all(type(one) is float for one in alone)
    assert together.tolist() == alone
    assert np.asarray(function(values[::-3])).tolist() == alone[::-3]
    assert (
        np.asarray(function(values[:100].reshape(4, 25))).tolist() == together[:100].reshape(4, 25).tolist()
    )
    assert np.asarray(function(values[:0])).shape == (0,)


def test_arguments_are_left_as_they_were() -> None:
    values = np.array([-1.0, 0.0, 2.0])
    tails.t_sf(values, 5)
    tails.chi2_isf(np.abs(values) / 3 + 0.1, 5)
    assert values.tolist() == [-1.0, 0.0, 2.0]
