"""Decimals as integers, exact sums, and correctly rounded results.

A laboratory records decimals. Here they stay what was typed: an integer and a power of ten. What is formed of
them exactly before the analysis (the mean of three repeats, a value times 1/28) has a divisor beside. Sums
are sums of integers, so their order does not matter and partial sums merge to the same value. A result is a
rational number or the square root of one; it is rounded once, when it becomes a double or a printed figure.
"""

import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from math import isqrt, lcm

MAX_DIGITS = 38
MAX_EXPONENT = 60

_PLAIN = re.compile(r"-?[0-9]{1,18}(?:\.[0-9]{1,18})?\Z")
_NUMBER = re.compile(r"([+-]?)(\d*)(?:\.(\d*))?(?:[eE]([+-]?\d+))?\Z", re.ASCII)
_LOOKALIKES = {
    "\u2212": "a minus sign U+2212; type the hyphen-minus",
    "\u2013": "an en dash; type the hyphen-minus",
    "\u00a0": "a no-break space",
    "\u2009": "a thin space",
    "\u202f": "a narrow no-break space",
    " ": "a space",
    "'": "an apostrophe",
}


class NotADecimalError(ValueError):
    """The text is not a decimal that can be taken exactly; the message says why."""


@dataclass(frozen=True, slots=True)
class Decimal10:
    """`mantissa` times ten to the power `exponent`, exactly as typed (1.50 is 150 and -2), over `divisor`.

    The divisor, one or more, is 1 for every number that was typed. It is not cancelled against the mantissa:
    the mean of 1.2 and 1.4 is 26, -1 and 2, so that `places` stays that of the record.
    """

    mantissa: int
    exponent: int
    divisor: int = 1

    @property
    def fraction(self) -> Fraction:
        """The value as a rational number."""
        if self.exponent >= 0:
            return Fraction(self.mantissa * 10**self.exponent, self.divisor)
        return Fraction(self.mantissa, 10**-self.exponent * self.divisor)

    @property
    def places(self) -> int:
        """How many decimal places were recorded."""
        return max(0, -self.exponent)

    def times(self, factor: Fraction) -> "Decimal10":
        """The value times `factor`, exactly; powers of ten in the factor move the decimal point."""
        up, over = _without(10, factor.numerator)
        down, under = _without(10, factor.denominator)
        return Decimal10(self.mantissa * over, self.exponent + up - down, self.divisor * under)


