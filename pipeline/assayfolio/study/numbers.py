"""Readers for exact numbers: decimals and fractions as typed, and whole numbers."""

import re
from collections.abc import Callable
from fractions import Fraction

from assayfolio.exact import NotADecimalError, parse_decimal
from assayfolio.study.faults import shown
from assayfolio.study.fields import Reader, Value, scalar

MAX_FRACTION_DIGITS = 15
_FRACTION = re.compile(r"([+-]?[0-9]+)/([0-9]+)", re.ASCII)


def exact_number(text: str) -> Fraction:
    """The number that `text` spells, exactly: a decimal (`0.05`, `1e-3`) or a fraction (`-1/2`).

    Decimals may have 38 digits, numerators and denominators 15: sums of many fractions stay cheap.
    Raises NotADecimalError, saying why, for anything else.
    """
    match = _FRACTION.fullmatch(text)
    if match is None:
        return parse_decimal(text).fraction
    if max(len(match[1].lstrip("+-")), len(match[2])) > MAX_FRACTION_DIGITS:
        raise NotADecimalError(f"more than {MAX_FRACTION_DIGITS} digits above or below the line")
    if int(match[2]) == 0:
        raise NotADecimalError("a division by zero")
    return Fraction(int(match[1]), int(match[2]))


def number(expected: str, fits: Callable[[Fraction], bool]) -> Reader[Fraction]:
    """An exact number for which `fits` holds; `expected` says so in words."""

    def read(value: Value) -> Fraction:
        text = scalar(value, expected).text
        try:
            exact = exact_number(text)
        except NotADecimalError as error:
            raise value.unreadable(f"is {shown(text)}, {error}", expected) from error
        if not fits(exact):
            raise value.unreadable(f"is {shown(text)}", expected)
        return exact

    return read


probability = number("a number above 0 and below 1, such as 0.05", lambda x: 0 < x < 1)
high_probability = number("a number above 0 and below 1, such as 0.95", lambda x: 0 < x < 1)
positive = number("a number above 0", lambda x: x > 0)
any_number = number("a number, such as -0.25 or 1/3", lambda _: True)


def ends_as_decimal(exact: Fraction) -> bool:
    """Whether a number has finitely many decimal places, as 1/8 does and 1/3 does not."""
    rest = exact.denominator
    for prime in (2, 5):
        while rest % prime == 0:
            rest //= prime
    return rest == 1


def whole_number(least: int, most: int) -> Reader[int]:
    """A whole number from `least` to `most`, written with digits alone."""
    expected = f"a whole number from {least} to {most}"

    def read(value: Value) -> int:
        text = scalar(value, expected).text
        digits = text.isascii() and text.isdigit() and len(text) <= len(str(most))
        if digits and least <= int(text) <= most:
            return int(text)
        raise value.unreadable(f"is {shown(text)}", expected)

    return read
