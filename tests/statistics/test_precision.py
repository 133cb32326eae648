"""Precision from a random-effects layout: components, their intervals, limits, and the mean's uncertainty."""

from dataclasses import replace
from fractions import Fraction
from math import isclose, sqrt

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from assayfolio.exact import Decimal10, ExactSums, Root, to_double
from assayfolio.statistics.intraclass import f_icc_interval, wald_ratio_interval
from assayfolio.statistics.mean_squares import (
    Part,
    modified_large_sample_interval,
    satterthwaite_df,
    sd_interval_by_chi_square,
)
from assayfolio.statistics.oneway import NotComputableError, OneWay, one_way
from assayfolio.statistics.precision import (
    BETWEEN_LEVELS,
    POOLED,
    Precision,
    precision,
    repeatability,
    unavailable,
)
from assayfolio.statistics.tails import f_isf, t_isf
from support.reference import analysed

NINETY_FIVE = Fraction(95, 100)

Data = dict[str, list[Decimal10]]

values = st.builds(Decimal10, st.integers(-(10**6), 10**6), st.integers(-4, 2))


@st.composite
def measured(draw: st.DrawFn) -> Data:
    """Two to five levels of one to six values, with something varying within a level."""
    levels = draw(st.lists(st.lists(values, min_size=1, max_size=6), min_size=2, max_size=5))
    spread = draw(st.integers(1, 9))
    levels[0] = [*levels[0], Decimal10(levels[0][0].mantissa + spread, levels[0][0].exponent)]
    return {f"L{at}": listed for at, listed in enumerate(levels)}


@st.composite
def balanced(draw: st.DrawFn) -> Data:
    """Two to five levels of the same number of values, with something varying within a level."""
    n = draw(st.integers(2, 6))
    levels = draw(st.lists(st.lists(values, min_size=n, max_size=n), min_size=2, max_size=5))
    assume(any(len({value.fraction for value in level}) > 1 for level in levels))
    return {f"L{at}": listed for at, listed in enumerate(levels)}


def analysis_of(data: Data) -> OneWay:
    return one_way([(level, ExactSums.of(listed)) for level, listed in data.items()])


def found_in(data: Data) -> Precision:
    return precision(analysis_of(data), NINETY_FIVE)


TEXTS = {
    "day 1": ["10.1", "10.3", "10.2"],
    "day 2": ["10.6", "10.9", "10.7"],
    "day 3": ["9.8", "10.0", "10.2"],
}


def test_the_total_variance_is_the_sum_of_its_components():
    found = precision(analysed(TEXTS), NINETY_FIVE)
    assert found.total.variance == found.repeatability.variance + found.between.variance
    assert found.icc == found.between.variance / found.total.variance


@given(measured())
def test_components_and_mean_squares_say_the_same(data):
    analysis, found = analysis_of(data), found_in(data)
    raw = found.between.raw_variance
    assert found.total.variance == found.repeatability.variance + max(Fraction(0), raw)
    assert found.total.raw_variance == found.repeatability.variance + raw
    assert found.repeatability.variance + found.n0 * raw == analysis.ms_between
    assert 1 <= found.n0 <= Fraction(found.n_total, found.k)
    assert found.total.raw_variance >= 0


@given(measured(), st.randoms(use_true_random=False))
def test_neither_the_order_of_rows_nor_of_levels_matters(data, random):
    shuffled = {
        level: random.sample(listed, len(listed))
        for level, listed in random.sample(list(data.items()), len(data))
    }
    before, after = found_in(data), found_in(shuffled)
    # The ends of Wald's interval are sums over the levels in their order, stated at 12 digits.
    assert after.icc_interval == pytest.approx(before.icc_interval, rel=1e-11, abs=1e-15)
    assert replace(after, icc_interval=None) == replace(before, icc_interval=None)


