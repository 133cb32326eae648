"""How numbers are printed: rounded once, half to even, from the exact value where there is one.

The rules, in one place:

* a mean has one decimal more than the data, a difference of means as many as a mean, yet none finer than
  three digits of the smallest standard error of a level's mean;
* a standard deviation or standard error has three significant digits;
* F and t have three decimals;
* p has four decimals from 0.001 upwards and two significant digits below, with more digits where it would
  otherwise read as equal to alpha; it is never zero: below 1e-300 it is "< 1 x 10^-300", and never one
  unless it is: near one it is "> 0.9999";
* a sum of squares or mean square has as many decimals as give the within mean square four digits.
"""

import re
from collections.abc import Iterable
from dataclasses import dataclass, replace
from fractions import Fraction

from assayfolio.exact import Exact, Root, magnitude, rounded_units

MINUS = "\u2212"
THIN = "\u202f"  # narrow no-break space: a thin space that never ends a line
NO_BREAK = "\u00a0"
TIMES = "\u00d7"
INFINITY = "\u221e"

_SUPERSCRIPTS = str.maketrans(
    "0123456789-", "\u2070\u00b9\u00b2\u00b3\u2074\u2075\u2076\u2077\u2078\u2079\u207b"
)

MAX_DIGITS = 20
_FLOOR = 1e-300
_FLOOR_POWER = -300
_WIDEST = 14

Number = Exact | float | int

_UNIT = (
    r"(?:[°º][CF]|%|‰|pp[mbt]|min|h|d|rpm|"
    r"[kMhcdmµμnp]?(?:mol|Pa|Hz|eV|Da|Bq|Gy|Sv|bar|[gLlmsKVAWJNSΩ]))"
)
_BEFORE_UNIT = re.compile(rf"(?<=\d) (?={_UNIT}(?:[²³⁻¹]|(?!\w)))")


def kept_together(text: str) -> str:
    """`text` with a space that does not break between a number and the unit that seems to follow it."""
    return _BEFORE_UNIT.sub(NO_BREAK, text)


def power_of_ten(power: int) -> str:
    """Ten to `power` with a superscript: 10 to the minus 7 as it is set in print."""
    return "10" + str(power).translate(_SUPERSCRIPTS)


def fixed(value: Number, places: int, power: int = 0) -> str:
    """`value` in units of ten to the power `power`, with `places` decimals and a true minus sign."""
    units = rounded_units(value, places - power)
    sign = MINUS if units < 0 else ""
    if places <= 0:
        return sign + str(abs(units) * 10**-places)
    digits = str(abs(units)).rjust(places + 1, "0")
    return f"{sign}{digits[:-places]}.{digits[-places:]}"


def significant_places(value: Number, digits: int) -> int:
    """How many decimals give `value` that many significant digits (negative where it is large)."""
    places = digits - 1 - magnitude(value)
    if abs(rounded_units(value, places)) >= 10**digits:  # 9.996 becomes 10.0, not 10.00
        places -= 1
    return places


def scientific(value: Number, digits: int) -> str:
    """`value` with `digits` significant digits and a power of ten."""
    places = significant_places(value, digits)
    power = digits - 1 - places
    return f"{fixed(value, digits - 1, power)}{THIN}{TIMES}{THIN}{power_of_ten(power)}"


def statistic(value: Number) -> str:
    """A test statistic: three decimals; a power of ten where that would show nothing, or too much."""
    size = abs(_comparable(value))
    if size >= 10**12:  # (10**6)**2: sizes are compared squared so that roots stay exact
        return scientific(value, 4)
    if size and rounded_units(value, 3) == 0:
        return scientific(value, 2)
    return fixed(value, 3)


def _comparable(value: Number) -> Fraction:
    return value.square if isinstance(value, Root) else Fraction(value) ** 2


def probability(p: float, alpha: Number | None = None, log10_p: float | None = None) -> str:
    """A p value by the rule of this module; `alpha` is the level it must not be mistaken for."""
    if p < _FLOOR or (log10_p is not None and log10_p < _FLOOR_POWER):
        return f"<{THIN}1{THIN}{TIMES}{THIN}{power_of_ten(_FLOOR_POWER)}"
    if p < 1 and rounded_units(p, 4) == 10**4:
        return f">{THIN}0.9999"
    if p >= 0.001:
        places = 4
        while places < 15 and _reads_as_alpha(p, alpha, places):
            places += 1
        return fixed(p, places)
    digits = 2
    while (
        digits < 12
        and alpha is not None
        and p != alpha
        and scientific(p, digits) == scientific(alpha, digits)
    ):
        digits += 1
    return scientific(p, digits)


def _reads_as_alpha(p: float, alpha: Number | None, places: int) -> bool:
    if alpha is None or isinstance(alpha, Root) or Fraction(alpha) == Fraction(p):
        return False
    return rounded_units(p, places) == rounded_units(alpha, places)


def equals(text: str) -> str:
    """`text` with the sign that introduces it: "= 0.0123", or "< ..." as it stands."""
    return text if text[0] in "<>" else f"={THIN}{text}"


def percent(share: Fraction) -> str:
    """A share as per cent with as many decimals as it needs (at most six): "95 %"."""
    places = 0
    while places < 6 and share * 100 * 10**places % 1:
        places += 1
    return f"{fixed(share * 100, places)}{THIN}%"


