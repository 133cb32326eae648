"""Decimals stay what was typed, sums are exact, and a result is rounded once and correctly."""

import decimal
import math
from fractions import Fraction
from itertools import permutations

import mpmath  # type: ignore[import-untyped]
import pytest
from hypothesis import assume, example, given, settings
from hypothesis import strategies as st

from assayfolio.exact import (
    MAX_DIGITS,
    MAX_EXPONENT,
    Decimal10,
    ExactSums,
    NotADecimalError,
    Root,
    decimal_of,
    exact_mean,
    in_one_unit,
    magnitude,
    parse_decimal,
    round_significant,
    rounded_units,
    to_double,
)

SIXTY_DIGITS = decimal.Context(prec=60, rounding=decimal.ROUND_HALF_EVEN, Emax=10**6, Emin=-(10**6))

decimals = st.builds(
    Decimal10,
    st.integers(-(10**MAX_DIGITS) + 1, 10**MAX_DIGITS - 1),
    st.integers(-MAX_EXPONENT, MAX_EXPONENT),
)
divided = st.builds(
    Decimal10,
    st.integers(-(10**MAX_DIGITS) + 1, 10**MAX_DIGITS - 1),
    st.integers(-MAX_EXPONENT, MAX_EXPONENT),
    st.integers(1, 60),
)
rationals = st.builds(Fraction, st.integers(-(10**40), 10**40), st.integers(1, 10**40))
ordinary = st.builds(lambda n, d: Fraction(n, 10**d), st.integers(-(10**9), 10**9), st.integers(0, 9))
positives = st.builds(
    lambda n, d, power: Fraction(n, d) * Fraction(10) ** power,
    st.integers(1, 10**40),
    st.integers(1, 10**40),
    st.integers(-120, 120),
)


def near(value: Fraction) -> decimal.Decimal:
    """`value` to 60 digits."""
    return SIXTY_DIGITS.divide(decimal.Decimal(value.numerator), decimal.Decimal(value.denominator))