@given(measured(), st.integers(-20, 20))
def test_another_power_of_ten_as_the_unit_scales_exactly(data, power):
    scaled = {
        level: [Decimal10(value.mantissa, value.exponent + power) for value in listed]
        for level, listed in data.items()
    }
    before, after, unit = found_in(data), found_in(scaled), Fraction(10) ** power
    assert after.repeatability.variance == before.repeatability.variance * unit**2
    assert after.between.raw_variance == before.between.raw_variance * unit**2
    assert after.total.variance == before.total.variance * unit**2
    assert after.total.limit.square == before.total.limit.square * unit**2
    assert (after.n0, after.icc, after.total.df) == (before.n0, before.icc, before.total.df)
    assert after.icc_interval == before.icc_interval
    assert after.repeatability.relative_percent == before.repeatability.relative_percent
    assert after.mean.way == before.mean.way
    assert after.mean.u.square == before.mean.u.square * unit**2
    for scaled_ends, ends in [
        (after.repeatability.interval, before.repeatability.interval),
        (after.total.interval, before.total.interval),
        (after.total.satterthwaite_interval, before.total.satterthwaite_interval),
    ]:
        assert scaled_ends == pytest.approx([end * float(unit) for end in ends], rel=2e-11, abs=0)


@given(measured(), st.builds(Decimal10, st.integers(-(10**15), 10**15), st.integers(-4, 4)))
def test_a_constant_added_to_every_value_moves_nothing_but_the_mean(data, constant):
    exponent = min(-4, constant.exponent)

    def plus(value: Decimal10) -> Decimal10:
        units = (value.fraction + constant.fraction) * Fraction(10) ** -exponent
        return Decimal10(int(units), exponent)

    before, after = (
        found_in(data),
        found_in({level: list(map(plus, listed)) for level, listed in data.items()}),
    )
    assert after.repeatability.interval == before.repeatability.interval
    assert replace(after.total, relative_percent=None) == replace(before.total, relative_percent=None)
    assert (after.icc, after.icc_interval) == (before.icc, before.icc_interval)
    assert after.mean.u == before.mean.u
    assert after.mean.mean == before.mean.mean + constant.fraction


@given(balanced(), st.sampled_from([0.5, 0.1, 0.05, 0.01, 1e-4]))
def test_for_equal_n_walds_interval_is_the_one_from_f(data, alpha):
    analysis = analysis_of(data)
    by_wald = [rho / (1 + rho) for rho in wald_ratio_interval(analysis, alpha)]
    by_f = [max(0.0, end) for end in f_icc_interval(analysis, alpha)]
    assert by_wald == pytest.approx(by_f, rel=1e-9, abs=1e-13)


@given(balanced())
def test_for_equal_n_the_mean_of_level_means_has_the_uncertainty_of_ms_between(data):
    analysis, found = analysis_of(data), found_in(data)
    between_levels, pooled = found.mean_ways
    assert found.balanced
    assert found.n0 == analysis.levels[0].n
    assert between_levels.mean == pooled.mean == analysis.grand_mean
    assert between_levels.u == Root.of(analysis.ms_between / analysis.n_total)
    assert (between_levels.df, pooled.df) == (analysis.k - 1, analysis.n_total - 1)


@given(measured())
def test_walds_ends_solve_the_equation_they_come_from(data):
    analysis, alpha = analysis_of(data), 0.05
    points = (float(f_isf(alpha / 2, analysis.df_between, analysis.df_within)),)
    points += (float(f_isf(1 - alpha / 2, analysis.df_between, analysis.df_within)),)
    for rho, point in zip(wald_ratio_interval(analysis, alpha), points, strict=True):
        ratio = weighted_ratio(analysis, Fraction(rho))
        if rho == 0:
            assert ratio <= point * (1 + 1e-12)
        else:
            assert isclose(ratio, point, rel_tol=1e-9)


def weighted_ratio(analysis: OneWay, rho: Fraction) -> float:
    """The weighted mean square of the level means at `rho`, over the mean square within."""
    weights = [level.n / (1 + rho * level.n) for level in analysis.levels]
    centre = sum(w * level.mean for w, level in zip(weights, analysis.levels, strict=True)) / sum(weights)
    squares = sum(w * (level.mean - centre) ** 2 for w, level in zip(weights, analysis.levels, strict=True))
    return to_double(squares / analysis.df_between / analysis.ms_within)