def confidence(share: Fraction) -> str:
    """The level of an interval as per cent; one that was divided has two decimals at most: "98.33 %"."""
    exact = percent(share)
    return exact if len(exact) <= len("99.9999") else f"{fixed(share * 100, 2)}{THIN}%"


def decimal(value: Fraction) -> str:
    """A planned number as a decimal with all its digits, or as a fraction where no decimal is exact."""
    if abs(value) < 10**9:
        for places in range(13):
            if value * 10**places % 1 == 0:
                return fixed(value, places)
    for digits in range(1, MAX_DIGITS + 1):
        if value * Fraction(10) ** significant_places(value, digits) % 1 == 0:
            return scientific(value, digits)
    sign = MINUS if value < 0 else ""
    return f"{sign}{abs(value.numerator)}/{value.denominator}"


def three_digits(value: Number) -> str:
    """`value` with three significant digits, as a plain figure where that is not long."""
    if not _comparable(value):
        return "0"
    places = significant_places(value, 3)
    if -3 <= places <= 6:
        return fixed(value, max(0, places))
    return scientific(value, 3)


def degrees_of_freedom(df: Number) -> str:
    """Degrees of freedom: a whole number as it is, any other with two decimals, as many where it is tiny."""
    if not isinstance(df, Root) and Fraction(df).denominator == 1:
        return str(int(df))
    return fixed(df, 2) if _comparable(df) >= Fraction(1, 100) else three_digits(df)


@dataclass(frozen=True, slots=True)
class Scale:
    """In which unit quantities of one kind are printed, and with how many decimals.

    Printed figures count units of ten to the power `power` of `unit`. `places` are the decimals of a value
    as recorded, `mean_places` those of a mean.
    """

    unit: str
    power: int
    places: int
    mean_places: int

    @staticmethod
    def of(sizes: Iterable[Number], last_digit: int, unit: str | None) -> "Scale":
        """The scale for quantities of these sizes whose last recorded digit counts ten to `last_digit`.

        A power of ten is split off where plain figures would begin or end in many zeros, and for more digits
        than MAX_DIGITS.
        """
        largest = max((magnitude(size) for size in sizes if _comparable(size)), default=0)
        too_long = largest - last_digit + 2 > MAX_DIGITS
        power = largest if largest < -4 or last_digit > 3 or too_long else 0
        limit = MAX_DIGITS - 1 - max(0, largest - power)
        places = min(limit, max(0, power - last_digit))
        whole = (unit or "").replace(" ", NO_BREAK)
        return Scale(whole, power, places, min(limit, max(0, power - last_digit + 1)))

    def no_finer_than(self, uncertainty: Number) -> "Scale":
        """The scale with means printed no finer than three digits of `uncertainty`, their standard error.

        Recorded values keep their decimals: they are printed as they were typed.
        """
        if not _comparable(uncertainty):
            return self
        places = max(0, self._spread_places(uncertainty))
        return replace(self, mean_places=min(self.mean_places, places))

    @property
    def heading(self) -> str:
        """The unit as a column head shows it, with its power of ten."""
        factor = power_of_ten(self.power) if self.power else ""
        return THIN.join(part for part in (factor, self.unit) if part)

    def value(self, value: Number) -> str:
        """A value as recorded, without its unit."""
        return fixed(value, self.places, self.power)

    def mean(self, value: Number) -> str:
        """A mean or a difference of means, without its unit."""
        return fixed(value, self.mean_places, self.power)

    def with_unit(self, figure: str) -> str:
        """`figure` followed by the power of ten and the unit."""
        factor = f"{TIMES}{THIN}{power_of_ten(self.power)}" if self.power else ""
        return THIN.join(part for part in (figure, factor, self.unit) if part)

    def spread(self, value: Number, largest: Number) -> str:
        """A standard deviation or standard error with three digits, beside others up to `largest`."""
        if not _comparable(value):
            return "0"
        places = self._spread_places(value)
        if places > self._spread_places(largest) + 1:
            places = self._spread_places(largest) + 1
            if rounded_units(value, places - self.power) < 10:
                return scientific(value, 3) if not self.power else fixed(value, places, self.power)
        return fixed(value, max(0, places), self.power)

    def _spread_places(self, value: Number) -> int:
        return significant_places(value, 3) + self.power if _comparable(value) else 0


def squared_unit(unit: str | None) -> str:
    """The unit of a sum of squares."""
    if not unit:
        return ""
    return f"{unit}²" if unit.isalpha() else f"({unit})²"


def squares(values: Iterable[Number], measure: Number) -> list[str]:
    """Sums of squares and mean squares of one table, alike in decimals.

    `measure` is the mean square that keeps four digits. A power of ten is used where figures would get long.
    """
    listed = list(values)
    places = max(0, 3 - magnitude(measure))
    largest = max((magnitude(value) for value in listed if _comparable(value)), default=0)
    if max(0, largest) + 1 + places > _WIDEST or places > 9:
        return [scientific(value, 5) if _comparable(value) else "0" for value in listed]
    return [fixed(value, places) for value in listed]


def split_at_point(text: str) -> tuple[str, str]:
    """`text` cut where the decimal point of its leading number stands or would stand."""
    for position, character in enumerate(text):
        if character == ".":
            return text[:position], text[position:]
        if not (character.isdecimal() or character in f"{MINUS}<>{THIN}"):
            return text[:position].rstrip(THIN), text[len(text[:position].rstrip(THIN)) :]
    return text, ""
