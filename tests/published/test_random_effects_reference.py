"""Precision of random-effects layouts against values computed independently with exact fractions and mpmath.

Source: tests/vectors/random_effects.json (its `source` says how it was made). Twelve data sets: equal and
unequal n, negative between-level components, two and thirty levels, a common offset, a NIST data set.

Exact quantities have to be the nearest double. Intervals are stated at 12 significant digits: their ends have
to agree within 1e-11 relative.
"""

from fractions import Fraction
from math import sqrt

import pytest

from assayfolio.exact import Root, to_double
from assayfolio.statistics.inference import variance_ratio_tail
from assayfolio.statistics.intraclass import f_icc_interval, wald_ratio_interval
from assayfolio.statistics.mean_squares import (
    Part,
    estimate,
    modified_large_sample_interval,
    satterthwaite_df,
    sd_interval_by_chi_square,
)
from assayfolio.statistics.oneway import OneWay
from assayfolio.statistics.precision import POOLED, Precision, precision, repeatability
from support.reference import analysed, cases_of, relative_error

CASES = cases_of("random_effects")
EQUAL_N = {
    *("random_effects_prec_10x3", "random_effects_prec_20x2", "random_effects_prec_5x5"),
    *("random_effects_prec_offset", "random_effects_neg_balanced", "random_effects_nist_SiRstv"),
}
NEGATIVE = {"random_effects_neg_balanced", "random_effects_neg_uneq", "random_effects_p_near_one"}
TOLERANCE = 1e-11

COMPARED = {
    *("anova", "n0", "s_r2", "s_r", "s_L2_raw", "s_L2", "truncated", "s_L", "s_R2_raw", "s_R2", "s_R"),
    *("icc_raw", "icc", "s_r_ci", "s_r_upper_one_sided", "wald_exact_truncated", "s_R_satterthwaite"),
    "grand_mean",
}
WITH_EQUAL_N = {"icc_ci_F_exact", "s_R2_mls"}
# The first is not compared: for unequal n the interval of the ICC is Wald's, which is exact, and this
# approximation to it is not offered.
WITH_UNEQUAL_N = {"icc_ci_F_with_n0_approx", "s_R2_mls_with_n0_approx"}
WITH_A_NEGATIVE_COMPONENT = {"s_R_satterthwaite_truncated_variant"}


@pytest.fixture(params=CASES)
def name(request: pytest.FixtureRequest) -> str:
    return str(request.param)


@pytest.fixture
def expected(name: str) -> dict:
    return CASES[name]["expected"]


@pytest.fixture
def analysis(name: str) -> OneWay:
    return analysed(CASES[name]["inputs"]["data"])


@pytest.fixture
def confidence(name: str) -> Fraction:
    return Fraction(CASES[name]["inputs"]["conf_level"])


@pytest.fixture
def found(analysis: OneWay, confidence: Fraction) -> Precision:
    return precision(analysis, confidence)


def one_sided(confidence: Fraction) -> Fraction:
    """The two-sided confidence whose upper end is the upper limit at `confidence`."""
    return 2 * confidence - 1


def parts_of_the_total(analysis: OneWay, n0: Fraction) -> list[Part]:
    return [
        Part(1 / n0, analysis.ms_between, analysis.df_between),
        Part(1 - 1 / n0, analysis.ms_within, analysis.df_within),
    ]


def assert_close(interval, ends):
    assert interval is not None
    assert [relative_error(one, end) < TOLERANCE for one, end in zip(interval, ends, strict=True)] == [
        True
    ] * 2


def test_every_quantity_of_the_reference_is_compared_or_listed(name, expected):
    kind = WITH_EQUAL_N if name in EQUAL_N else WITH_UNEQUAL_N
    assert set(expected) == COMPARED | kind | (WITH_A_NEGATIVE_COMPONENT if name in NEGATIVE else set())


def test_components_of_variance_are_the_nearest_doubles(name, expected, found):
    doubles = {
        "n0": found.n0,
        "s_r2": found.repeatability.variance,
        "s_r": found.repeatability.sd,
        "s_L2_raw": found.between.raw_variance,
        "s_L2": found.between.variance,
        "s_L": found.between.sd,
        "s_R2_raw": found.total.raw_variance,
        "s_R2": found.total.variance,
        "s_R": found.total.sd,
        "icc_raw": found.icc_raw,
        "icc": found.icc,
    }
    assert {key: to_double(value) for key, value in doubles.items()} == {
        key: float(expected[key]) for key in doubles
    }
    assert found.between.truncated is expected["truncated"] is (name in NEGATIVE)
    assert found.balanced is (name in EQUAL_N)