class TestParsing:
    """What a person may type as a decimal, and what it stands for."""

    @pytest.mark.parametrize(
        ("text", "mantissa", "exponent"),
        [
            ("0", 0, 0),
            ("-0", 0, 0),
            ("0.00", 0, -2),
            ("12", 12, 0),
            ("012", 12, 0),
            ("1.50", 150, -2),
            ("+1.50", 150, -2),
            ("-1.50", -150, -2),
            (".5", 5, -1),
            ("5.", 5, 0),
            ("1.5e3", 15, 2),
            ("1.5E+3", 15, 2),
            ("1.5e-3", 15, -4),
            ("1e007", 1, 7),
            ("1e60", 1, 60),
            ("1e-60", 1, -60),
            ("0." + "0" * 59 + "1", 1, -60),
            ("9" * 38, 10**38 - 1, 0),
            ("0" * 50 + "9" * 38, 10**38 - 1, 0),
            (" \t1.5\t ", 15, -1),
        ],
    )
    def test_a_decimal_keeps_its_digits(self, text: str, mantissa: int, exponent: int) -> None:
        assert parse_decimal(text) == Decimal10(mantissa, exponent)

    @pytest.mark.parametrize(
        ("text", "reason"),
        [
            ("", "blank"),
            (" \t ", "blank"),
            (".", "not a number"),
            ("-", "not a number"),
            ("+.e5", "not a number"),
            ("e5", "not a number"),
            ("1e", "not a number"),
            ("1e1.5", "not a number"),
            ("--1", "not a number"),
            ("1.2.3", "not a number"),
            ("1_000", "not a number"),
            ("0x10", "not a number"),
            ("1/3", "not a number"),
            ("1\n", "not a number"),
            ("\u0661", "not a number"),
            ("\uff11", "not a number"),
            ("NaN", "not a number"),
            ("-Infinity", "not a number"),
            ("#N/A", "not a number"),
            ("<0.05", "a value reported against a limit"),
            ("\u22640.05", "a value reported against a limit"),
            ("1,5", "not a number: it holds a comma"),
            ("1,234.5", "not a number: it holds both a point and a comma"),
            ("1 000", "not a number: it holds a space"),
            ("1'000", "not a number: it holds an apostrophe"),
            ("1\u202f000", "not a number: it holds a narrow no-break space"),
            ("\u22121", "not a number: it holds a minus sign U+2212; type the hyphen-minus"),
            ("9" * 39, "more than 38 digits (39)"),
            ("1." + "0" * 38, "more than 38 digits (39)"),
            ("1e61", "the power of ten is beyond +-60"),
            ("1.5e61", "the power of ten is beyond +-60"),
            ("1.5e-60", "the power of ten is beyond +-60"),
            ("0." + "0" * 60 + "1", "the power of ten is beyond +-60"),
            ("1e99999999999999999999", "the power of ten is beyond +-60"),
            ("1" * 393, "393 characters are too many for a number"),
        ],
    )
    def test_anything_else_is_refused_with_the_reason(self, text: str, reason: str) -> None:
        with pytest.raises(NotADecimalError) as caught:
            parse_decimal(text)
        assert str(caught.value) == reason

    @pytest.mark.parametrize(
        ("text", "mantissa", "exponent"),
        [("1,50", 150, -2), (",5", 5, -1), ("12", 12, 0), ("-1,5e3", -15, 2)],
    )
    def test_a_declared_decimal_comma_takes_the_place_of_the_point(
        self, text: str, mantissa: int, exponent: int
    ) -> None:
        assert parse_decimal(text, ",") == Decimal10(mantissa, exponent)

    @pytest.mark.parametrize(
        ("text", "reason"),
        [
            ("1.5", "a decimal point where a decimal comma is declared"),
            ("1.234,5", "not a number: it holds both a point and a comma"),
            ("<0.05", "a value reported against a limit"),
            ("<0,05", "a value reported against a limit"),
            ("1,2,3", "not a number"),
        ],
    )
    def test_a_declared_decimal_comma_is_the_only_mark(self, text: str, reason: str) -> None:
        with pytest.raises(NotADecimalError) as caught:
            parse_decimal(text, ",")
        assert str(caught.value) == reason

    @given(
        text=st.text(max_size=12)
        | st.from_regex(r"[+-]?[0-9.,]{1,8}(?:[eE][+-]?[0-9]{1,2})?", fullmatch=True)
    )
    @example(text="1E5")
    def test_what_is_taken_is_what_pythons_decimal_takes_and_nothing_more(self, text: str) -> None:
        try:
            value = parse_decimal(text)
        except NotADecimalError:
            return
        assert value.fraction == Fraction(decimal.Decimal(text.strip(" \t")))

    def test_the_recorded_places_are_those_behind_the_mark(self) -> None:
        assert [parse_decimal(text).places for text in ("1.50", "15", "1.5e3", "1e-3")] == [2, 0, 0, 3]


