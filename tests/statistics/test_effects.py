"""Effect sizes: their definitions, their limits, and what is refused."""

from fractions import Fraction

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from assayfolio.exact import Root, to_double
from assayfolio.statistics.effects import effect_sizes, noncentrality_interval
from assayfolio.statistics.noncentral import noncentral_f_cdf, noncentral_f_sf
from assayfolio.statistics.oneway import NotComputableError
from support.reference import analysed

# SSB = 6, SSW = 4, N = 6, k = 3: F = 3 / (4/3).
DATA = {"a": ["1", "3"], "b": ["3", "3"], "c": ["3", "5"]}


def test_by_hand():
    analysis = analysed({"a": ["1", "3"], "b": ["2", "4"], "c": ["4", "6"]})
    assert (analysis.ss_between, analysis.ss_within) == (Fraction(28, 3), 6)
    sizes = effect_sizes(analysis, 0.95)
    assert sizes.eta_squared == Fraction(28, 46)
    assert sizes.omega_squared == (Fraction(28, 3) - 4) / (Fraction(46, 3) + 2)
    assert sizes.epsilon_squared == (Fraction(28, 3) - 4) / Fraction(46, 3)
    assert sizes.cohen_f == Root.of(Fraction(28, 18))


def test_omega_and_epsilon_stay_negative_where_f_is_below_one():
    sizes = effect_sizes(analysed({"a": ["1", "3"], "b": ["1", "3.1"]}), 0.95)
    assert sizes.eta_squared > 0
    assert sizes.omega_squared < 0
    assert sizes.epsilon_squared < 0
    assert sizes.cohen_f_ci is not None
    assert sizes.cohen_f_ci[0] == 0


values = st.lists(st.integers(-50, 50).map(str), min_size=1, max_size=6)


@given(st.dictionaries(st.sampled_from("abcdef"), values, min_size=2))
def test_sizes_are_in_order_and_the_interval_holds_f_or_lies_below_it(data):
    assume(any(len(set(texts)) > 1 for texts in data.values()))
    analysis = analysed(data)
    sizes = effect_sizes(analysis, 0.9)
    assert sizes.omega_squared <= sizes.epsilon_squared <= sizes.eta_squared or sizes.epsilon_squared < 0
    assert sizes.cohen_f is not None
    assert sizes.cohen_f_ci is not None
    # The F of a sample is biased upwards, never so far downwards that the limit falls short of nothing.
    assert 0 <= sizes.cohen_f_ci[0] <= sizes.cohen_f_ci[1]
    square = sizes.cohen_f.square
    assert sizes.eta_squared == square / (1 + square)


@given(st.integers(-6, 6), st.integers(-1000, 1000))
def test_neither_the_unit_nor_a_constant_changes_them(power, constant):
    moved = {level: [f"{float(text) + constant}e{power}" for text in texts] for level, texts in DATA.items()}
    assert effect_sizes(analysed(moved), 0.95) == effect_sizes(analysed(DATA), 0.95)


def test_the_limits_leave_half_the_rest_on_either_side():
    lower, upper = noncentrality_interval(7.0, 3, 20, 0.95)
    assert noncentral_f_sf(7.0, 3, 20, lower) == pytest.approx(0.025, rel=1e-12)
    assert noncentral_f_cdf(7.0, 3, 20, upper) == pytest.approx(0.025, rel=1e-12)


def test_more_confidence_takes_a_wider_interval():
    narrow, wide = noncentrality_interval(7.0, 3, 20, 0.9), noncentrality_interval(7.0, 3, 20, 0.99)
    assert wide[0] < narrow[0] < narrow[1] < wide[1]


def test_without_variation_within_levels_all_of_it_is_between_them_and_f_has_no_size():
    sizes = effect_sizes(analysed({"a": ["1", "1"], "b": ["2", "2"]}), 0.95)
    assert sizes.eta_squared == sizes.omega_squared == sizes.epsilon_squared == 1
    assert sizes.cohen_f is None
    assert sizes.cohen_f_ci is None


def test_without_any_variation_there_is_nothing_to_share_out():
    with pytest.raises(NotComputableError, match="all values are equal"):
        effect_sizes(analysed({"a": ["1", "1"], "b": ["1", "1"]}), 0.95)


def test_equal_means_have_no_effect():
    sizes = effect_sizes(analysed({"a": ["1", "3"], "b": ["1", "3"]}), 0.95)
    assert sizes.eta_squared == 0
    assert sizes.cohen_f is not None
    assert to_double(sizes.cohen_f) == 0
    assert sizes.cohen_f_ci == (0, 0)


def test_a_vast_f_is_refused_for_its_interval():
    with pytest.raises(NotComputableError, match="too large"):
        effect_sizes(analysed({"a": ["0", "1e-60"], "b": ["1", "1"]}), 0.95)


@pytest.mark.parametrize("confidence", [0.0, 1.0, -0.5])
def test_a_confidence_lies_between_none_and_full(confidence):
    with pytest.raises(ValueError, match="confidence"):
        effect_sizes(analysed(DATA), confidence)
