"""The one-way analysis of variance: what it is for ordinary data, and what it answers where data are odd."""

from fractions import Fraction
from math import sqrt

import pytest

from assayfolio.exact import ExactSums, parse_decimal, to_double
from assayfolio.statistics.adjustment import Tail
from assayfolio.statistics.comparisons import TWO_SIDED, compare
from assayfolio.statistics.estimates import pair_estimates
from assayfolio.statistics.inference import mean_interval, omnibus_test, sd_interval
from assayfolio.statistics.oneway import NotComputableError, one_way
from support.reference import analysed

# Levels 1 and 2 differ by 2; by hand: SS between 2^2/2 * 2, SS within 2 + 2.
BY_HAND = {"A": ["1", "2", "3"], "B": ["3", "4", "5"]}


def test_a_table_that_can_be_checked_by_hand():
    analysis = analysed(BY_HAND)
    assert (analysis.ss_between, analysis.ss_within, analysis.ss_total) == (6, 4, 10)
    assert (analysis.df_between, analysis.df_within, analysis.n_total) == (1, 4, 6)
    assert (analysis.ms_between, analysis.ms_within) == (6, 1)
    assert analysis.f == 6
    assert analysis.r_squared == Fraction(6, 10)
    assert analysis.grand_mean == 3


def test_levels_keep_the_order_in_which_they_are_given():
    analysis = analysed({"zinc": ["1", "2"], "alum": ["3", "4"]})
    assert [level.level for level in analysis.levels] == ["zinc", "alum"]


def test_a_level_is_found_by_its_name():
    assert analysed(BY_HAND).summary_of("B").mean == 4
    with pytest.raises(KeyError):
        analysed(BY_HAND).summary_of("C")


@pytest.mark.parametrize(
    ("data", "reason"),
    [
        ({}, "0 level"),
        ({"A": ["1", "2"]}, "1 level"),
        ({"A": ["1", "2"], "B": []}, "level 'B' has no values"),
        ({"A": ["1"], "B": ["2"], "C": ["3"]}, "one value at every level"),
    ],
)
def test_data_from_which_no_error_can_be_estimated_are_refused(data, reason):
    with pytest.raises(NotComputableError, match=reason):
        analysed(data)


def test_one_value_at_one_level_takes_part_with_the_pooled_error():
    analysis = analysed({"A": ["1", "2", "3"], "B": ["7"]})
    lone = analysis.summary_of("B")
    assert analysis.df_within == 2
    assert analysis.ms_within == 1
    assert lone.sd is None
    assert sd_interval(lone, 0.05) is None
    lower, upper = mean_interval(analysis, lone, 0.05)
    assert lower + upper == 14
    t = 0.95 / sqrt(2 * 0.975 * 0.025)  # t(0.975; 2), for which there is a closed form; s is 1
    assert (upper - lower) / 2 == pytest.approx(t, rel=1e-11)


def test_all_values_equal():
    analysis = analysed({"A": ["4.20", "4.2"], "B": ["4.200", "42e-1"]})
    assert (analysis.ss_between, analysis.ss_within, analysis.ss_total) == (0, 0, 0)
    assert analysis.f is None
    assert analysis.r_squared is None
    assert all(sd_interval(level, 0.05) is None for level in analysis.levels)
    with pytest.raises(NotComputableError, match="nothing varies within the levels"):
        omnibus_test(analysis, 0.05)


def test_values_that_do_not_vary_within_levels_of_different_means():
    analysis = analysed({"A": ["1.1", "1.1"], "B": ["1.2", "1.2"]})
    assert analysis.ss_within == 0
    assert analysis.f is None
    assert analysis.r_squared == 1
    assert analysis.levels[0].sd is not None
    assert to_double(analysis.levels[0].sd) == 0.0
    with pytest.raises(NotComputableError, match="nothing varies within the levels"):
        omnibus_test(analysis, 0.05)


def test_equal_means_give_f_zero_and_p_one():
    test = omnibus_test(analysed({"A": ["1", "3"], "B": ["2", "2.5", "1.5"]}), 0.05)
    assert test.tail == Tail(1.0, 0.0)


