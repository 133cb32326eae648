"""Limits of charts of individual values and moving ranges: exact centre lines, exact decisions on lines."""

import math
from fractions import Fraction

import mpmath
import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.statistics.control_charts import (
    D2,
    D3,
    D4,
    ChartLimits,
    chart_limits,
    exceeds_pi,
    moving_ranges,
)
from assayfolio.statistics.oneway import NotComputableError

values = st.lists(st.fractions(-1000, 1000, max_denominator=1000), min_size=2, max_size=30)


def fractions(*texts: str) -> list[Fraction]:
    return [Fraction(text) for text in texts]


def test_the_constants_are_mean_and_standard_deviation_of_the_range_of_two_normal_values() -> None:
    with mpmath.workdps(40):

        def moment(power):
            # |X1 - X2| is sqrt(2) times the absolute value of a standard normal value
            return 2 * mpmath.quad(
                lambda z: (mpmath.sqrt(2) * z) ** power * mpmath.npdf(z), [0, 2, 5, 10, 40]
            )

        mean = moment(1)
        deviation = mpmath.sqrt(moment(2) - mean**2)
        assert float(mean) == pytest.approx(D2, rel=1e-15)
        assert float(deviation) == pytest.approx(D3, rel=1e-15)
        assert float(1 + 3 * deviation / mean) == pytest.approx(D4, rel=1e-15)


def test_the_limits_are_the_mean_and_three_mean_ranges_over_d2() -> None:
    limits = chart_limits(fractions("10", "12", "11", "15"))
    assert limits.centre == 12
    assert limits.mean_range == Fraction(7, 3)
    assert limits.line(3) == pytest.approx(12 + 3 * (7 / 3) / D2, rel=1e-11)
    assert limits.line(-3) == pytest.approx(12 - 3 * (7 / 3) / D2, rel=1e-11)
    assert limits.range_limit == pytest.approx(7 / 3 * 3.2665319192886, rel=1e-11)


def test_a_baseline_that_never_changes_or_has_one_value_gives_no_limits() -> None:
    with pytest.raises(NotComputableError, match="never differ"):
        chart_limits(fractions("2", "2", "2"))
    with pytest.raises(NotComputableError, match="two values"):
        chart_limits(fractions("2"))


def test_a_value_stands_in_the_zone_between_the_lines_around_it() -> None:
    limits = ChartLimits(20, Fraction(0), Fraction(D2))  # one standard deviation is one, but for a rounding
    places = {"0": 0, "0.4": 1, "-0.4": -1, "1.5": 2, "-2.5": -3, "3.5": 4, "-9": -4}
    assert {text: limits.zone(Fraction(text)) for text in places} == places


@given(values, st.integers(1, 3), st.integers(-1, 1))
def test_beyond_a_line_is_decided_to_the_last_digit(baseline, sigmas, side):
    ranges = moving_ranges(baseline)
    if not any(ranges) or not side:
        return
    limits = chart_limits(baseline)
    with mpmath.workdps(60):
        step = (
            mpmath.mpf(limits.mean_range.numerator)
            / limits.mean_range.denominator
            * mpmath.sqrt(mpmath.pi)
            / 2
        )
        line = mpmath.mpf(limits.centre.numerator) / limits.centre.denominator + side * sigmas * step
        scaled = int(mpmath.floor(line * mpmath.mpf(10) ** 40))
    below, above = Fraction(scaled, 10**40), Fraction(scaled + 1, 10**40)
    inner, outer = (below, above) if side > 0 else (above, below)
    assert limits.zone(inner) == side * sigmas
    assert limits.zone(outer) == side * (sigmas + 1)


@given(values)
def test_a_moving_range_is_beyond_its_limit_just_where_it_is_larger(baseline):
    if not any(moving_ranges(baseline)):
        return
    limits = chart_limits(baseline)
    limit = limits.mean_range * Fraction(D4)
    assert limits.range_is_beyond(limit * Fraction(10**12 + 1, 10**12))
    assert not limits.range_is_beyond(limit * Fraction(10**12 - 1, 10**12))


@given(values, st.fractions(-100, 100), st.fractions(Fraction(1, 100), 100))
def test_zones_do_not_depend_on_the_unit_of_measurement(baseline, shift, factor):
    if not any(moving_ranges(baseline)):
        return
    other = [shift + factor * value for value in baseline]
    limits, moved = chart_limits(baseline), chart_limits(other)
    assert [limits.zone(one) for one in baseline] == [moved.zone(one) for one in other]


def test_pi_lies_between_any_two_of_its_neighbours() -> None:
    digits = "3.14159265358979323846264338327950288419716939937510582097494459230781640628620899"
    assert not exceeds_pi(Fraction(digits))
    assert exceeds_pi(Fraction(digits) + Fraction(1, 10**80))
    assert not exceeds_pi(Fraction(math.pi))
    assert exceeds_pi(Fraction(355, 113))
