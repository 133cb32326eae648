"""Equivalence with margins in percent of the reference mean, and Fieller's interval that goes with it."""

from dataclasses import replace
from fractions import Fraction

import mpmath as mp
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy import optimize, stats

from assayfolio.statistics.equivalence import Margins
from assayfolio.statistics.equivalence_percent import (
    equivalence_percent_pooled,
    equivalence_percent_separate,
)
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.statistics.ratio_interval import MeanRatio, fieller_distances, fieller_distances_separate
from support.measured import analysed, negated, scaled, varying
from support.reference import analysed as analysed_texts

PROCEDURES = [equivalence_percent_pooled, equivalence_percent_separate]
both = pytest.mark.parametrize("procedure", PROCEDURES, ids=["pooled", "separate"])
margins = st.builds(
    lambda low, high: Margins(Fraction(-low), Fraction(high)), st.integers(1, 60), st.integers(1, 60)
)
PAIRS = [("L1", "L0"), ("L2", "L0")]
METHODS = {
    "reference": ["5.02", "5.10", "4.97", "5.05", "5.01"],
    "kit a": ["5.11", "5.04", "5.20", "5.09"],
    "kit b": ["4.80", "5.30", "5.05", "4.95", "5.15", "5.00"],
}
ROWS = [("kit a", "reference"), ("kit b", "reference")]
FIVE_PERCENT = Margins(Fraction(-5), Fraction(5))


@both
@settings(max_examples=40)
@given(varying(centre=20), margins, st.sampled_from(["none", "bonferroni"]))
def test_the_interval_lies_inside_the_margins_exactly_where_equivalence_is_shown(
    procedure, data, limits, adjust
):
    try:
        rows = procedure(analysed(data), PAIRS, limits, 0.05, adjust)
    except NotComputableError:
        assume(False)
    for row in rows:
        if abs(row.adjusted.p - 0.05) > 1e-9:
            inside = row.interval[0] > limits.lower and row.interval[1] < limits.upper
            assert inside is (row.adjusted.p <= 0.05)


@both
@settings(max_examples=40)
@given(varying(centre=20))
def test_a_margin_at_an_end_of_the_interval_has_p_equal_to_alpha(procedure, data):
    try:
        rows = procedure(analysed(data), PAIRS, FIVE_PERCENT, 0.025, "none")
    except NotComputableError:
        assume(False)
    for pair, row in zip(PAIRS, rows, strict=True):
        ends = Margins(*(Fraction(end) for end in row.interval))
        (again,) = procedure(analysed(data), [pair], ends, 0.025, "none")
        assert again.tail_lower.p == pytest.approx(0.025, rel=1e-9)
        assert again.tail_upper.p == pytest.approx(0.025, rel=1e-9)


@both
@settings(max_examples=40)
@given(varying(centre=20), margins)
def test_a_negative_reference_counts_percentages_away_from_zero(procedure, data, limits):
    try:
        rows = procedure(analysed(data), PAIRS, limits, 0.05, "none")
    except NotComputableError:
        assume(False)
    for row, mirrored in zip(
        rows, procedure(analysed(negated(data)), PAIRS, limits, 0.05, "none"), strict=True
    ):
        assert mirrored == row


@both
@settings(max_examples=40)
@given(varying(centre=20), margins, st.integers(-20, 20), st.randoms(use_true_random=False))
def test_a_percentage_depends_neither_on_the_unit_nor_on_order(procedure, data, limits, power, random):
    try:
        rows = procedure(analysed(data), PAIRS, limits, 0.05, "holm")
    except NotComputableError:
        assume(False)
    moved = dict(random.sample(list(scaled(data, power).items()), len(data)))
    unit = Fraction(10) ** power
    for row, other in zip(rows, procedure(analysed(moved), PAIRS, limits, 0.05, "holm"), strict=True):
        for test, again in ((row.lower, other.lower), (row.upper, other.upper)):
            assert again.se.square == test.se.square * unit**2
            assert replace(again, se=test.se) == test
        assert replace(other, lower=row.lower, upper=row.upper) == row


def test_the_tests_are_t_tests_of_linear_combinations():
    analysis = analysed_texts(METHODS)
    x, r = analysis.summary_of("kit a"), analysis.summary_of("reference")
    low = Fraction(95, 100)
    (pooled,) = equivalence_percent_pooled(analysis, ROWS[:1], FIVE_PERCENT, 0.05, "none")
    (separate,) = equivalence_percent_separate(analysis, ROWS[:1], FIVE_PERCENT, 0.05, "none")
    variance = analysis.ms_within * (Fraction(1, x.n) + low**2 / r.n)
    assert pooled.lower.statistic.square == (x.mean - low * r.mean) ** 2 / variance
    assert pooled.lower.df == analysis.df_within
    v_x, v_r = x.ss / (x.n * (x.n - 1)), low**2 * r.ss / (r.n * (r.n - 1))
    assert separate.lower.statistic.square == (x.mean - low * r.mean) ** 2 / (v_x + v_r)
    assert separate.lower.df == float((v_x + v_r) ** 2 / (v_x**2 / (x.n - 1) + v_r**2 / (r.n - 1)))
    assert separate.lower.df != separate.upper.df
    for row in (pooled, separate):
        assert row.label == "kit a - reference"
        assert row.estimate == 100 * (x.mean / r.mean - 1)
        assert (row.se, row.df) == (None, None)