def test_with_two_levels_f_is_the_square_of_t():
    analysis = analysed({"A": ["5.31", "5.02", "5.66"], "B": ["5.94", "6.13", "5.7", "5.99"]})
    row = compare(analysis, pair_estimates(analysis), "none", TWO_SIDED, 0.05)[0]
    assert row.statistic.square == analysis.f
    assert row.tail.p == pytest.approx(omnibus_test(analysis, 0.05).tail.p, rel=1e-13)


def test_two_hundred_levels():
    data = {f"L{at:03d}": [f"{at % 7}.{at % 10}", f"{at % 5}.5"] for at in range(200)}
    analysis = analysed(data)
    values = {level: [Fraction(text) for text in texts] for level, texts in data.items()}
    means = {level: sum(listed) / 2 for level, listed in values.items()}
    grand = sum(means.values()) / 200
    assert (analysis.k, analysis.n_total, analysis.df_within) == (200, 400, 200)
    assert analysis.ss_within == sum((v - means[level]) ** 2 for level in data for v in values[level])
    assert analysis.ss_between == sum(2 * (mean - grand) ** 2 for mean in means.values())
    assert 0 < omnibus_test(analysis, 0.05).tail.p < 1


def test_a_million_values_at_once_are_as_exact_as_three():
    # The sums of 1, 2, ..., n are known; n(n^2 - 1)/12 is the sum of squares about their mean.
    n = 10**6
    squares = n * (n + 1) * (2 * n + 1) // 6
    sums = ExactSums(n, n * (n + 1) // 2, squares, 0)
    shifted = ExactSums(n, sums.total + n, squares + 2 * sums.total + n, 0)  # each value one more
    analysis = one_way([("A", sums), ("B", shifted)])
    assert analysis.ss_within == 2 * Fraction(n * (n * n - 1), 12)
    assert analysis.ss_between == Fraction(n, 2)
    assert analysis.f == Fraction(n, 2) / (analysis.ss_within / (2 * n - 2))


def test_a_ratio_beyond_the_range_of_doubles_is_told_not_raised_as_an_overflow():
    wide = {"A": ["9" * 38 + "e60", "9" * 38 + "e60"], "B": ["0", "1e-60"]}
    analysis = analysed(wide)
    assert analysis.f is not None
    assert analysis.f > 10**308
    with pytest.raises(NotComputableError, match="150 powers of ten"):
        omnibus_test(analysis, 0.05)


def test_the_interval_for_a_standard_deviation_of_two_values():
    # With one degree of freedom chi-square is the square of a standard normal variable: the points are
    # z(0.9875)^2 and z(0.5125)^2 for 97.5 and 2.5 per cent.
    level = analysed({"A": ["1.0", "1.2"], "B": ["1", "2"]}).levels[0]
    assert level.sd is not None
    sd = to_double(level.sd)
    interval = sd_interval(level, 0.05)
    assert interval is not None
    assert interval[0] == pytest.approx(sd / 2.241402727604947, rel=1e-11)
    assert interval[1] == pytest.approx(sd / 0.031337982021426625, rel=1e-11)


@pytest.mark.parametrize("per_level", [2, 3, 10, 60])
def test_p_of_three_levels_is_a_power_of_the_unexplained_share(per_level):
    # For two degrees of freedom between levels: p = (SS within / SS total)^(df within / 2), in closed form.
    data = {
        level: [f"{10 + shift + (at * 7 % 11) / 10:.1f}" for at in range(per_level)]
        for level, shift in (("A", 0.0), ("B", 0.9), ("C", 30.0))
    }
    analysis = analysed(data)
    tail = omnibus_test(analysis, 0.05).tail
    share = to_double(analysis.ss_within / analysis.ss_total)
    assert tail.p == pytest.approx(share ** (analysis.df_within / 2), rel=1e-12)


def test_the_pooled_error_serves_every_mean():
    analysis = analysed({"A": ["1", "2", "3", "6"], "B": ["3", "4"]})
    for level in analysis.levels:
        lower, upper = mean_interval(analysis, level, 0.05)
        t = 2.7764451051977943  # t(0.975; 4)
        assert (upper - lower) / 2 == pytest.approx(t * sqrt(analysis.ms_within / level.n), rel=1e-11)


def test_a_decimal_is_not_what_a_double_makes_of_it():
    data = {"A": ["0.1", "0.2"], "B": ["0.3", "0.4"]}
    assert analysed(data).levels[0].mean == Fraction(3, 20)
    assert parse_decimal("0.1").fraction != Fraction(0.1)
