"""How numbers print: a table of cases for each kind of figure."""

from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.exact import Root
from assayfolio.report.notation import (
    Scale,
    confidence,
    decimal,
    degrees_of_freedom,
    equals,
    fixed,
    kept_together,
    percent,
    probability,
    scientific,
    split_at_point,
    squared_unit,
    squares,
    statistic,
    three_digits,
)

NARROW = "\u202f"


def read(text: str) -> str:
    """A printed figure with plain blanks and a plain hyphen, for comparing."""
    return text.replace(NARROW, " ").replace("\u2212", "-")


@pytest.mark.requirement("REPORT-9")
@pytest.mark.parametrize(
    ("value", "places", "printed"),
    [
        (Fraction(1, 8), 2, "0.12"),  # half to even
        (Fraction(3, 8), 2, "0.38"),
        (Fraction(-1, 8), 2, "-0.12"),
        (Fraction(5, 2), 0, "2"),
        (Fraction(7, 2), 0, "4"),
        (Fraction(-1, 1000), 2, "0.00"),  # no negative zero
        (Fraction(10**13) + Fraction(1, 10), 2, "10000000000000.10"),
        (Fraction(1234), -2, "1200"),
        (Root.of(Fraction(2)), 5, "1.41421"),
        (0.1, 20, "0.10000000000000000555"),  # a float is the binary number it is
    ],
)
def test_a_fixed_number_of_decimals_rounds_once_half_to_even(value, places, printed):
    assert read(fixed(value, places)) == printed


def test_a_negative_number_has_a_true_minus_sign():
    assert fixed(Fraction(-3, 2), 1) == "\u22121.5"


@pytest.mark.parametrize(
    ("value", "digits", "printed"),
    [
        (3.4e-7, 2, "3.4 × 10⁻⁷"),
        (9.96e-5, 2, "1.0 × 10⁻⁴"),
        (Fraction(7740123), 4, "7.740 × 10⁶"),
        (Fraction(-12, 10**31), 2, "-1.2 × 10⁻³⁰"),
    ],
)
def test_powers_of_ten_are_superscripts(value, digits, printed):
    assert read(scientific(value, digits)) == printed


@pytest.mark.requirement("REPORT-2")
@pytest.mark.parametrize(
    ("p", "printed"),
    [
        (1.0, "1.0000"),
        (0.99997, "> 0.9999"),
        (0.5290, "0.5290"),
        (0.01234, "0.0123"),
        (0.001, "0.0010"),
        (0.00099, "9.9 × 10⁻⁴"),
        (3.44e-7, "3.4 × 10⁻⁷"),
        (1e-300, "1.0 × 10⁻³⁰⁰"),
        (9.9e-301, "< 1 × 10⁻³⁰⁰"),
        (0.0, "< 1 × 10⁻³⁰⁰"),
    ],
)
def test_a_p_value_is_exact_and_never_zero(p, printed):
    assert read(probability(p, Fraction(1, 20))) == printed


def test_a_tail_below_the_range_of_doubles_is_told_by_its_logarithm():
    assert read(probability(0.0, Fraction(1, 20), -363.4)) == "< 1 × 10⁻³⁰⁰"


@pytest.mark.parametrize(
    ("p", "alpha", "printed"),
    [
        (0.05003, Fraction(1, 20), "0.05003"),
        (0.0499999, Fraction(1, 20), "0.0499999"),
        (0.05, Fraction("0.0501"), "0.0500"),
        (1.04e-5, Fraction(1, 100000), "1.04 × 10⁻⁵"),
    ],
)
def test_a_p_value_never_reads_as_alpha_unless_it_is(p, alpha, printed):
    assert read(probability(p, alpha)) == printed


@pytest.mark.requirement("REPORT-2")
@given(
    st.floats(0, 1, exclude_min=True), st.sampled_from([Fraction(1, 20), Fraction(1, 100), Fraction(1, 1000)])
)
def test_no_p_value_prints_as_nothing(p, alpha):
    assert any(character in "123456789" for character in read(probability(p, alpha)).split("×")[0])


@pytest.mark.parametrize(
    ("value", "printed"),
    [
        (Fraction(17977, 1000), "17.977"),
        (Fraction(0), "0.000"),
        (Fraction(4, 10**5), "4.0 × 10⁻⁵"),
        (Fraction(7740123), "7.740 × 10⁶"),
        (Root(-1, Fraction(2)), "-1.414"),
    ],
)
def test_a_test_statistic_has_three_decimals(value, printed):
    assert read(statistic(value)) == printed


@pytest.mark.parametrize(
    ("share", "printed"),
    [(Fraction(19, 20), "95 %"), (Fraction(999, 1000), "99.9 %"), (Fraction(1, 3), "33.333333 %")],
)
def test_a_share_prints_with_the_decimals_it_needs(share, printed):
    assert read(percent(share)) == printed


@pytest.mark.parametrize(
    ("value", "printed"),
    [(Fraction(1, 20), "0.05"), (Fraction(-1, 2), "-0.5"), (Fraction(-1, 3), "-1/3"), (Fraction(3), "3")],
)
def test_a_planned_number_prints_exactly(value, printed):
    assert read(decimal(value)) == printed


@pytest.mark.requirement("REPORT-9")
def test_a_mean_has_one_decimal_more_than_the_data():
    scale = Scale.of([Fraction("10.02"), Fraction("9.88")], -2, "mg/L")
    assert (scale.value(Fraction("9.88")), scale.mean(Fraction(10005, 1000))) == ("9.88", "10.005")
    assert read(scale.with_unit("9.88")) == "9.88 mg/L"