@pytest.mark.parametrize("x", ["3.1", "-3.1", "0"])
@pytest.mark.parametrize("r", ["2.7", "-2.7"])
def test_fieller_limits_in_fifty_digits(x, r):
    means = MeanRatio(Fraction(x), Fraction(r), Fraction(1, 7), Fraction(1, 5))
    t = 2.25
    with mp.workdps(50):
        a = mp.mpf(r) ** 2 - mp.mpf(t) ** 2 / 5
        b = mp.mpf(x) * mp.mpf(r)
        c = mp.mpf(x) ** 2 - mp.mpf(t) ** 2 / 7
        centre, half = b / a, mp.sqrt(b * b - a * c) / a
        expected = [float(limit - mp.mpf(x) / mp.mpf(r)) for limit in (centre - half, centre + half)]
    assert fieller_distances(means, t) == pytest.approx(expected, rel=1e-14)


def test_fieller_limits_keep_their_digits_where_the_ratio_is_almost_certain():
    means = MeanRatio(Fraction(10**12 + 1), Fraction(10**12), Fraction(1, 7), Fraction(1, 5))
    with mp.workdps(60):
        a = mp.mpf(10) ** 24 - mp.mpf(4) / 5
        b = mp.mpf(10**12 + 1) * mp.mpf(10**12)
        c = mp.mpf(10**12 + 1) ** 2 - mp.mpf(4) / 7
        upper = (b + mp.sqrt(b * b - a * c)) / a - mp.mpf(10**12 + 1) / mp.mpf(10**12)
        expected = float(upper)
    assert fieller_distances(means, 2.0)[1] == pytest.approx(expected, rel=1e-14)


@pytest.mark.parametrize(("x", "r"), [("3.1", "2.7"), ("-3.1", "2.7"), ("3.1", "-2.7"), ("0.2", "9")])
@pytest.mark.parametrize(("n_x", "n_r"), [(4, 9), (9, 4), (30, 5)])
def test_limits_with_separate_variances_by_another_root_finder(x, r, n_x, n_r):
    means = MeanRatio(Fraction(x), Fraction(r), Fraction(1, 23), Fraction(1, 37))
    alpha = 0.05
    rho = float(x) / float(r)

    def excess(distance):
        v_x, v_r = 1 / 23, (rho + distance) ** 2 / 37
        df = (v_x + v_r) ** 2 / (v_x**2 / (n_x - 1) + v_r**2 / (n_r - 1))
        return abs(distance * float(r)) / (v_x + v_r) ** 0.5 - stats.t.isf(alpha, df)

    lower, upper = fieller_distances_separate(means, n_x - 1, n_r - 1, alpha)
    assert lower < 0 < upper
    for distance in (lower, upper):
        found = optimize.brentq(excess, 0.5 * distance, 1.5 * distance, xtol=1e-15, rtol=1e-14)
        assert distance == pytest.approx(found, rel=1e-10)


@both
def test_a_reference_mean_that_could_be_zero_is_refused(procedure):
    data = {"reference": ["0.2", "-0.1", "0.3", "0.1"], "kit": ["1.0", "1.2", "0.9"]}
    with pytest.raises(NotComputableError, match=r"cannot be told from zero.*in units of the response"):
        procedure(analysed_texts(data), [("kit", "reference")], FIVE_PERCENT, 0.05, "none")


@both
def test_a_stricter_level_refuses_sooner(procedure):
    data = {"reference": ["0.5", "0.2", "0.9", "0.4"], "kit": ["0.5", "0.3", "0.8", "0.6"]}
    rows = [("kit", "reference")]
    assert procedure(analysed_texts(data), rows, FIVE_PERCENT, 0.05, "none")[0].tail.p > 0.05
    with pytest.raises(NotComputableError, match="cannot be told from zero"):
        procedure(analysed_texts(data), rows, FIVE_PERCENT, 0.001, "none")


def test_a_reference_without_variation_is_not_taken_for_a_fixed_value():
    data = {"reference": ["5.0", "5.0", "5.0"], "kit": ["5.1", "5.2", "4.9", "5.0"]}
    with pytest.raises(
        NotComputableError, match="values of reference do not vary at the recorded resolution"
    ):
        equivalence_percent_separate(analysed_texts(data), [("kit", "reference")], FIVE_PERCENT, 0.05, "none")


def test_ratios_that_form_no_interval_are_refused():
    # Against two values, as few degrees of freedom as near a ratio of zero turn a rejection round again.
    means = MeanRatio(Fraction("6.2"), Fraction(3), Fraction(1), Fraction(1))
    with pytest.raises(NotComputableError, match="form no interval"):
        fieller_distances_separate(means, 1, 30, 0.05)


@both
def test_one_margin_leaves_the_other_side_open(procedure):
    rows = procedure(analysed_texts(METHODS), ROWS, Margins(Fraction(-5), None), 0.05, "none")
    whole = procedure(analysed_texts(METHODS), ROWS, FIVE_PERCENT, 0.05, "none")
    for row, other in zip(rows, whole, strict=True):
        assert row.interval == (other.interval[0], None)
        assert (row.tail, row.upper) == (other.tail_lower, None)