def test_the_table_beneath_them(expected, analysis):
    table = expected["anova"]
    assert (analysis.df_between, analysis.df_within) == (table["df_between"], table["df_within"])
    assert to_double(analysis.ss_between) == float(table["ss_between"])
    assert to_double(analysis.ss_within) == float(table["ss_within"])
    assert to_double(analysis.ms_between) == float(table["ms_between"])
    assert to_double(analysis.ms_within) == float(table["ms_within"])
    assert analysis.f is not None
    assert to_double(analysis.f) == float(table["F"])
    assert relative_error(variance_ratio_tail(analysis).p, table["p"]) < TOLERANCE


def test_the_interval_of_the_repeatability_standard_deviation(expected, analysis, confidence, found):
    assert_close(found.repeatability.interval, expected["s_r_ci"])
    upper_limit = repeatability(analysis, one_sided(confidence)).interval
    assert upper_limit is not None
    assert relative_error(upper_limit[1], expected["s_r_upper_one_sided"]) < TOLERANCE


def test_the_total_by_the_modified_large_sample_method(name, expected, analysis, confidence, found):
    stated = expected["s_R2_mls" if name in EQUAL_N else "s_R2_mls_with_n0_approx"]
    assert_close(found.total.interval, stated["sd_two_sided"])
    parts = parts_of_the_total(analysis, found.n0)
    assert_close(modified_large_sample_interval(parts, float(1 - confidence)), stated["two_sided"])
    _, upper = modified_large_sample_interval(parts, float(1 - one_sided(confidence)))
    assert relative_error(upper, stated["upper_one_sided"]) < TOLERANCE
    assert relative_error(sqrt(upper), stated["sd_upper_one_sided"]) < TOLERANCE


def test_the_total_by_satterthwaite_where_no_component_is_negative(name, expected, found):
    if name in NEGATIVE:
        stated = expected["s_R_satterthwaite_truncated_variant"]
        assert found.total.df == found.repeatability.df == stated["df"]
    else:
        stated = expected["s_R_satterthwaite"]
        assert found.total.df is not None
        assert to_double(found.total.df) == float(stated["df"])
    assert_close(found.total.satterthwaite_interval, stated["ci"])


def test_satterthwaite_of_the_sum_as_estimated(expected, analysis, confidence, found):
    stated = expected["s_R_satterthwaite"]
    parts = parts_of_the_total(analysis, found.n0)
    variance, df = estimate(parts), satterthwaite_df(parts)
    assert to_double(df) == float(stated["df"])
    assert_close(sd_interval_by_chi_square(variance, df, float(1 - confidence)), stated["ci"])
    upper_limit = sd_interval_by_chi_square(variance, df, float(1 - one_sided(confidence)))[1]
    assert relative_error(upper_limit, stated["upper_one_sided"]) < TOLERANCE


def test_the_interval_of_the_intraclass_correlation(name, expected, analysis, confidence, found):
    alpha = float(1 - confidence)
    exact = expected["wald_exact_truncated"]
    assert_close(found.icc_interval, exact["icc"])
    assert_close(wald_ratio_interval(analysis, alpha), exact["ratio_sL2_over_sr2"])
    if name in EQUAL_N:
        assert_close(f_icc_interval(analysis, alpha), expected["icc_ci_F_exact"]["raw"])
        assert_close(found.icc_interval, expected["icc_ci_F_exact"]["truncated"])


def test_the_mean_of_level_means_and_its_uncertainty(name, expected, found):
    stated = expected["grand_mean"]
    between_levels, pooled = found.mean_ways
    assert to_double(between_levels.mean) == float(stated["mean_of_group_means"])
    assert to_double(between_levels.u) == float(stated["u_mean_of_group_means_type_a"])
    assert between_levels.df == stated["df_type_a"]
    assert_close(between_levels.interval, stated["ci_type_a"])
    assert to_double(pooled.mean) == float(stated["mean_all_values"])
    assert (found.mean.way == POOLED) is (name in NEGATIVE)
    if name in EQUAL_N:
        assert to_double(between_levels.u) == float(stated["u_from_ms_between"])


def test_uncertainties_of_either_mean_that_follow_from_the_components(expected, analysis, found):
    # Not offered as such: what they are made of is.
    stated, n_total, k = expected["grand_mean"], found.n_total, found.k
    between, within = found.between.variance, found.repeatability.variance
    squares = Fraction(sum(level.n**2 for level in analysis.levels), n_total**2)
    inverses = sum(Fraction(1, level.n) for level in analysis.levels) / k**2
    of_all_values = Root.of(between * squares + within / n_total)
    of_level_means = Root.of(between / k + within * inverses)
    assert to_double(of_all_values) == float(stated["u_mean_all_values"])
    assert to_double(of_level_means) == float(stated["u_mean_of_group_means_components"])