def test_limits_are_two_point_eight_standard_deviations_exactly():
    found = precision(analysed(TEXTS), NINETY_FIVE)
    assert found.repeatability.limit.square == Fraction(784, 100) * found.repeatability.variance
    assert found.total.limit.square == Fraction(784, 100) * found.total.variance


def test_relative_standard_deviations_are_in_percent_of_the_absolute_mean():
    below_zero = {level: [f"-{text}" for text in texts] for level, texts in TEXTS.items()}
    for data in (TEXTS, below_zero):
        analysis = analysed(data)
        found = precision(analysis, NINETY_FIVE)
        mean = abs(to_double(analysis.grand_mean))
        for spread in (found.repeatability, found.between, found.total):
            assert spread.relative_percent is not None
            assert to_double(spread.relative_percent) == pytest.approx(
                100 * to_double(spread.sd) / mean, rel=1e-14
            )


def test_repeatability_alone_is_the_same_as_within_a_random_effects_analysis():
    analysis = analysed(TEXTS)
    assert repeatability(analysis, NINETY_FIVE) == precision(analysis, NINETY_FIVE).repeatability


def test_a_larger_confidence_gives_wider_intervals():
    analysis = analysed(TEXTS)
    narrow, wide = precision(analysis, Fraction(8, 10)), precision(analysis, Fraction(99, 100))
    for inner, outer in [
        (narrow.repeatability.interval, wide.repeatability.interval),
        (narrow.total.interval, wide.total.interval),
        (narrow.total.satterthwaite_interval, wide.total.satterthwaite_interval),
        (narrow.icc_interval, wide.icc_interval),
        (narrow.mean.interval, wide.mean.interval),
    ]:
        assert outer[0] <= inner[0] < inner[1] < outer[1]


def test_one_mean_square_alone_has_its_exact_interval_by_either_method():
    parts = [Part(Fraction(1, 3), Fraction(7), 9), Part(Fraction(0), Fraction(5), 4)]
    assert satterthwaite_df(parts) == 9
    exact = sd_interval_by_chi_square(Fraction(7, 3), 9, 0.05)
    by_mls = [sqrt(end) for end in modified_large_sample_interval(parts, 0.05)]
    assert by_mls == pytest.approx(exact, rel=1e-11)


def test_where_levels_differ_less_than_values_the_zero_is_stated_and_the_mean_is_pooled():
    found = precision(analysed({"a": ["1", "5", "9"], "b": ["2", "5", "8"]}), NINETY_FIVE)
    assert found.between.truncated
    assert (found.between.raw_variance, found.between.variance) == (Fraction(-25, 6), 0)
    assert found.total.variance == found.repeatability.variance == Fraction(25, 2)
    assert found.total.df == found.repeatability.df == 4
    assert found.total.satterthwaite_interval == found.repeatability.interval
    assert (found.icc, found.icc_raw) == (0, Fraction(-1, 2))
    assert (found.mean.way, found.mean.df) == (POOLED, 5)
    assert found.mean.u.square == Fraction(50, 5 * 6)


def test_where_levels_differ_more_the_mean_rests_on_the_level_means():
    found = precision(analysed(TEXTS), NINETY_FIVE)
    assert (found.mean.way, found.mean.df) == (BETWEEN_LEVELS, 2)
    half = float(t_isf(0.025, 2)) * to_double(found.mean.u)
    mean = to_double(found.mean.mean)
    assert found.mean.interval == pytest.approx((mean - half, mean + half), rel=1e-11)


def test_with_nothing_varying_within_the_levels_the_total_rests_on_the_levels():
    analysis = analysed({"a": ["1", "1"], "b": ["2", "2"], "c": ["6", "6"]})
    found = precision(analysis, NINETY_FIVE)
    assert (found.repeatability.variance, found.repeatability.interval) == (0, None)
    assert (found.icc, found.icc_interval) == (1, None)
    assert found.total.df == 2
    assert found.total.interval == pytest.approx(found.total.satterthwaite_interval, rel=1e-11)
    assert {what for what, _ in unavailable(found)} == {
        "interval of the repeatability standard deviation",
        "interval of the intraclass correlation",
    }
    with pytest.raises(NotComputableError, match="nothing varies within the levels"):
        wald_ratio_interval(analysis, 0.05)


