"""Comparisons of means: direction, error, families, and intervals that agree with the verdict."""

from fractions import Fraction
from math import isfinite

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from assayfolio.exact import round_significant, to_double
from assayfolio.statistics.comparisons import GREATER, LESS, TWO_SIDED, centred_interval, compare
from assayfolio.statistics.estimates import contrast_estimate, pair_estimates, reference_estimates
from assayfolio.statistics.inference import omnibus_test
from assayfolio.statistics.oneway import NotComputableError, OneWay
from assayfolio.statistics.simultaneous import compare_tukey_kramer
from support.drawn import ALTERNATIVES, excludes_zero
from support.reference import analysed

LOTS = {
    "lot-1": ["10.1", "10.3", "10.0", "10.2"],
    "lot-2": ["10.9", "11.2", "11.0"],
    "lot-3": ["10.2", "10.4", "10.1", "10.6", "10.3"],
    "lot-4": ["9.2", "9.6"],
}


@st.composite
def analyses(draw: st.DrawFn) -> OneWay:
    """Two to five levels of two to six values that vary."""
    tenths = st.integers(0, 60)
    levels = draw(st.lists(st.lists(tenths, min_size=2, max_size=6), min_size=2, max_size=5))
    analysis = analysed({f"L{at}": [f"{value}e-1" for value in listed] for at, listed in enumerate(levels)})
    assume(analysis.ss_within)
    return analysis


def test_pairs_are_labelled_in_the_order_of_the_levels():
    labels = [one.label for one in pair_estimates(analysed(LOTS))]
    assert labels[:4] == ["lot-1 - lot-2", "lot-1 - lot-3", "lot-1 - lot-4", "lot-2 - lot-3"]
    assert len(labels) == 6


def test_against_a_reference_every_other_level_comes_first():
    estimates = reference_estimates(analysed(LOTS), "lot-3")
    assert [one.label for one in estimates] == ["lot-1 - lot-3", "lot-2 - lot-3", "lot-4 - lot-3"]
    assert estimates[0].value == Fraction("10.15") - Fraction("10.32")
    assert estimates[0].variance_factor == Fraction(1, 4) + Fraction(1, 5)


def test_a_contrast_weighs_means_and_leaves_other_levels_out():
    weights = {"lot-1": Fraction(1, 2), "lot-3": Fraction(1, 2), "lot-4": Fraction(-1)}
    estimate = contrast_estimate(analysed(LOTS), "old lots", weights)
    assert estimate.label == "old lots"
    assert estimate.value == (Fraction("10.15") + Fraction("10.32")) / 2 - Fraction("9.4")
    assert estimate.variance_factor == Fraction(1, 4) / 4 + Fraction(1, 4) / 5 + Fraction(1, 2)


def test_whole_weights_are_as_exact_as_fractions():
    whole = contrast_estimate(analysed(LOTS), "c", {"lot-1": 1, "lot-2": -1})
    assert isinstance(whole.variance_factor, Fraction)
    assert whole == contrast_estimate(analysed(LOTS), "c", {"lot-1": Fraction(1), "lot-2": Fraction(-1)})


@pytest.mark.parametrize(
    "weights",
    [
        {"lot-1": Fraction(1), "lot-2": Fraction(-1, 3)},
        {"lot-1": Fraction(1)},
        {"lot-1": Fraction(1, 3), "lot-2": Fraction(1, 3), "lot-3": Fraction("-0.666666666666666666")},
    ],
)
def test_weights_that_do_not_sum_to_zero_are_refused(weights):
    with pytest.raises(ValueError, match="sum to zero"):
        contrast_estimate(analysed(LOTS), "c", weights)


def test_weights_that_are_all_zero_are_refused():
    with pytest.raises(ValueError, match="not zero"):
        contrast_estimate(analysed(LOTS), "c", {"lot-1": Fraction(0), "lot-2": Fraction(0)})