class TestSums:
    """Sums of decimals are exact and do not depend on how they are divided and merged."""

    @given(values=st.lists(decimals | divided, max_size=12))
    def test_sums_are_those_of_the_rational_values(self, values: list[Decimal10]) -> None:
        sums = ExactSums.of(values)
        assert sums.n == len(values)
        assert sums.sum == sum((value.fraction for value in values), Fraction(0))
        assert sums.sum_of_squares == sum((value.fraction**2 for value in values), Fraction(0))

    @given(parts=st.lists(st.lists(decimals | divided, max_size=4), min_size=3, max_size=3))
    @example(parts=[[], [Decimal10(3, 5)], []])
    @example(parts=[[Decimal10(1, 0, 3)], [Decimal10(1, -2, 4)], [Decimal10(3, 5)]])
    def test_any_order_of_merging_gives_the_same_value(self, parts: list[list[Decimal10]]) -> None:
        whole = ExactSums.of([value for part in parts for value in part])
        for a, b, c in permutations([ExactSums.of(part) for part in parts]):
            assert a.merged(b).merged(c) == whole
            assert a.merged(b.merged(c)) == whole

    @given(values=st.lists(decimals | divided, max_size=8))
    def test_the_printed_sums_are_the_exact_sums_without_needless_zeros(
        self, values: list[Decimal10]
    ) -> None:
        sums = ExactSums.of(values)
        for text, exact in ((sums.sum_text, sums.sum), (sums.sum_of_squares_text, sums.sum_of_squares)):
            assert Fraction(text) == exact
            assert not ("." in text and text.endswith(("0", ".")))
            assert text not in {"-0", ""}

    @pytest.mark.parametrize(
        ("values", "total", "squares"),
        [
            ([], "0", "0"),
            (["0.00"], "0", "0"),
            (["-0.5", "0.5"], "0", "0.5"),
            (["1.10", "2.20"], "3.3", "6.05"),
            (["-1.5"], "-1.5", "2.25"),
            (["1e3", "2e3"], "3000", "5000000"),
            (["1000000000000.4", "0.003"], "1000000000000.403", "1000000000000800000000000.160009"),
        ],
    )
    def test_sums_by_hand(self, values: list[str], total: str, squares: str) -> None:
        sums = ExactSums.of(parse_decimal(value) for value in values)
        assert (sums.sum_text, sums.sum_of_squares_text) == (total, squares)


class TestFormedExactly:
    """What is formed of decimals before the analysis stays exact, and keeps the places of the record."""

    @given(value=divided)
    def test_a_divisor_divides(self, value: Decimal10) -> None:
        assert value.fraction == Decimal10(value.mantissa, value.exponent).fraction / value.divisor

    @given(values=st.lists(decimals | divided, min_size=1, max_size=6))
    def test_a_mean_of_repeats_is_the_exact_mean(self, values: list[Decimal10]) -> None:
        mean = exact_mean(values)
        assert mean.fraction == sum((value.fraction for value in values), Fraction(0)) / len(values)
        assert mean.places == max(value.places for value in values)

    def test_a_mean_of_three_is_no_decimal_and_its_sum_is_printed_as_a_fraction(self) -> None:
        mean = exact_mean([parse_decimal(text) for text in ("0.1", "0.1", "0.2")])
        assert mean == Decimal10(4, -1, 3)
        assert ExactSums.of([mean]).sum_text == "2/15"
        assert ExactSums.of([mean, mean]).sum_of_squares_text == "8/225"

    def test_sums_of_means_are_printed_as_decimals_where_one_is_exact(self) -> None:
        third, quarter = Decimal10(1, 0, 3), Decimal10(1, -1, 4)
        assert ExactSums.of([third, third, third]).sum_text == "1"
        assert ExactSums.of([quarter]).sum_text == "0.025"

    @given(value=decimals | divided, factor=rationals)
    def test_a_value_times_a_factor_is_exact(self, value: Decimal10, factor: Fraction) -> None:
        assert value.times(factor).fraction == value.fraction * factor

    @pytest.mark.parametrize(
        ("text", "factor", "converted"),
        [
            ("412", Fraction(1, 1000), Decimal10(412, -3)),
            ("0.4120", Fraction(1000), Decimal10(4120, -1)),
            ("1.50", Fraction(1, 3), Decimal10(150, -2, 3)),
            ("1.5", Fraction(60), Decimal10(90, 0)),
            ("0.00", Fraction(7, 4), Decimal10(0, -2, 4)),
            ("2.5", Fraction(0), Decimal10(0, -1)),
        ],
    )
    def test_powers_of_ten_move_the_point(self, text: str, factor: Fraction, converted: Decimal10) -> None:
        assert parse_decimal(text).times(factor) == converted

    @given(value=rationals | ordinary)
    def test_a_rational_becomes_the_shortest_decimal_or_a_whole_number_over_a_divisor(
        self, value: Fraction
    ) -> None:
        found = decimal_of(value)
        assert found.fraction == value
        if found.divisor == 1:
            assert found.exponent == 0 or found.mantissa % 10
        else:
            assert found.exponent == 0
            assert math.gcd(found.divisor, 10**200) < found.divisor

    @given(values=st.lists(decimals | divided, max_size=8))
    def test_numbers_of_one_unit_are_the_values(self, values: list[Decimal10]) -> None:
        numbers, exponent, divisor = in_one_unit(values)
        unit = Fraction(10) ** exponent / divisor
        assert [number * unit for number in numbers] == [value.fraction for value in values]


