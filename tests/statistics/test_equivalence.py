"""Equivalence and non-inferiority with margins in units of the response."""

from dataclasses import replace
from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.statistics.adjustment import P_ADJUSTMENTS, Tail
from assayfolio.statistics.equivalence import Margins, equivalence_pooled, equivalence_separate
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.statistics.tails import t_isf
from support.measured import analysed, scaled, shifted, ten_to, varying
from support.reference import analysed as analysed_texts

PROCEDURES = [equivalence_pooled, equivalence_separate]
AGAINST_L0 = [("L1", "L0"), ("L2", "L0")]
both = pytest.mark.parametrize("procedure", PROCEDURES, ids=["pooled", "separate"])
margins = st.builds(
    lambda low, high: Margins(Fraction(-low, 10), Fraction(high, 10)), st.integers(1, 80), st.integers(1, 80)
)


def inside(interval, limits: Margins) -> bool:
    above = limits.lower is None or interval[0] > limits.lower
    below = limits.upper is None or interval[1] < limits.upper
    return above and below


def undecided(p: float, alpha: float) -> bool:
    return abs(p - alpha) < 1e-9 * alpha


@both
@given(varying(), margins, st.sampled_from(["none", "bonferroni"]))
def test_the_interval_lies_inside_the_margins_exactly_where_equivalence_is_shown(
    procedure, data, limits, adjust
):
    alpha = 0.05
    for row in procedure(analysed(data), AGAINST_L0, limits, alpha, adjust):
        if not undecided(row.adjusted.p, alpha):
            assert inside(row.interval, limits) is (row.adjusted.p <= alpha)


@both
@given(varying(), margins)
def test_p_is_the_larger_of_two_tests_and_each_is_that_of_non_inferiority(procedure, data, limits):
    analysis = analysed(data)
    for pair in AGAINST_L0:
        (row,) = procedure(analysis, [pair], limits, 0.05, "none")
        (not_low,) = procedure(analysis, [pair], replace(limits, upper=None), 0.05, "none")
        (not_high,) = procedure(analysis, [pair], replace(limits, lower=None), 0.05, "none")
        assert row.tail.p == max(row.tail_lower.p, row.tail_upper.p)
        assert (not_low.tail, not_low.tail_upper) == (row.tail_lower, None)
        assert (not_high.tail, not_high.tail_lower) == (row.tail_upper, None)
        assert not_low.interval == (row.interval[0], None)
        assert not_high.interval == (None, row.interval[1])


@both
@given(varying(), margins)
def test_exchanging_the_levels_exchanges_the_margins(procedure, data, limits):
    (there,) = procedure(analysed(data), [("L1", "L0")], limits, 0.05, "none")
    mirrored = Margins(-limits.upper, -limits.lower)
    (back,) = procedure(analysed(data), [("L0", "L1")], mirrored, 0.05, "none")
    assert back.estimate == -there.estimate
    assert (back.tail_lower, back.tail_upper) == (there.tail_upper, there.tail_lower)
    assert back.interval == (-there.interval[1], -there.interval[0])


@both
@given(varying(), margins, st.randoms(use_true_random=False), st.integers(-(10**9), 10**9))
def test_order_and_zero_point_do_not_matter(procedure, data, limits, random, constant):
    rows = procedure(analysed(data), AGAINST_L0, limits, 0.05, "holm")
    moved = {
        level: random.sample(listed, len(listed))
        for level, listed in random.sample(list(shifted(data, constant).items()), len(data))
    }
    assert procedure(analysed(moved), AGAINST_L0, limits, 0.05, "holm") == rows


@both
@given(varying(), margins, st.integers(-20, 20))
def test_another_power_of_ten_as_the_unit_scales_exactly(procedure, data, limits, power):
    unit = ten_to(power)
    before = procedure(analysed(data), AGAINST_L0, limits, 0.05, "none")
    larger = Margins(limits.lower * unit, limits.upper * unit)
    after = procedure(analysed(scaled(data, power)), AGAINST_L0, larger, 0.05, "none")
    for one, other in zip(before, after, strict=True):
        assert other.estimate == one.estimate * unit
        assert (other.lower.statistic, other.tail_lower) == (one.lower.statistic, one.tail_lower)
        assert (other.upper.statistic, other.tail_upper) == (one.upper.statistic, one.tail_upper)


METHODS = {
    "reference": ["5.02", "5.10", "4.97", "5.05", "5.01"],
    "kit a": ["5.11", "5.04", "5.20", "5.09"],
    "kit b": ["4.80", "5.30", "5.05", "4.95", "5.15", "5.00"],
}
ROWS = [("kit a", "reference"), ("kit b", "reference")]
TENTH = Margins(Fraction(-1, 5), Fraction(1, 5))


@both
def test_the_statistics_measure_the_distance_from_each_margin(procedure):
    row = procedure(analysed_texts(METHODS), ROWS, TENTH, 0.05, "none")[0]
    assert row.estimate == Fraction("5.11") - Fraction("5.03")
    for test, margin in ((row.lower, Fraction(-1, 5)), (row.upper, Fraction(1, 5))):
        assert test.margin == margin
        assert test.statistic.square == (row.estimate - margin) ** 2 / row.se.square
        assert test.statistic.sign == (1 if row.estimate > margin else -1)