def test_a_contrast_scales_with_its_weights_and_its_statistic_does_not():
    analysis = analysed(LOTS)
    weights = {"lot-1": Fraction(1), "lot-2": Fraction(1), "lot-4": Fraction(-2)}
    one = contrast_estimate(analysis, "c", weights)
    third = contrast_estimate(analysis, "c", {level: w / 3 for level, w in weights.items()})
    rows = compare(analysis, [one, third], "none", TWO_SIDED, 0.05)
    assert rows[0].estimate == 3 * rows[1].estimate
    assert rows[0].statistic == rows[1].statistic
    assert rows[0].tail == rows[1].tail


def test_greater_asks_for_a_positive_and_less_for_a_negative_difference():
    analysis = analysed(LOTS)
    higher = reference_estimates(analysis, "lot-1")[:1]  # lot-2 is well above lot-1
    greater = compare(analysis, higher, "none", GREATER, 0.05)[0]
    less = compare(analysis, higher, "none", LESS, 0.05)[0]
    both = compare(analysis, higher, "none", TWO_SIDED, 0.05)[0]
    assert greater.tail.p < 0.001
    assert less.tail.p > 0.999
    assert greater.tail.p + less.tail.p == pytest.approx(1, rel=1e-14)
    assert both.tail.p == pytest.approx(2 * greater.tail.p, rel=1e-13)
    assert greater.interval is not None
    assert less.interval is not None
    assert greater.interval[0] > 0
    assert greater.interval[1] is None
    assert less.interval[0] is None
    assert less.interval[1] > to_double(both.estimate)


def test_a_one_sided_interval_is_shorter_on_its_side():
    analysis = analysed(LOTS)
    for estimates in ([one] for one in pair_estimates(analysis)):
        both = compare(analysis, estimates, "none", TWO_SIDED, 0.05)[0].interval
        assert compare(analysis, estimates, "none", GREATER, 0.05)[0].interval[0] > both[0]
        assert compare(analysis, estimates, "none", LESS, 0.05)[0].interval[1] < both[1]


def test_equal_means_are_no_difference_in_any_direction():
    analysis = analysed({"A": ["1", "3"], "B": ["2", "2"]})
    pair = pair_estimates(analysis)
    assert [compare(analysis, pair, "none", a, 0.05)[0].tail.p for a in ALTERNATIVES] == [1.0, 0.5, 0.5]
    tukey = compare_tukey_kramer(analysis, pair, 0.05)[0]
    assert tukey.adjusted.p == 1.0
    assert tukey.statistic.sign == 0


@pytest.mark.parametrize("adjust", ["holm", "hochberg"])
@pytest.mark.parametrize("alternative", ALTERNATIVES)
def test_a_stepwise_method_has_no_interval(adjust, alternative):
    analysis = analysed(LOTS)
    rows = compare(analysis, pair_estimates(analysis), adjust, alternative, 0.05)
    assert all(row.interval is None for row in rows)


def test_an_unknown_adjustment_is_an_error():
    analysis = analysed(LOTS)
    with pytest.raises(KeyError):
        compare(analysis, pair_estimates(analysis), "tukey-kramer", TWO_SIDED, 0.05)


@pytest.mark.parametrize("data", [{"A": ["1", "1"], "B": ["2", "2"]}, {"A": ["1", "1"], "B": ["1"]}])
def test_without_variation_within_levels_nothing_is_compared(data):
    analysis = analysed(data)
    pair = pair_estimates(analysis)
    with pytest.raises(NotComputableError, match="no error to compare with"):
        compare(analysis, pair, "none", TWO_SIDED, 0.05)
    with pytest.raises(NotComputableError, match="no error to compare with"):
        compare_tukey_kramer(analysis, pair, 0.05)


@given(
    analyses(),
    st.sampled_from(["none", "bonferroni", "sidak"]),
    st.sampled_from(ALTERNATIVES),
    st.sampled_from([0.1, 0.05, 0.01, 0.001]),
)
def test_interval_and_verdict_agree(analysis, adjust, alternative, alpha):
    for row in compare(analysis, pair_estimates(analysis), adjust, alternative, alpha):
        assume(abs(row.adjusted.p - alpha) > 1e-9 * alpha)
        assert row.interval is not None
        assert excludes_zero(row.interval) == (row.adjusted.p <= alpha)