class TestDoubles:
    """The double of a rational or a root is the nearest one, ties to even."""

    @given(value=rationals | ordinary)
    def test_a_rational_becomes_the_nearest_double(self, value: Fraction) -> None:
        double = to_double(value)
        distance = abs(Fraction(double) - value)
        for neighbour in (math.nextafter(double, math.inf), math.nextafter(double, -math.inf)):
            assert distance <= abs(Fraction(neighbour) - value)
        assert double == float(near(value)) or distance == abs(Fraction(float(near(value))) - value)

    @settings(max_examples=400)
    @given(square=positives)
    @example(square=Fraction(2))
    @example(square=Fraction(2**53 + 1) ** 2)
    @example(square=Fraction(2**54 + 2) ** 2 + Fraction(1, 10**60))
    @example(square=Fraction(2**54 + 2) ** 2 - Fraction(1, 10**60))
    def test_a_root_becomes_the_nearest_double(self, square: Fraction) -> None:
        double = Fraction(to_double(Root.of(square)))
        above, below = (Fraction(math.nextafter(float(double), to)) for to in (math.inf, 0.0))
        # The halfway points to both neighbours, squared, enclose the square: no rounding is involved.
        assert ((below + double) / 2) ** 2 <= square <= ((double + above) / 2) ** 2

    @given(square=positives)
    def test_a_root_agrees_with_sixty_digits(self, square: Fraction) -> None:
        with mpmath.workdps(60):
            root = mpmath.sqrt(mpmath.mpf(square.numerator) / square.denominator)
            assert to_double(Root.of(square)) == float(root)
        assert to_double(Root.of(square)) == float(SIXTY_DIGITS.sqrt(near(square)))

    @given(root=rationals)
    def test_the_root_of_a_perfect_square_is_the_double_of_its_base(self, root: Fraction) -> None:
        sign = (root > 0) - (root < 0)
        assert to_double(Root(sign, root * root)) == to_double(root)

    def test_a_tie_between_two_doubles_goes_to_the_even_one(self) -> None:
        for value, even in ((2**53 + 1, 2**53), (2**53 + 3, 2**53 + 4)):
            assert to_double(value) == even
            assert to_double(Fraction(value)) == even
            assert to_double(Root.of(Fraction(value) ** 2)) == even

    def test_a_hair_beyond_a_tie_decides(self) -> None:
        tie = Fraction(2**53 + 1)
        hair = Fraction(1, 10**80)
        assert to_double(Root.of((tie + hair) ** 2)) == 2**53 + 2
        assert to_double(Root.of((tie - hair) ** 2)) == 2**53

    def test_zero_and_the_ends_of_the_range(self) -> None:
        assert to_double(Root.of(Fraction(0))) == 0.0
        assert math.copysign(1, to_double(Root.of(Fraction(0)))) == 1
        assert to_double(Root.of(Fraction(10) ** -700)) == 0.0
        assert to_double(Root.of(Fraction(2) ** -2148)) == math.ulp(0.0)
        with pytest.raises(OverflowError):
            to_double(Root.of(Fraction(10) ** 700))
        with pytest.raises(OverflowError):
            to_double(Fraction(10) ** 309)

    def test_a_negative_number_has_no_root(self) -> None:
        with pytest.raises(ValueError, match="not negative"):
            Root.of(Fraction(-1, 3))


