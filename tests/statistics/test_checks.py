"""Checks of assumptions: equal variances and normal residuals."""

from fractions import Fraction
from statistics import median

import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.exact import Decimal10, ExactSums
from assayfolio.statistics.checks import brown_forsythe_variances, residuals, shapiro_wilk
from assayfolio.statistics.oneway import NotComputableError, one_way
from support.reference import decimals

values = st.builds(Decimal10, st.integers(-(10**5), 10**5), st.integers(-3, 1))
groups = st.lists(st.lists(values, min_size=1, max_size=8), min_size=2, max_size=5)


@given(groups)
def test_the_statistic_is_f_of_the_distances_from_the_medians(listed):
    named = [(f"L{at}", one) for at, one in enumerate(listed)]
    distances = []
    for level, one in named:
        middle = median(value.fraction for value in one)
        # Twice the distance in thousandths is a whole number here.
        units = [abs(value.fraction - middle) * 2000 for value in one]
        assert all(unit.denominator == 1 for unit in units)
        distances.append((level, ExactSums.of(Decimal10(int(unit), 0) for unit in units)))
    try:
        expected = one_way(distances).f
    except NotComputableError:
        expected = None
    if expected is None:
        with pytest.raises(NotComputableError):
            brown_forsythe_variances(named)
    else:
        assert brown_forsythe_variances(named).f == expected


def test_levels_of_two_values_say_nothing_about_variances():
    with pytest.raises(NotComputableError, match="do not vary within any level"):
        brown_forsythe_variances(decimals({"A": ["1", "9"], "B": ["2", "3"]}))


def test_a_level_with_one_value_takes_part_with_distance_zero():
    check = brown_forsythe_variances(decimals({"A": ["1", "2", "6"], "B": ["5"]}))
    # Distances 1, 0, 4 and 0: means 5/3 and 0; SS between 25/12, SS within 26/3 on 2.
    assert check.f == Fraction(25, 12) / (Fraction(26, 3) / 2)
    assert check.df == (1, 2)


def test_one_value_at_every_level_has_no_check_of_variances():
    with pytest.raises(NotComputableError, match="one value at every level"):
        brown_forsythe_variances(decimals({"A": ["1"], "B": ["2"]}))


def test_residuals_are_differences_from_the_exact_mean_rounded_once():
    data = {"A": ["1000000000000.1", "1000000000000.2"], "B": ["0.1", "0.2", "0.4"]}
    expected = [-0.05, 0.05, *(float(Fraction(x) - Fraction(7, 30)) for x in ("1/10", "2/10", "4/10"))]
    assert list(residuals(decimals(data))) == expected


@given(groups)
def test_residuals_are_the_nearest_doubles(listed):
    named = [(f"L{at}", one) for at, one in enumerate(listed)]
    expected = []
    for one in listed:
        mean = sum((value.fraction for value in one), Fraction(0)) / len(one)
        expected.extend(float(value.fraction - mean) for value in one)
    assert list(residuals(named)) == expected


SAMPLE = (0.31, -0.12, 0.05, 0.44, -0.6, 0.02, -0.09, 0.17, -0.18)


@pytest.mark.parametrize("power", [-120, -80, 0, 80])
def test_normality_does_not_depend_on_the_unit(power):
    plain = shapiro_wilk(SAMPLE)
    scaled = shapiro_wilk([value * 10.0**power for value in SAMPLE])
    assert scaled.w == pytest.approx(plain.w, rel=1e-12)
    assert scaled.p == pytest.approx(plain.p, rel=1e-11)


def test_normality_does_not_depend_on_order():
    assert shapiro_wilk(sorted(SAMPLE)) == shapiro_wilk(SAMPLE)


@pytest.mark.parametrize("n", [0, 1, 2, 5001])
def test_normality_is_defined_for_3_to_5000_values(n):
    with pytest.raises(NotComputableError, match="3 to 5,000 values"):
        shapiro_wilk([float(at % 17) for at in range(n)])


@pytest.mark.parametrize("n", [3, 5000])
def test_normality_at_the_limits_of_its_definition(n):
    check = shapiro_wilk([float(at * at % 101) for at in range(n)])
    assert 0 < check.w <= 1
    assert 0 <= check.p <= 1


def test_equal_residuals_have_no_check_of_normality():
    with pytest.raises(NotComputableError, match="all residuals are equal"):
        shapiro_wilk([0.0, 0.0, 0.0, 0.0])