def test_very_small_values_share_a_power_of_ten_in_the_head_of_the_column():
    scale = Scale.of([Fraction(12, 10**31)], -31, "m²")
    assert read(scale.heading) == "10⁻³⁰ m²"
    assert scale.mean(Fraction(12, 10**31)) == "1.20"
    assert read(scale.with_unit("1.20")) == "1.20 × 10⁻³⁰ m²"


def test_values_typed_with_a_large_power_of_ten_are_not_padded_with_zeros():
    scale = Scale.of([Fraction(12 * 10**20)], 20, None)
    assert (scale.power, scale.mean(Fraction(12 * 10**20))) == (21, "1.20")


def test_more_digits_than_anyone_can_read_are_rounded():
    scale = Scale.of([Fraction(10**37)], 0, None)
    assert len(scale.mean(Fraction(10**37))) <= 21


@pytest.mark.requirement("WORDS-6")
def test_standard_deviations_have_at_most_three_digits_and_none_is_lost():
    scale = Scale.of([Fraction("10.02")], -2, None)
    largest = Root.of(Fraction("0.114") ** 2)
    assert scale.spread(largest, largest) == "0.114"
    assert scale.spread(Root.of(Fraction("0.08024") ** 2), largest) == "0.0802"
    assert read(scale.spread(Root.of(Fraction("0.00000123") ** 2), largest)) == "1.23 × 10⁻⁶"
    assert scale.spread(Root(0, Fraction(0)), largest) == "0"


def test_sums_of_squares_of_one_table_agree_in_decimals():
    assert squares([Fraction("0.4088462"), Fraction("0.151617"), Fraction(0)], Fraction("0.0075808")) == [
        "0.408846",
        "0.151617",
        "0.000000",
    ]


def test_very_long_sums_of_squares_use_a_power_of_ten():
    printed = [read(text) for text in squares([Fraction(10**13), Fraction(3, 1000)], Fraction(3, 1000))]
    assert printed == ["1.0000 × 10¹³", "3.0000 × 10⁻³"]


@pytest.mark.parametrize(("unit", "printed"), [("mg", "mg²"), ("mg/L", "(mg/L)²"), (None, "")])
def test_the_unit_of_a_sum_of_squares(unit, printed):
    assert squared_unit(unit) == printed


@pytest.mark.parametrize(
    ("text", "parts"),
    [
        ("10.05", ("10", ".05")),
        ("24", ("24", "")),
        (f"3.4{NARROW}×{NARROW}10⁻⁷", ("3", f".4{NARROW}×{NARROW}10⁻⁷")),
        (f"<{NARROW}1{NARROW}×{NARROW}10⁻³⁰⁰", (f"<{NARROW}1", f"{NARROW}×{NARROW}10⁻³⁰⁰")),
        (f">{NARROW}0.9999", (f">{NARROW}0", ".9999")),
        ("–", ("", "–")),
    ],
)
def test_columns_align_where_the_decimal_point_stands_or_would_stand(text, parts):
    assert split_at_point(text) == parts


def test_a_bound_is_not_introduced_by_an_equals_sign():
    assert [read(equals(text)) for text in ("0.0123", "< 1", "> 0.9999")] == ["= 0.0123", "< 1", "> 0.9999"]


@pytest.mark.parametrize(
    ("typed", "set_as"),
    [
        ("drying at 102 °C", "drying at 102\u00a0°C"),
        ("5 mg/L of 20 % acid", "5\u00a0mg/L of 20\u00a0% acid"),
        ("12 m² in 3 h", "12\u00a0m² in 3\u00a0h"),
        ("kit 4 in use, 2 men, lot 7 granules", "kit 4 in use, 2 men, lot 7 granules"),
        ("one °C", "one °C"),
    ],
)
def test_a_number_is_kept_with_the_unit_that_follows_it(typed, set_as):
    assert kept_together(typed) == set_as


@pytest.mark.parametrize(
    ("value", "printed"),
    [
        (Fraction(0), "0"),
        (Root.of(Fraction(2)), "1.41"),
        (-0.00012345, "-0.000123"),
        (1234567.0, "1.23 × 10⁶"),
        (12345.6, "12346"),
        (9.999e-7, "1.00 × 10⁻⁶"),
    ],
)
def test_three_digits_are_a_plain_figure_where_that_is_not_long(value, printed):
    assert read(three_digits(value)) == printed


@pytest.mark.parametrize(
    ("df", "printed"),
    [(20, "20"), (20.0, "20"), (12.7418, "12.74"), (Fraction(25, 2), "12.50"), (0.004, "0.00400")],
)
def test_degrees_of_freedom_are_whole_or_have_two_decimals(df, printed):
    assert read(degrees_of_freedom(df)) == printed


@pytest.mark.parametrize(
    ("share", "printed"),
    [
        (Fraction(19, 20), "95 %"),
        (1 - Fraction(1, 40), "97.5 %"),
        (1 - Fraction(1, 60), "98.33 %"),
        (Fraction(9999, 10000), "99.99 %"),
    ],
)
def test_the_level_of_an_interval_has_two_decimals_at_most(share, printed):
    assert read(confidence(share)) == printed


@pytest.mark.parametrize(
    ("value", "printed"),
    [
        (Fraction("5e-31"), "5 × 10⁻³¹"),
        (Fraction("1.25e14"), "1.25 × 10¹⁴"),
        (Fraction(1, 3), "1/3"),
        (Fraction("-0.045"), "-0.045"),
    ],
)
def test_a_planned_number_keeps_all_its_digits(value, printed):
    assert read(decimal(value)) == printed