def test_with_all_values_equal_every_spread_is_zero_and_has_no_interval():
    found = precision(analysed({"a": ["3", "3"], "b": ["3", "3", "3"]}), NINETY_FIVE)
    assert found.total.variance == found.between.variance == found.repeatability.variance == 0
    assert (
        found.total.interval
        is found.between.interval
        is found.total.df
        is found.icc
        is found.icc_interval
        is found.mean.interval
        is None
    )
    assert found.mean.u == Root(0, Fraction(0))
    assert found.total.relative_percent == Root(0, Fraction(0))
    assert len(unavailable(found)) == 5


def test_with_a_mean_of_zero_there_is_no_relative_standard_deviation():
    found = precision(analysed({"a": ["-1", "1"], "b": ["-2", "2"]}), NINETY_FIVE)
    assert found.repeatability.relative_percent is found.total.relative_percent is None
    assert ("relative standard deviations", "the mean that is stated is zero") in unavailable(found)


def test_a_complete_answer_lacks_nothing():
    assert unavailable(precision(analysed(TEXTS), NINETY_FIVE)) == ()


def test_levels_of_one_value_add_to_the_levels_alone():
    found = precision(analysed({"a": ["1"], "b": ["4"], "c": ["2", "3"]}), NINETY_FIVE)
    assert found.repeatability.variance == Fraction(1, 2)
    assert found.repeatability.df == 1
    assert found.n0 == (4 - Fraction(6, 4)) / 2


def test_two_hundred_levels_of_unequal_n():
    data = {f"L{i}": [str(i % 7 + j % 3) for j in range(2 + i % 5)] for i in range(200)}
    found = precision(analysed(data), NINETY_FIVE)
    assert found.icc is not None
    assert found.icc_interval[0] < found.icc < found.icc_interval[1]
    assert found.total.interval[0] < to_double(found.total.sd) < found.total.interval[1]


@pytest.mark.parametrize("confidence", [0, 1, Fraction(-1, 2), 1.5, float("nan")])
def test_a_confidence_lies_between_zero_and_one(confidence):
    with pytest.raises(ValueError, match="between 0 and 1"):
        precision(analysed(TEXTS), confidence)
    with pytest.raises(ValueError, match="between 0 and 1"):
        repeatability(analysed(TEXTS), confidence)


def test_a_variance_ratio_beyond_doubles_is_refused_in_words():
    data = {
        "a": [Decimal10(0, 0), Decimal10(1, -60)],
        "b": [Decimal10(10**37, 60), Decimal10(10**37, 60)],
        "c": [Decimal10(3 * 10**37, 60)],
    }
    with pytest.raises(NotComputableError, match="powers of ten"):
        found_in(data)


@pytest.mark.slow
@pytest.mark.parametrize("sizes", [(3, 3, 3, 3, 3, 3), (2, 5, 3, 8, 4, 3)])
def test_intervals_cover_what_generated_the_data_as_often_as_they_say(sizes):
    # 400 layouts with s_L = 1.5 and s_r = 1: a true 95 % shows as 91.7 to 98.3 % in 99.7 % of such trials.
    random, trials = np.random.default_rng(20240229), 400
    truth = {"s_r": 1.0, "total": sqrt(1 + 1.5**2), "icc": 1.5**2 / (1 + 1.5**2), "mean": 50.0}
    covered = dict.fromkeys(truth, 0)
    for _ in range(trials):
        levels = 50 + 1.5 * random.standard_normal(len(sizes))
        draws = [level + random.standard_normal(n) for level, n in zip(levels, sizes, strict=True)]
        groups = {f"L{i}": [Decimal10(round(x * 1e6), -6) for x in listed] for i, listed in enumerate(draws)}
        found = found_in(groups)
        intervals = {
            "s_r": found.repeatability.interval,
            "total": found.total.interval,
            "icc": found.icc_interval,
            "mean": found.mean_ways[0].interval,
        }
        for what, (lower, upper) in intervals.items():
            covered[what] += lower <= truth[what] <= upper
    shares = {what: count / trials for what, count in covered.items()}
    assert all(0.917 <= share <= 0.983 for share in shares.values()), shares
