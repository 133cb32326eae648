"""Outlier tests: what they point at, in which words, and what they do not depend on."""

from dataclasses import replace
from fractions import Fraction

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st
from scipy import stats

from assayfolio.exact import Decimal10, Root, parse_decimal
from assayfolio.statistics.grubbs import grubbs_limit, grubbs_tail
from assayfolio.statistics.outliers import (
    NEITHER,
    OUTLIER,
    STRAGGLER,
    cochran_outlier,
    grubbs_double,
    grubbs_double_of_means,
    grubbs_single,
    grubbs_single_of_means,
)
from support.measured import analysed, scaled, shifted, varying
from support.reference import analysed as analysed_texts

BOTH = {STRAGGLER, OUTLIER}
TESTS = {"one value": grubbs_single, "two values": grubbs_double}
either = pytest.mark.parametrize("test", TESTS.values(), ids=TESTS)
units = st.lists(st.integers(-500, 500), min_size=4, max_size=12).filter(lambda listed: len(set(listed)) > 2)


def level_of(*texts):
    return [parse_decimal(text) for text in texts]


def hundredths(listed):
    return [Decimal10(one, -2) for one in listed]


ORDINARY = ("5.02", "5.10", "4.97", "5.05", "5.01", "5.08", "4.99", "5.04")


def test_words_for_one_value():
    calm = grubbs_single("A", level_of(*ORDINARY))
    odd = grubbs_single("A", level_of(*ORDINARY, "5.22"))
    wild = grubbs_single("A", level_of(*ORDINARY, "5.40"))
    assert (calm.verdict, odd.verdict, wild.verdict) == (NEITHER, STRAGGLER, OUTLIER)
    assert odd.indexes == wild.indexes == (8,)
    for found in (calm, odd, wild):
        assert found.level == "A"
        assert found.straggler_limit < found.outlier_limit
        assert not found.small_is_extreme
        assert found.reason is None


def test_two_values_that_hide_each_other_from_the_test_of_one():
    values = level_of("5.41", *ORDINARY, "5.42")
    assert grubbs_single("A", values).verdict == NEITHER
    found = grubbs_double("A", values)
    assert (found.verdict, found.indexes) == (OUTLIER, (0, 9))
    assert found.small_is_extreme
    assert found.statistic < found.outlier_limit < found.straggler_limit


def test_two_low_values_are_found_as_two_high_ones():
    high, low = level_of(*ORDINARY, "5.41", "5.42"), level_of(*ORDINARY, "4.65", "4.64")
    assert grubbs_double("A", high).indexes == grubbs_double("A", low).indexes == (8, 9)


def test_exact_statistics_of_a_small_case():
    # 0, 1, 2, 5: mean 2, sum of squares 14; without 2 and 5 it is 1/2, without 0 and 1 it is 9/2.
    values = level_of("0", "1", "2", "5")
    one, two = grubbs_single("A", values), grubbs_double("A", values)
    assert one.statistic == Root.of(Fraction(9) / Fraction(14, 3))
    assert two.statistic == Fraction(1, 28)
    assert two.indexes == (2, 3)


def test_values_that_are_equal_at_the_recorded_resolution_make_no_outlier_of_the_others():
    for test, texts, places in (
        (grubbs_double, ("150.5", "150.5", "150.9", "151.2"), (2, 3)),
        (grubbs_single, ("1.0", "1.0", "1.0", "1.0", "1.1"), (4,)),
        (grubbs_single, ("7.31", "7.34", "7.31"), (1,)),
    ):
        found = test("A", level_of(*texts))
        assert (found.statistic, found.p, found.verdict) == (None, None, None)
        assert "are all equal at the recorded step of" in found.reason
        assert found.indexes == places


def test_a_verdict_that_rounding_could_have_made_is_none():
    values = level_of("10.0", "10.0", "10.0", "10.1", "10.0", "10.4")
    assert grubbs_single("A", values, Fraction(1, 100)).verdict == OUTLIER
    found = grubbs_single("A", values)
    assert (found.statistic, found.p, found.verdict, found.indexes) == (None, None, None, (5,))
    assert "rests on the recorded step of 0.1" in found.reason


def test_a_value_far_out_stays_an_outlier_however_coarse_the_others_are_recorded():
    coarse = ("10.0", "10.1", "10.0", "10.1", "10.0", "10.0")
    assert grubbs_single("A", level_of(*coarse, "12.0")).verdict == OUTLIER
    assert grubbs_double("A", level_of(*coarse, "12.0", "12.1")).verdict == OUTLIER