@both
def test_families(procedure):
    analysis = analysed_texts(METHODS)
    plain, fair, stepped = (
        procedure(analysis, ROWS, TENTH, 0.05, how) for how in ("none", "bonferroni", "holm")
    )
    smaller, larger = sorted(plain, key=lambda row: row.tail.p)
    by_label = {row.label: row for row in stepped}
    assert [row.adjusted.p for row in fair] == [min(1.0, 2 * row.tail.p) for row in plain]
    assert by_label[smaller.label].adjusted.p == min(1.0, 2 * smaller.tail.p)
    assert by_label[larger.label].adjusted.p == max(larger.tail.p, min(1.0, 2 * smaller.tail.p))
    assert [row.interval for row in stepped] == [row.interval for row in plain]
    for row, wider in zip(plain, fair, strict=True):
        ratio = float(t_isf(0.025, row.df)) / float(t_isf(0.05, row.df))
        assert wider.interval[1] - wider.interval[0] == pytest.approx(
            ratio * (row.interval[1] - row.interval[0]), rel=1e-10
        )


def test_a_level_that_does_not_vary_is_not_taken_for_exactly_known():
    analysis = analysed_texts({"A": ["1.0", "1.0", "1.0"], "B": ["1.1", "1.3", "0.9", "1.2"]})
    with pytest.raises(NotComputableError, match="the values of A do not vary at the recorded resolution"):
        equivalence_separate(analysis, [("A", "B")], TENTH, 0.05, "none")


@pytest.mark.parametrize("adjust", ["none", "bonferroni", "holm"])
@given(data=varying())
def test_a_row_that_cannot_be_given_counts_as_p_one(adjust, data):
    analysis = analysed(data)
    limits = Margins(Fraction(-1), Fraction(1))
    alone = equivalence_separate(analysis, AGAINST_L0, limits, 0.05, "none")
    beside = equivalence_separate(analysis, AGAINST_L0, limits, 0.05, adjust, missing=1)
    whole = P_ADJUSTMENTS[adjust]([*(row.tail for row in alone), Tail(1.0, 0.0)])
    assert [row.adjusted for row in beside] == list(whole[:2])
    narrow = equivalence_separate(analysis, AGAINST_L0, limits, 0.05 / 3, "none")
    assert [row.interval for row in beside] == [
        row.interval for row in (narrow if adjust == "bonferroni" else alone)
    ]


@both
@given(varying(), margins)
def test_each_boundary_test_can_be_recomputed(procedure, data, limits):
    for row in procedure(analysed(data), AGAINST_L0, limits, 0.05, "none"):
        for test, excess in (
            (row.lower, row.estimate - limits.lower),
            (row.upper, row.estimate - limits.upper),
        ):
            assert test.statistic.square * test.se.square == excess**2
            assert (test.se, test.df) == (row.se, row.df)


def test_what_cannot_be_compared_is_refused_with_the_reason():
    flat = analysed_texts({"A": ["1.0", "1.0"], "B": ["1.1", "1.1"], "C": ["1", "2"]})
    with pytest.raises(NotComputableError, match=r"values of A do not vary .*; the values of B do not"):
        equivalence_separate(flat, [("A", "B")], TENTH, 0.05, "none")
    single = analysed_texts({"A": ["1.0"], "B": ["1.1", "1.2"]})
    with pytest.raises(NotComputableError, match="A has one value"):
        equivalence_separate(single, [("A", "B")], TENTH, 0.05, "none")
    assert equivalence_pooled(single, [("A", "B")], TENTH, 0.05, "none")[0].df == 1
    all_flat = analysed_texts({"A": ["1.0", "1.0"], "B": ["1.1", "1.1"]})
    with pytest.raises(NotComputableError, match="nothing varies within the levels"):
        equivalence_pooled(all_flat, [("A", "B")], TENTH, 0.05, "none")


@pytest.mark.parametrize("limits", [(None, None), (Fraction(1), Fraction(1)), (Fraction(1), Fraction(-1))])
def test_margins_that_mean_nothing_are_refused(limits):
    with pytest.raises(ValueError, match="margin"):
        Margins(*limits)


@both
@pytest.mark.parametrize("alpha", [0.0, 0.5, 0.9])
def test_the_level_of_a_one_sided_test_is_below_one_half(procedure, alpha):
    with pytest.raises(ValueError, match="between 0 and 1/2"):
        procedure(analysed_texts(METHODS), ROWS, TENTH, alpha, "none")


@both
def test_an_adjustment_without_a_meaning_here_is_unknown(procedure):
    with pytest.raises(KeyError):
        procedure(analysed_texts(METHODS), ROWS, TENTH, 0.05, "tukey-kramer")


def test_tails_keep_their_logarithm():
    far = analysed_texts({"A": ["1.00", "1.01", "0.99"] * 200, "B": ["1.00", "1.01", "0.99"] * 200})
    (row,) = equivalence_pooled(far, [("A", "B")], Margins(Fraction(-50), Fraction(50)), 0.05, "none")
    assert row.tail == Tail(0.0, row.tail.log10_p)
    assert -10_000 < row.tail.log10_p < -1000
