"""Adjusting p-values for the size of a family: what each method promises about any list of tails."""

from decimal import Context, Decimal
from math import log10

import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.statistics.adjustment import (
    P_ADJUSTMENTS,
    Tail,
    bonferroni,
    bonferroni_level,
    hochberg,
    holm,
    sidak,
    sidak_level,
    stated,
    unadjusted,
)

CONTEXT = Context(prec=400, Emin=-999_999, Emax=999_999)


def tail(p: float) -> Tail:
    return Tail(p, log10(p))


tails = st.lists(st.floats(1e-300, 1.0).map(tail), min_size=1, max_size=12)


@given(tails, st.sampled_from(sorted(P_ADJUSTMENTS)))
def test_an_adjusted_p_is_never_below_the_raw_one_nor_above_one(raw, adjust):
    for before, after in zip(raw, P_ADJUSTMENTS[adjust](raw), strict=True):
        assert before.p * (1 - 1e-15) <= after.p <= 1.0
        assert after.log10_p <= 0.0


@given(tails)
def test_holm_lies_between_raw_and_bonferroni(raw):
    for before, stepped, most in zip(raw, holm(raw), bonferroni(raw), strict=True):
        assert before.p <= stepped.p <= most.p


@given(tails)
def test_sidak_lies_between_raw_and_bonferroni(raw):
    for before, single, most in zip(raw, sidak(raw), bonferroni(raw), strict=True):
        assert before.p * (1 - 1e-15) <= single.p <= most.p * (1 + 1e-15)


@given(tails)
def test_hochberg_lies_between_raw_and_holm(raw):
    for before, up, down in zip(raw, hochberg(raw), holm(raw), strict=True):
        assert before.p <= up.p <= down.p
        assert before.log10_p <= up.log10_p <= down.log10_p


@given(tails)
def test_hochberg_leaves_the_largest_as_it_is(raw):
    largest = max(range(len(raw)), key=lambda at: raw[at].p)
    assert hochberg(raw)[largest] == raw[largest]


@given(tails, st.sampled_from([holm, hochberg]))
def test_a_stepwise_method_keeps_the_order_of_the_raw_p(raw, stepwise):
    adjusted = stepwise(raw)
    in_order = sorted(range(len(raw)), key=lambda at: raw[at].p)
    stepped = [adjusted[at].p for at in in_order]
    assert stepped == sorted(stepped)


@given(tails, st.floats(0.001, 0.5))
def test_hochberg_rejects_all_up_to_the_largest_that_meets_its_share_of_alpha(raw, alpha):
    in_order = sorted(one.p for one in raw)
    meeting = [at for at, p in enumerate(in_order) if p * (len(raw) - at) <= alpha]
    rejected = [one.p for one in raw if meeting and one.p <= in_order[meeting[-1]]]
    assert [
        before.p for before, after in zip(raw, hochberg(raw), strict=True) if after.p <= alpha
    ] == rejected


def test_two_p_just_below_alpha_differ_by_hochberg_and_not_by_holm():
    raw = [tail(0.04), tail(0.045)]
    assert [one.p for one in hochberg(raw)] == [0.045, 0.045]
    assert [one.p for one in holm(raw)] == [0.08, 0.08]


@given(tails, st.randoms(use_true_random=False))
def test_the_order_of_the_rows_does_not_matter(raw, random):
    places = random.sample(range(len(raw)), len(raw))
    for adjust in P_ADJUSTMENTS.values():
        adjusted, shuffled = adjust(raw), adjust([raw[at] for at in places])
        assert [adjusted[at] for at in places] == list(shuffled)


@given(tails, st.sampled_from(sorted(P_ADJUSTMENTS)))
def test_the_logarithm_is_that_of_p(raw, adjust):
    for after in P_ADJUSTMENTS[adjust](raw):
        assert after.log10_p == pytest.approx(log10(after.p), abs=1e-12)


@pytest.mark.parametrize("adjust", sorted(P_ADJUSTMENTS))
def test_a_family_of_one_is_not_adjusted(adjust):
    for p in (1e-300, 0.03, 1 - 2**-53, 1.0):
        assert P_ADJUSTMENTS[adjust]([tail(p)]) == (tail(p),)


def test_equal_p_stay_equal():
    for adjust in P_ADJUSTMENTS.values():
        assert len(set(adjust([tail(0.02)] * 4))) == 1


@given(st.floats(1e-300, 1 - 2**-53), st.integers(2, 20_000))
def test_sidak_keeps_relative_accuracy_in_every_range(p, size):
    exact = CONTEXT.subtract(1, CONTEXT.power(CONTEXT.subtract(1, Decimal(p)), size))
    found = sidak([tail(p)] * size)[0].p
    assert found == pytest.approx(float(exact), rel=1e-12, abs=1e-300)


def test_sidak_where_p_is_too_small_for_a_double():
    found = sidak([Tail(0.0, -400.0)] * 10)[0]
    assert found == Tail(0.0, pytest.approx(-399.0, abs=1e-12))


def test_stepwise_and_bonferroni_where_p_is_too_small_for_a_double():
    raw = [Tail(0.0, -400.0), Tail(0.0, -500.0), Tail(0.2, log10(0.2))]
    assert [one.log10_p for one in bonferroni(raw)] == pytest.approx(
        [-400 + log10(3), -500 + log10(3), log10(0.6)]
    )
    for stepwise in (holm, hochberg):
        assert [one.log10_p for one in stepwise(raw)] == pytest.approx(
            [-400 + log10(2), -500 + log10(3), log10(0.2)]
        )


@given(st.floats(1e-6, 0.5), st.integers(1, 500))
def test_a_p_at_the_level_of_one_interval_adjusts_to_the_level_of_the_family(alpha, size):
    for level, adjust in ((bonferroni_level, bonferroni), (sidak_level, sidak)):
        raw = [tail(level(alpha, size))] * size
        assert adjust(raw)[0].p == pytest.approx(alpha, rel=1e-12)


@given(tails)
def test_none_leaves_every_p_as_it_is(raw):
    assert unadjusted(raw) == tuple(raw)


@given(st.floats(1e-280, 1.0))
def test_a_stated_p_has_twelve_digits_and_its_own_logarithm(p):
    said = stated(tail(p))
    assert said.p == float(f"{p:.11e}")
    assert said.log10_p == pytest.approx(log10(said.p), rel=1e-11)


def test_a_stated_p_too_small_for_a_double_keeps_its_logarithm():
    assert stated(Tail(0.0, -364.123456789012)) == Tail(0.0, -364.123456789)


def test_a_stated_p_near_one_has_no_negative_zero():
    for one in (Tail(1.0, 0.0), Tail(1.0, -1e-17), Tail(1 - 2**-53, -4.8e-17)):
        assert str(stated(one).log10_p) == "0.0"
