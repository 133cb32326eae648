"""One-way analyses against values computed independently with exact fractions and 36 to 50 digit arithmetic.

Source: tests/vectors/one_way.json (its `source` says how it was made). Twenty data sets: equal and unequal
sizes, two and thirty levels, common offsets, fifteen decimals, powers of ten, one value at a level, F = 0.

Exact quantities have to be the nearest double. Quantities through a distribution function have to agree
within 1e-11 relative, interval ends within 1e-11 of the half width.
"""

from fractions import Fraction

import pytest

from assayfolio.exact import Root, to_double
from assayfolio.statistics.comparisons import TWO_SIDED, compare
from assayfolio.statistics.estimates import pair_estimates
from assayfolio.statistics.inference import mean_interval, omnibus_test
from assayfolio.statistics.oneway import OneWay
from assayfolio.statistics.tails import t_isf
from support.reference import analysed, cases_of, error_in_widths, relative_error

CASES = cases_of("one_way")
DEGENERATE = "degenerate_ssw_zero"
REGULAR = tuple(name for name in CASES if name != DEGENERATE)
TOLERANCE = 1e-11

COMPARED = {
    *("k", "N", "n", "mean", "sd", "grand_mean", "ss_between", "ss_within", "ss_total"),
    *("df_between", "df_within", "ms_between", "ms_within", "exact_rational", "F", "p", "F_crit"),
    *("pooled_s", "t_crit", "mean_ci", "lsd", "eta2"),
}
# Effect sizes beyond the share of variation are compared in test_effect_sizes_reference.py.
NOT_COMPARED = {
    *("omega2", "omega2_truncated", "epsilon2", "epsilon2_truncated", "cohen_f", "effect_ci"),
}


@pytest.fixture(params=REGULAR)
def name(request: pytest.FixtureRequest) -> str:
    return str(request.param)


@pytest.fixture
def expected(name: str) -> dict:
    return CASES[name]["expected"]


@pytest.fixture
def alpha(name: str) -> float:
    return float(CASES[name]["inputs"]["alpha"])


@pytest.fixture
def analysis(name: str) -> OneWay:
    return analysed(CASES[name]["inputs"]["data"])


def test_every_quantity_of_the_reference_is_compared_or_listed_as_later_work(expected):
    assert set(expected) == COMPARED | NOT_COMPARED


def test_counts_and_degrees_of_freedom(analysis, expected):
    assert analysis.k == expected["k"]
    assert analysis.n_total == expected["N"]
    assert {level.level: level.n for level in analysis.levels} == expected["n"]
    assert analysis.df_between == expected["df_between"]
    assert analysis.df_within == expected["df_within"]


def test_means_and_standard_deviations_are_the_nearest_doubles(analysis, expected):
    for level in analysis.levels:
        assert to_double(level.mean) == float(expected["mean"][level.level])
        sd = expected["sd"][level.level]
        assert (None if level.sd is None else to_double(level.sd)) == (None if sd is None else float(sd))
    assert to_double(analysis.grand_mean) == float(expected["grand_mean"])


def test_the_table_of_variation_is_exact(analysis, expected):
    assert analysis.f is not None
    computed = {
        "ss_between": analysis.ss_between,
        "ss_within": analysis.ss_within,
        "ss_total": analysis.ss_total,
        "F": analysis.f,
    }
    assert computed == {key: Fraction(text) for key, text in expected["exact_rational"].items()}


def test_the_table_of_variation_is_the_nearest_double(analysis, expected):
    computed = {
        "ss_between": analysis.ss_between,
        "ss_within": analysis.ss_within,
        "ss_total": analysis.ss_total,
        "ms_between": analysis.ms_between,
        "ms_within": analysis.ms_within,
        "F": analysis.f,
        "pooled_s": Root.of(analysis.ms_within),
        "eta2": analysis.r_squared,
    }
    for key, value in computed.items():
        assert value is not None
        assert to_double(value) == float(expected[key]), key


def test_p_and_critical_values(analysis, expected, alpha):
    test = omnibus_test(analysis, alpha)
    assert relative_error(test.tail.p, expected["p"]) < TOLERANCE
    assert relative_error(test.f_critical, expected["F_crit"]) < TOLERANCE
    assert relative_error(float(t_isf(alpha / 2, analysis.df_within)), expected["t_crit"]) < TOLERANCE


def test_intervals_for_means(analysis, expected, alpha):
    for level in analysis.levels:
        interval = mean_interval(analysis, level, alpha)
        assert error_in_widths(interval, expected["mean_ci"][level.level]) < TOLERANCE


def test_pairs_without_adjustment(analysis, expected, alpha):
    estimates = {estimate.label.replace(" - ", "-"): estimate for estimate in pair_estimates(analysis)}
    listed = expected["lsd"]
    rows = compare(analysis, [estimates[label] for label in listed], "none", TWO_SIDED, alpha)
    for row, pair in zip(rows, listed.values(), strict=True):
        assert to_double(row.estimate) == float(pair["diff"])
        assert to_double(row.se) == float(pair["se"])
        assert to_double(row.statistic) == float(pair["t"])
        assert row.df == expected["df_within"]
        assert relative_error(row.tail.p, pair["p_unadjusted"]) < TOLERANCE
        assert row.adjusted == row.tail
        assert row.interval is not None
        assert error_in_widths(row.interval, pair["ci"]) < TOLERANCE


def test_no_variation_within_levels_has_no_variance_ratio():
    expected = CASES[DEGENERATE]["expected"]
    analysis = analysed(CASES[DEGENERATE]["inputs"]["data"])
    assert to_double(analysis.ss_between) == float(expected["ss_between"])
    assert (analysis.df_between, analysis.df_within) == (expected["df_between"], expected["df_within"])
    assert analysis.ss_within == 0
    assert expected["F"] is None
    assert analysis.f is None