@pytest.mark.parametrize(("test", "n"), [(grubbs_single, 3), (grubbs_single, 5), (grubbs_double, 5)])
@pytest.mark.parametrize("step", [0.1, 0.5, 2.0])
def test_rounding_alone_makes_no_more_proposals_than_stated(test, n, step):
    generator = np.random.default_rng(11)
    samples = generator.normal(size=(1500, n)) + generator.uniform(0, 10, size=(1500, 1))
    verdicts = [
        test("A", [Decimal10(int(one), 0) for one in units]).verdict
        for units in np.round(samples / step).tolist()
    ]
    proposals, outliers = (sum(one in words for one in verdicts) / 1500 for words in (BOTH, {OUTLIER}))
    # Three standard errors above 5 % and 1 %.
    assert proposals <= 0.05 + 3 * (0.05 * 0.95 / 1500) ** 0.5
    assert outliers <= 0.01 + 3 * (0.01 * 0.99 / 1500) ** 0.5


def test_means_are_tested_like_values():
    texts = {f"lab {at}": [value, value[:-1] + "9"] for at, value in enumerate(ORDINARY)}
    levels = analysed_texts(texts | {"lab x": ["5.40", "5.42", "5.44"]}).levels
    found = grubbs_single_of_means(levels, Fraction(1, 100))
    assert (found.level, found.indexes, found.verdict) == (None, (8,), OUTLIER)
    thousandths = [Decimal10(int(level.mean * 1000), -3) for level in levels]
    alone = grubbs_single("means", thousandths)
    assert (found.statistic, found.p, found.outlier_limit) == (alone.statistic, alone.p, alone.outlier_limit)
    pair, alone = grubbs_double_of_means(levels, Fraction(1, 100)), grubbs_double("means", thousandths)
    assert (pair.statistic, pair.p, pair.indexes) == (alone.statistic, alone.p, alone.indexes)


def test_two_means_are_too_few_for_a_test_and_equal_ones_have_none():
    two = analysed_texts({"a": ["1", "2"], "b": ["3", "4"]}).levels
    assert grubbs_single_of_means(two, Fraction(1)).reason == "the test needs 3 level means; here are 2"
    equal = analysed_texts({level: ["1", "2"] for level in "abcd"}).levels
    assert grubbs_double_of_means(equal, Fraction(1)).reason == "all level means of the study are equal"


def test_equal_distances_name_the_low_value():
    assert grubbs_single("A", level_of("3", "2", "1")).indexes == (2,)
    assert grubbs_double("A", level_of("4", "3", "2", "1")).indexes == (2, 3)


@either
@given(listed=units, constant=st.integers(-(10**9), 10**9), power=st.integers(-20, 20))
def test_unit_and_zero_point_do_not_matter(test, listed, constant, power):
    found = test("A", hundredths(listed))
    assert test("A", hundredths([one + constant for one in listed])) == found
    other = test("A", [Decimal10(one, power) for one in listed])
    assert replace(other, reason=found.reason) == found
    assert (other.reason is None) == (found.reason is None)


@either
@given(listed=units, random=st.randoms(use_true_random=False))
def test_the_order_of_rows_moves_the_places_alone(test, listed, random):
    moved = random.sample(listed, len(listed))
    found, again = test("A", hundredths(listed)), test("A", hundredths(moved))
    assert (again.statistic, again.p, again.verdict) == (found.statistic, found.p, found.verdict)
    assert sorted(moved[at] for at in again.indexes) == sorted(listed[at] for at in found.indexes)


@either
@given(listed=units)
def test_p_and_limits_say_the_same(test, listed):
    found = test("A", hundredths(listed))
    assume(found.reason is None)
    statistic = (
        float(found.statistic) if isinstance(found.statistic, Fraction) else found.statistic.square**0.5
    )
    for limit, alpha in ((found.straggler_limit, 0.05), (found.outlier_limit, 0.01)):
        if abs(found.p - alpha) > 1e-9:
            beyond = statistic < limit if found.small_is_extreme else statistic > limit
            assert beyond is (found.p <= alpha)


