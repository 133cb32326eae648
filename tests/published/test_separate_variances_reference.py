"""Welch, Brown-Forsythe and Games-Howell against values computed independently with exact fractions.

Source: tests/vectors/heteroscedastic.json (its `source` says how it was made). Nine data sets, from n = 2 a
level to eight levels, a tail of 1e-9, equal means and a large offset.
"""

from collections.abc import Sequence
from fractions import Fraction
from math import sqrt

import pytest

from assayfolio.exact import to_double
from assayfolio.statistics.comparisons import TWO_SIDED, ComparisonResult
from assayfolio.statistics.distributions import studentized_range_isf
from assayfolio.statistics.estimates import pair_estimates
from assayfolio.statistics.oneway import OneWay
from assayfolio.statistics.separate_variances import compare_games_howell, compare_separate
from assayfolio.statistics.welch import brown_forsythe_means, separate_mean_interval, welch_test
from support.reference import analysed, cases_of, error_in_widths, relative_error

CASES = cases_of("heteroscedastic")
TOLERANCE = 1e-11

COMPARED = {
    "welch": {"F", "df1", "df2", "p", "weighted_mean"},
    "brown_forsythe": {"F", "df1", "df2", "p", "df1_mehrotra", "p_mehrotra"},
}
PAIR_COMPARED = {
    *("diff", "se", "t", "welch_df", "p_welch_t", "ci_welch_t"),
    *("q", "p_games_howell", "q_crit", "ci_games_howell"),
}


@pytest.fixture(params=CASES)
def name(request: pytest.FixtureRequest) -> str:
    return request.param


def case(name: str) -> tuple[OneWay, float, dict]:
    inputs = CASES[name]["inputs"]
    alpha = to_double(1 - Fraction(inputs["conf_level"]))
    return analysed(inputs["data"]), alpha, CASES[name]["expected"]


def test_every_quantity_of_the_reference_is_compared():
    assert len(CASES) == 9
    for one in CASES.values():
        expected = one["expected"]
        assert set(expected) == {*COMPARED, "pairs", "mean_ci_own_sd"}
        assert all(set(expected[part]) == quantities for part, quantities in COMPARED.items())
        assert all(set(pair) == PAIR_COMPARED for pair in expected["pairs"].values())
        assert set(expected["mean_ci_own_sd"]) == set(one["inputs"]["data"])


def test_welch(name):
    analysis, alpha, expected = case(name)
    found, expected = welch_test(analysis, alpha), expected["welch"]
    assert to_double(found.f) == float(expected["F"])
    assert found.df1 == expected["df1"]
    assert to_double(found.df2) == float(expected["df2"])
    assert relative_error(found.tail.p, expected["p"]) < TOLERANCE
    # The centre about which F is formed does not show in the result; here it is formed again.
    weights = [level.n * (level.n - 1) / level.ss for level in analysis.levels]
    centre = sum(w * level.mean for w, level in zip(weights, analysis.levels, strict=True)) / sum(weights)
    assert to_double(centre) == float(expected["weighted_mean"])


def test_brown_forsythe(name):
    analysis, _, expected = case(name)
    found, expected = brown_forsythe_means(analysis), expected["brown_forsythe"]
    assert to_double(found.f) == float(expected["F"])
    assert found.df1 == expected["df1"]
    assert to_double(found.df2) == float(expected["df2"])
    assert to_double(found.df1_mehrotra) == float(expected["df1_mehrotra"])
    assert relative_error(found.tail.p, expected["p"]) < TOLERANCE
    assert relative_error(found.tail_mehrotra.p, expected["p_mehrotra"]) < TOLERANCE


def by_label(rows: Sequence[ComparisonResult]) -> dict[str, ComparisonResult]:
    return {row.label.replace(" - ", "-"): row for row in rows}


def test_pairs_by_welchs_t(name):
    analysis, alpha, expected = case(name)
    rows = by_label(compare_separate(pair_estimates(analysis), "none", TWO_SIDED, alpha))
    for label, pair in expected["pairs"].items():
        row = rows[label]
        assert to_double(row.estimate) == float(pair["diff"])
        assert to_double(row.se) == float(pair["se"])
        assert to_double(row.statistic) == float(pair["t"])
        assert row.df == float(pair["welch_df"])
        assert relative_error(row.tail.p, pair["p_welch_t"]) < TOLERANCE
        assert error_in_widths(row.interval, pair["ci_welch_t"]) < TOLERANCE


def test_pairs_by_games_and_howell(name):
    analysis, alpha, expected = case(name)
    rows = by_label(compare_games_howell(analysis, pair_estimates(analysis), alpha))
    for label, pair in expected["pairs"].items():
        row = rows[label]
        assert relative_error(abs(to_double(row.statistic)) * sqrt(2), pair["q"]) < 1e-15
        assert relative_error(row.adjusted.p, pair["p_games_howell"]) < TOLERANCE
        assert relative_error(studentized_range_isf(alpha, analysis.k, row.df), pair["q_crit"]) < TOLERANCE
        assert error_in_widths(row.interval, pair["ci_games_howell"]) < TOLERANCE


def test_intervals_of_means_from_their_own_spread(name):
    analysis, alpha, expected = case(name)
    for level in analysis.levels:
        interval = separate_mean_interval(level, alpha)
        assert error_in_widths(interval, expected["mean_ci_own_sd"][level.level]) < TOLERANCE