@given(analyses(), st.sampled_from([0.1, 0.05, 0.01, 0.001]))
def test_tukey_interval_and_verdict_agree(analysis, alpha):
    for row in compare_tukey_kramer(analysis, pair_estimates(analysis), alpha):
        assume(abs(row.adjusted.p - alpha) > 1e-9 * alpha)
        assert row.interval is not None
        assert excludes_zero(row.interval) == (row.adjusted.p <= alpha)


@given(analyses())
def test_tukey_lies_between_raw_and_bonferroni_over_all_pairs(analysis):
    pairs = pair_estimates(analysis)
    tukey = compare_tukey_kramer(analysis, pairs, 0.05)
    for one, other in zip(tukey, compare(analysis, pairs, "bonferroni", TWO_SIDED, 0.05), strict=True):
        assert one.tail == other.tail
        assert one.tail.p * (1 - 1e-10) <= one.adjusted.p <= other.adjusted.p * (1 + 1e-10)


@given(analyses())
def test_tukey_for_two_levels_is_the_t_test(analysis):
    assume(analysis.k == 2)
    pair = pair_estimates(analysis)
    assert compare_tukey_kramer(analysis, pair, 0.05) == compare(analysis, pair, "none", TWO_SIDED, 0.05)


@given(analyses())
def test_the_squared_statistic_of_two_levels_is_f(analysis):
    assume(analysis.k == 2)
    row = compare(analysis, pair_estimates(analysis), "none", TWO_SIDED, 0.05)[0]
    assert row.statistic.square == analysis.f
    assert row.tail.p == pytest.approx(omnibus_test(analysis, 0.05).tail.p, rel=1e-12)


@given(analyses(), st.sampled_from(ALTERNATIVES))
def test_the_interval_lies_about_the_estimate(analysis, alternative):
    for row in compare(analysis, pair_estimates(analysis), "none", alternative, 0.05):
        estimate = to_double(row.estimate)
        assert row.interval is not None
        lower, upper = row.interval
        assert (lower is None) == (alternative == LESS)
        assert (upper is None) == (alternative == GREATER)
        assert lower is None or lower < estimate
        assert upper is None or upper > estimate


def test_two_hundred_levels_make_19_900_pairs():
    analysis = analysed({f"L{at:03d}": [f"{at % 7}", f"{at % 5}"] for at in range(200)})
    pairs = pair_estimates(analysis)
    rows = compare(analysis, pairs, "holm", TWO_SIDED, 0.05)
    assert len(rows) == 19_900
    assert all(row.tail.p <= row.adjusted.p <= 1 and isfinite(row.adjusted.log10_p) for row in rows)
    ranked = sorted(range(len(rows)), key=lambda at: rows[at].statistic.square)
    nearest, farthest = ranked[0], ranked[-1]
    tukey = compare_tukey_kramer(analysis, [pairs[nearest], pairs[farthest]], 0.05)
    assert rows[nearest].statistic.square == 0
    assert tukey[0].adjusted.p == 1.0
    assert rows[farthest].tail.p < tukey[1].adjusted.p < 19_900 * rows[farthest].tail.p


def test_tukey_for_more_than_two_hundred_levels_is_told_not_to_be_available():
    analysis = analysed({f"L{at:03d}": [f"{at % 7}", f"{at % 5}"] for at in range(201)})
    with pytest.raises(NotComputableError, match="up to 200 levels; here are 201"):
        compare_tukey_kramer(analysis, pair_estimates(analysis)[:1], 0.05)


@given(st.fractions(Fraction(-(10**20)), Fraction(10**20), max_denominator=10**6), st.floats(1e-9, 1e6))
def test_the_ends_of_an_interval_are_centre_and_rounded_half_width_rounded_once(centre, half_width):
    half = Fraction(round_significant(half_width))
    assert centred_interval(centre, half_width) == (to_double(centre - half), to_double(centre + half))
