"""The step in which values are recorded against their spread."""

from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.statistics.resolution import resolution
from support.measured import analysed, scaled, varying
from support.reference import analysed as analysed_texts
from support.reference import decimals


def found_in(data):
    return resolution(decimals(data), analysed_texts(data))


def test_the_step_is_the_finest_recorded_place():
    assert found_in({"A": ["1.5", "1.62"], "B": ["1.7", "1.5"]}).step == Fraction(1, 100)
    assert found_in({"A": ["1.50", "1.60"], "B": ["1.70", "1.50"]}).step == Fraction(1, 100)
    assert found_in({"A": ["150", "160"], "B": ["170", "150"]}).step == 1
    assert found_in({"A": ["15e1", "16e1"], "B": ["17e1", "15e1"]}).step == 10


def test_a_larger_step_shows_in_eight_different_values():
    readings = ["1.05", "1.10", "1.20", "1.35", "0.95", "1.00", "1.40", "1.25"]
    assert found_in({"A": readings[:4], "B": readings[4:]}).step == Fraction(5, 100)
    assert found_in({"A": readings[:4], "B": readings[4:7] + readings[:1]}).step == Fraction(1, 100)
    offset = [f"{float(text) + 0.02:.2f}" for text in readings]
    assert found_in({"A": offset[:4], "B": offset[4:]}).step == Fraction(5, 100)


def test_the_limit_is_half_the_pooled_standard_deviation_exactly():
    # Levels at -1, 1 and at 0, 2: SS within 4 on 2, so s^2 = 2 and a step of 1 is more than s / 2.
    assert found_in({"A": ["-1", "1"], "B": ["0", "2"]}).coarse
    # SS within 16 on 4: s = 2 and the step of 1 is s / 2, which is not more.
    even = found_in({"A": ["-2", "2", "0"], "B": ["0", "4", "2"]})
    assert even.pooled_sd.square == 4
    assert not even.coarse
    assert even.rounding_share == Fraction(1, 48)


def test_where_nothing_varies_the_step_is_coarse():
    found = found_in({"A": ["1.0", "1.0"], "B": ["1.1", "1.1"]})
    assert found.coarse
    assert found.rounding_share is None


@given(varying(), st.integers(-20, 20))
def test_the_unit_does_not_matter(data, power):
    one = resolution(list(data.items()), analysed(data))
    other = resolution(list(scaled(data, power).items()), analysed(scaled(data, power)))
    assert other.step == one.step * Fraction(10) ** power
    assert (other.coarse, other.rounding_share) == (one.coarse, one.rounding_share)


@pytest.mark.parametrize("digits", [0, 1, 2, 3])
def test_rounding_further_is_never_finer(digits):
    data = {"A": [f"{1.23456 + 0.1 * at:.{digits}f}" for at in range(6)], "B": ["1.1", "1.9"]}
    finer = {"A": [f"{1.23456 + 0.1 * at:.{digits + 1}f}" for at in range(6)], "B": ["1.1", "1.9"]}
    assert found_in(data).step >= found_in(finer).step