class TestPrinting:
    """A printed figure is rounded once, half to even, from the exact value."""

    @pytest.mark.parametrize(
        ("value", "places", "units"),
        [
            ("10.0005", 3, 10000),
            ("10.0015", 3, 10002),
            ("10.00050000000000000000000001", 3, 10001),
            ("10.00049999999999999999999999", 3, 10000),
            ("-10.0005", 3, -10000),
            ("-10.0015", 3, -10002),
            ("0.5", 0, 0),
            ("1.5", 0, 2),
            ("2.5", 0, 2),
            ("-0.5", 0, 0),
            ("1250", -2, 12),
            ("1350", -2, 14),
            ("0", 4, 0),
        ],
    )
    def test_ties_go_to_the_even_figure_also_as_a_root(self, value: str, places: int, units: int) -> None:
        exact = Fraction(value)
        assert rounded_units(exact, places) == units
        sign = (exact > 0) - (exact < 0)
        assert rounded_units(Root(sign, exact**2), places) == units

    @pytest.mark.parametrize(("value", "units"), [(10.0005, 10001), (1.0005, 1000), (2.5, 2500), (0.0005, 1)])
    def test_a_float_is_rounded_as_the_binary_number_that_it_is(self, value: float, units: int) -> None:
        exactly = decimal.Decimal(value)
        assert rounded_units(value, 3) == units
        assert rounded_units(value, 3) == int(exactly.quantize(decimal.Decimal("0.001")).scaleb(3))

    @given(value=ordinary, places=st.integers(-3, 8))
    def test_a_terminating_decimal_prints_as_pythons_decimal_does(self, value: Fraction, places: int) -> None:
        step = decimal.Decimal(1).scaleb(-places)
        wanted = SIXTY_DIGITS.quantize(near(value), step).scaleb(places)
        assert rounded_units(value, places) == int(wanted)

    @given(square=positives, places=st.integers(-5, 12))
    def test_a_root_prints_as_its_sixty_digits_do(self, square: Fraction, places: int) -> None:
        root = SIXTY_DIGITS.sqrt(near(square))
        assume(root.adjusted() + places < 40)
        wanted = root.scaleb(places, SIXTY_DIGITS).to_integral_value(decimal.ROUND_HALF_EVEN, SIXTY_DIGITS)
        # A root that is no tie but looks like one in sixty digits would need 20 noughts in a row.
        assert rounded_units(Root.of(square), places) == int(wanted)

    @given(square=positives, places=st.integers(-5, 12))
    def test_a_printed_root_is_within_half_a_unit(self, square: Fraction, places: int) -> None:
        units = rounded_units(Root.of(square), places)
        scaled = square * Fraction(100) ** places
        assert (2 * units + 1) ** 2 >= 4 * scaled
        assert units == 0 or (2 * units - 1) ** 2 <= 4 * scaled

    @pytest.mark.parametrize(
        ("value", "power"),
        [
            ("1", 0),
            ("9.999999999999999999999999", 0),
            ("10", 1),
            ("0.1", -1),
            ("0.0999999999999999999999999", -2),
            ("-25000", 4),
            ("1e60", 60),
            ("1e-60", -60),
            ("0", 0),
        ],
    )
    def test_the_leading_digit_is_found(self, value: str, power: int) -> None:
        exact = Fraction(value)
        assert magnitude(exact) == power
        assert magnitude(Root((exact > 0) - (exact < 0), exact**2)) == power

    @given(value=rationals.filter(bool))
    def test_the_magnitude_is_the_power_of_ten_below(self, value: Fraction) -> None:
        assert Fraction(10) ** magnitude(value) <= abs(value) < Fraction(10) ** (magnitude(value) + 1)

    def test_digits_beyond_the_twelfth_do_not_show(self) -> None:
        assert round_significant(0.1 + 0.2) == 0.3
        assert round_significant(1.23456789012345e-300) == 1.23456789012e-300
        assert round_significant(-2 / 3) == -0.666666666667
        assert round_significant(0.0) == 0.0