def in_one_unit(values: Iterable[Decimal10]) -> tuple[list[int], int, int]:
    """`values` as whole numbers of one unit, ten to the power `exponent` over `divisor`: (numbers, both).

    The unit is the largest that follows from the exponents and divisors of all of them; 1 for no values.
    """
    listed = list(values)
    exponent = min((value.exponent for value in listed), default=0)
    divisor = lcm(*{value.divisor for value in listed})
    if divisor == 1:
        return [value.mantissa * 10 ** (value.exponent - exponent) for value in listed], exponent, 1
    numbers = [
        value.mantissa * 10 ** (value.exponent - exponent) * (divisor // value.divisor) for value in listed
    ]
    return numbers, exponent, divisor


def exact_mean(values: Sequence[Decimal10]) -> Decimal10:
    """The mean of one or more decimals, exactly, with the decimal places of the finest of them."""
    numbers, exponent, divisor = in_one_unit(values)
    return Decimal10(sum(numbers), exponent, divisor * len(numbers))


def parse_decimal(text: str, decimal_mark: str = ".") -> Decimal10:
    """The decimal that `text` spells, with `decimal_mark` "." or ",".

    Accepts an optional sign, digits with at most one decimal mark, and an optional power of ten (`-1.5e-3`).
    Surrounding blanks and tabs are not part of the number.
    Raises NotADecimalError for anything else, for more than 38 significant digits and for a power of ten
    beyond +-60.
    """
    stripped = text.strip(" \t")
    if decimal_mark == "." and _PLAIN.match(stripped):  # nearly all numbers, in half the time
        whole, _, decimals = stripped.partition(".")
        return Decimal10(int(whole + decimals), -len(decimals))
    if not stripped:
        raise NotADecimalError("blank")
    if len(stripped) > 4 * (MAX_DIGITS + MAX_EXPONENT):
        raise NotADecimalError(f"{len(stripped)} characters are too many for a number")
    wrong_mark = "." if decimal_mark == "," else ","
    match = _NUMBER.match(stripped.replace(decimal_mark, ".", 1))
    if match is None or wrong_mark in stripped or not (match[2] or match[3]):
        raise NotADecimalError(_why_not(stripped, decimal_mark))
    sign, whole, decimals, power = match[1], match[2] or "", match[3] or "", match[4] or "0"
    if len(power.lstrip("+-0")) > 4:
        raise NotADecimalError(f"the power of ten is beyond +-{MAX_EXPONENT}")
    exponent = int(power) - len(decimals)
    digits = (whole + decimals).lstrip("0")
    if len(digits) > MAX_DIGITS:
        raise NotADecimalError(f"more than {MAX_DIGITS} digits ({len(digits)})")
    if not -MAX_EXPONENT <= exponent <= MAX_EXPONENT or abs(int(power)) > MAX_EXPONENT:
        raise NotADecimalError(f"the power of ten is beyond +-{MAX_EXPONENT}")
    mantissa = int(digits or "0")
    return Decimal10(-mantissa if sign == "-" else mantissa, exponent)


def _why_not(text: str, decimal_mark: str) -> str:
    lowered = text.lower().lstrip("+-")
    if lowered in {"nan", "na", "n/a", "#n/a", "null", "none", "inf", "infinity", "nd"}:
        return "not a number"
    if text[0] in "<>\u2264\u2265":
        return "a value reported against a limit"
    if "." in text and "," in text:
        return "not a number: it holds both a point and a comma"
    if decimal_mark == "," and _NUMBER.match(text):
        return "a decimal point where a decimal comma is declared"
    for character, name in _LOOKALIKES.items():
        if character in text:
            return f"not a number: it holds {name}"
    if decimal_mark == "." and "," in text:
        return "not a number: it holds a comma"
    return "not a number"


@dataclass(frozen=True, slots=True)
class ExactSums:
    """n, sum and sum of squares of decimals, exactly.

    `total` counts units of ten to the power `exponent` over `divisor`, `squares` units of its square.
    """

    n: int
    total: int
    squares: int
    exponent: int
    divisor: int = 1

    @staticmethod
    def of(values: Iterable[Decimal10]) -> "ExactSums":
        """The exact sums of `values`."""
        numbers, exponent, divisor = in_one_unit(values)
        squares = sum(number * number for number in numbers)
        return ExactSums(len(numbers), sum(numbers), squares, exponent, divisor)

    def merged(self, other: "ExactSums") -> "ExactSums":
        """The exact sums of both parts together; any order of merging gives the same value."""
        if not self.n or not other.n:  # a part without values has no unit of its own
            return self if self.n else other
        exponent = min(self.exponent, other.exponent)
        divisor = lcm(self.divisor, other.divisor)
        a = 10 ** (self.exponent - exponent) * (divisor // self.divisor)
        b = 10 ** (other.exponent - exponent) * (divisor // other.divisor)
        return ExactSums(
            self.n + other.n,
            self.total * a + other.total * b,
            self.squares * a * a + other.squares * b * b,
            exponent,
            divisor,
        )

    @property
    def sum(self) -> Fraction:
        """The sum of the values."""
        return Decimal10(self.total, self.exponent, self.divisor).fraction

    @property
    def sum_of_squares(self) -> Fraction:
        """The sum of the squared values."""
        return Decimal10(self.squares, 2 * self.exponent, self.divisor**2).fraction

    @property
    def sum_text(self) -> str:
        """The sum as an exact decimal without needless zeros, or "p/q" where no decimal is exact."""
        return exact_text(Decimal10(self.total, self.exponent, self.divisor))

    @property
    def sum_of_squares_text(self) -> str:
        """The sum of squares as an exact decimal without needless zeros, or "p/q" where none is exact."""
        return exact_text(Decimal10(self.squares, 2 * self.exponent, self.divisor**2))


def decimal_of(value: Fraction) -> Decimal10:
    """`value` with as few decimal places as it needs; as a whole number over a divisor where none suffice."""
    twos, rest = _without(2, value.denominator)
    fives, rest = _without(5, rest)
    places = max(twos, fives)
    if rest != 1:
        return Decimal10(value.numerator, 0, value.denominator)
    return Decimal10(int(value * 10**places), -places)


def exact_text(value: Decimal10) -> str:
    """`value` as an exact decimal without needless zeros, or "p/q" in lowest terms where none is exact."""
    if value.divisor == 1:
        return _plain_text(value.mantissa, value.exponent)
    reduced = decimal_of(value.fraction)
    if reduced.divisor == 1:
        return _plain_text(reduced.mantissa, reduced.exponent)
    return f"{reduced.mantissa}/{reduced.divisor}"


def _without(base: int, number: int) -> tuple[int, int]:
    """How often `base` divides `number`, and what is left of it; never for zero."""
    power = 0
    while number and number % base == 0:
        number //= base
        power += 1
    return power, number


def _plain_text(mantissa: int, exponent: int) -> str:
    sign = "-" if mantissa < 0 else ""
    digits = str(abs(mantissa))
    if exponent >= 0:
        return sign + (digits + "0" * exponent if mantissa else "0")
    digits = digits.rjust(1 - exponent, "0")
    whole, decimals = digits[:exponent], digits[exponent:].rstrip("0")
    return sign + (f"{whole}.{decimals}" if decimals else whole)


@dataclass(frozen=True, slots=True)
class Root:
    """`sign` (-1, 0 or 1) times the square root of the rational `square`."""

    sign: int
    square: Fraction

    @staticmethod
    def of(square: Fraction) -> "Root":
        """The square root of `square`, which may not be negative."""
        if square < 0:
            raise ValueError("the square of a real number is not negative")
        return Root(1 if square else 0, square)


Exact = Fraction | Root


def to_double(value: Exact | int) -> float:
    """The double nearest to `value`, ties to even.

    Raises OverflowError where the value is beyond the range of doubles.
    """
    if isinstance(value, Root):
        return value.sign * _root_to_double(value.square) if value.sign else 0.0
    fraction = Fraction(value)
    return fraction.numerator / fraction.denominator  # true division of integers rounds correctly


def _root_to_double(square: Fraction) -> float:
    # At least 64 bits of the root, then one bit more that says whether anything was cut off: the division
    # below then rounds as if it had the whole root.
    p, q = square.numerator, square.denominator
    shift = max(0, 130 - (p.bit_length() - q.bit_length()))
    shift += shift % 2
    scaled = (p << shift) // q
    root = isqrt(scaled)
    inexact = root * root != scaled or (p << shift) % q != 0
    return (2 * root + inexact) / (1 << (shift // 2 + 1))


def rounded_units(value: Exact | float | int, places: int) -> int:
    """`value` times ten to the power `places`, rounded once to an integer, half to even.

    A float counts as the exact binary number it is.
    """
    if isinstance(value, Root):
        return value.sign * _root_units(value.square, places)
    return round(Fraction(value) * Fraction(10) ** places)


def _root_units(square: Fraction, places: int) -> int:
    scaled = square * Fraction(100) ** places
    floor = isqrt(scaled.numerator // scaled.denominator)
    middle = Fraction((2 * floor + 1) ** 2, 4)
    if scaled > middle or (scaled == middle and floor % 2):
        return floor + 1
    return floor


def magnitude(value: Exact | float | int) -> int:
    """The power of ten of the leading digit of `value`: 0 from 1 to 9.99, -1 from 0.1 to 0.99; 0 for zero."""
    squared = value.square if isinstance(value, Root) else Fraction(value) ** 2
    if squared == 0:
        return 0
    power = (squared.numerator.bit_length() - squared.denominator.bit_length()) * 30103 // 200000
    while squared >= Fraction(100) ** (power + 1):
        power += 1
    while squared < Fraction(100) ** power:
        power -= 1
    return power


def round_significant(value: float, digits: int = 12) -> float:
    """`value` rounded to `digits` significant digits, so that the last bits of a machine do not show."""
    return float(f"{value:.{digits - 1}e}")