@given(units, st.integers(501, 2000), st.integers(1, 500))
def test_a_largest_value_moved_out_is_never_less_conspicuous(listed, far, further):
    one, other = ([*listed, edge] for edge in (far, far + further))
    for test in TESTS.values():
        before, after = test("A", hundredths(one)), test("A", hundredths(other))
        if before.indexes == after.indexes == (len(listed),) and before.p is not None:
            assert after.statistic.square >= before.statistic.square
            assert after.p <= before.p


@given(units, st.integers(501, 2000), st.integers(1, 500))
def test_two_largest_values_moved_out_together_are_never_less_conspicuous(listed, far, further):
    places = (len(listed), len(listed) + 1)
    before = grubbs_double("A", hundredths([*listed, far, far]))
    after = grubbs_double("A", hundredths([*listed, far + further, far + further]))
    if before.indexes == after.indexes == places and before.p is not None:
        assert after.statistic <= before.statistic
        assert after.p <= before.p


@pytest.mark.parametrize(
    ("test", "texts", "reason"),
    [
        (grubbs_single, ("1", "2"), "needs 3 values in the level; here are 2"),
        (grubbs_single, (), "needs 3 values in the level; here are 0"),
        (grubbs_double, ("1", "2", "4"), "needs 4 values in the level; here are 3"),
        (grubbs_single, ("1.0", "1.00", "1"), "all values of the level are equal"),
        (grubbs_double, ("1", "1", "1", "1"), "all values of the level are equal"),
        (grubbs_double, tuple(str(at * at) for at in range(101)), "for up to 100; here are 101"),
    ],
)
def test_a_test_that_cannot_be_done_is_a_row_with_the_reason(test, texts, reason):
    found = test("A", level_of(*texts))
    assert reason in found.reason
    assert found.level == "A"
    assert (found.indexes, found.statistic, found.p, found.verdict) == ((), None, None, None)
    assert (found.straggler_limit, found.outlier_limit) == (None, None)


@pytest.mark.parametrize("n", [3, 4, 8, 30, 1000])
@pytest.mark.parametrize("alpha", [0.05, 0.01])
@pytest.mark.parametrize("ends", [1, 2])
def test_the_limit_for_one_value_is_where_its_tail_is_alpha(n, alpha, ends):
    limit = grubbs_limit(alpha, n, ends)
    assert grubbs_tail(Root.of(Fraction(limit) ** 2), n, ends) == pytest.approx(alpha, rel=1e-6)


def test_the_levels_are_kept_in_simulated_samples():
    generator = np.random.default_rng(5)
    samples = generator.normal(size=(40_000, 7))
    g = np.abs(samples - samples.mean(axis=1, keepdims=True)).max(axis=1) / samples.std(axis=1, ddof=1)
    assert abs(float(np.mean(g > grubbs_limit(0.05, 7, 2))) - 0.05) < 0.0045
    assert abs(float(np.mean(g > grubbs_limit(0.01, 7, 2))) - 0.01) < 0.002


LEVELS = {
    "A": ["1.0", "1.1", "0.9"],
    "B": ["1.0", "1.2", "0.9"],
    "C": ["1.0", "2.6", "0.2"],
    "D": ["1.1", "1.0", "1.2"],
}


def test_words_for_a_variance():
    found = cochran_outlier(analysed_texts(LEVELS))
    assert (found.level, found.indexes, found.verdict) == ("C", (), OUTLIER)
    assert found.straggler_limit < found.outlier_limit < found.statistic
    f = float(found.statistic / (1 - found.statistic)) * 3
    assert found.p == pytest.approx(4 * stats.f.sf(f, 2, 6), rel=1e-9)
    assert cochran_outlier(analysed_texts(LEVELS | {"C": ["1.0", "1.3", "0.9"]})).verdict == NEITHER


def test_a_variance_test_that_cannot_be_done_is_a_row_with_the_reason():
    found = cochran_outlier(analysed_texts({"A": ["1", "1"], "B": ["2"], "C": ["3", "4"]}))
    assert "fewer than two levels vary" in found.reason
    assert (found.level, found.statistic, found.p, found.verdict) == (None, None, None, None)


@given(varying(levels=4), st.integers(-20, 20), st.integers(-(10**9), 10**9))
def test_a_variance_test_depends_neither_on_the_unit_nor_on_the_zero_point(data, power, constant):
    found = cochran_outlier(analysed(data))
    assert cochran_outlier(analysed(scaled(data, power))) == found
    assert cochran_outlier(analysed(shifted(data, constant))) == found
