"""Many levels: families of thousands of rows, with the pooled error and with separate variances."""

from math import isfinite, sqrt

import numpy as np
import pytest

from assayfolio.exact import to_double
from assayfolio.statistics.comparisons import GREATER, TWO_SIDED, compare
from assayfolio.statistics.distributions import studentized_range_isf, studentized_range_log10_sf
from assayfolio.statistics.estimates import pair_estimates
from assayfolio.statistics.many_to_one_comparisons import compare_dunnett
from assayfolio.statistics.points_by_df import points_by_df
from assayfolio.statistics.separate_variances import compare_games_howell, compare_separate
from assayfolio.statistics.simultaneous import compare_scheffe
from assayfolio.statistics.tails import t_isf
from support.reference import analysed


def drawn(levels: int):
    generator = np.random.default_rng(7)
    return analysed(
        {
            f"L{at:03d}": [
                f"{value:.3f}" for value in generator.normal(9.0, 0.2 + 0.01 * (at % 9), 4 + at % 5)
            ]
            for at in range(levels)
        }
    )


@pytest.mark.parametrize("level", [0.25, 0.025, 1e-4, 1e-9])
@pytest.mark.parametrize("octave", [0, 1, 2, 4, 9, 16])
def test_points_of_t_from_the_curve_are_those_of_the_distribution(level, octave):
    dfs = np.exp2(octave + np.linspace(0.001, 0.999, 17)).tolist()
    points = points_by_df(lambda df: t_isf(level, df), dfs)
    assert points == pytest.approx([t_isf(level, df) for df in dfs], rel=1e-13)


@pytest.mark.parametrize("k", [3, 30, 200])
@pytest.mark.parametrize("octave", [0, 2, 6])
def test_points_of_the_range_from_the_curve_are_those_of_the_distribution(k, octave):
    dfs = np.exp2(octave + np.linspace(0.001, 0.999, 17)).tolist()
    points = points_by_df(lambda df: studentized_range_isf(0.01, k, df), dfs)
    assert points == pytest.approx([studentized_range_isf(0.01, k, df) for df in dfs], rel=1e-13)


def test_points_at_few_degrees_of_freedom_or_below_zero_are_the_distributions_own():
    few = [3.5, 7.25, 7.25, 3.75]
    assert points_by_df(lambda df: t_isf(0.01, df), few) == [t_isf(0.01, df) for df in few]
    many = np.linspace(4.1, 7.9, 40).tolist()
    assert points_by_df(lambda df: t_isf(0.6, df), many) == [t_isf(0.6, df) for df in many]


def test_each_of_many_rows_has_its_own_tail_and_interval():
    analysis = drawn(20)
    pairs = pair_estimates(analysis)
    separate = compare_separate(pairs, "bonferroni", GREATER, 0.05)
    games_howell = compare_games_howell(analysis, pairs, 0.05)
    assert len(separate) == len(games_howell) == 190
    for at in (0, 50, 189):
        (alone,) = compare_separate([pairs[at]], "none", GREATER, 0.05 / 190)
        assert (separate[at].df, separate[at].tail) == (alone.df, alone.tail)
        assert separate[at].interval[0] == pytest.approx(alone.interval[0], rel=1e-11)
        row = games_howell[at]
        log10_p = studentized_range_log10_sf(abs(to_double(row.statistic)) * sqrt(2), 20, row.df)
        assert row.adjusted.log10_p == pytest.approx(log10_p, abs=1e-12)
        width = studentized_range_isf(0.05, 20, row.df) * to_double(row.se) * sqrt(2)
        assert row.interval[1] - row.interval[0] == pytest.approx(width, rel=1e-11)


def test_two_hundred_levels():
    analysis = drawn(200)
    pairs = pair_estimates(analysis)
    for rows in (
        compare(analysis, pairs, "hochberg", TWO_SIDED, 0.05),
        compare_scheffe(analysis, pairs, 0.05),
        compare_separate(pairs[::20], "holm", TWO_SIDED, 0.05),
        compare_dunnett(analysis, "L100", TWO_SIDED, 0.05),
    ):
        assert all(row.tail.p <= row.adjusted.p * (1 + 1e-12) for row in rows)
        assert all(isfinite(row.adjusted.log10_p) for row in rows)
    assert len(compare_dunnett(analysis, "L100", TWO_SIDED, 0.05)) == 199
