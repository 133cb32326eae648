"""Random measurements for property tests, and the changes that must not change a result."""

from fractions import Fraction

from hypothesis import strategies as st

from assayfolio.exact import Decimal10, ExactSums
from assayfolio.statistics.oneway import OneWay, one_way

Data = dict[str, list[Decimal10]]


def analysed(data: Data) -> OneWay:
    return one_way([(level, ExactSums.of(listed)) for level, listed in data.items()])


@st.composite
def varying(draw: st.DrawFn, levels: int = 3, most: int = 7, centre: int = 0) -> Data:
    """Levels of two or more values to two decimals, spread over ten units about `centre`, each varying."""
    data = {}
    for at in range(levels):
        units = draw(st.lists(st.integers(-500, 500), min_size=2, max_size=most))
        if len(set(units)) == 1:
            units[0] += draw(st.integers(1, 99))
        data[f"L{at}"] = [Decimal10(100 * centre + unit, -2) for unit in units]
    return data


def shifted(data: Data, constant: int) -> Data:
    """`constant` units of the second decimal added to every value."""
    return {
        level: [Decimal10(value.mantissa + constant, value.exponent) for value in listed]
        for level, listed in data.items()
    }


def scaled(data: Data, power: int) -> Data:
    """Every value times ten to the power `power`."""
    return {
        level: [Decimal10(value.mantissa, value.exponent + power) for value in listed]
        for level, listed in data.items()
    }


def negated(data: Data) -> Data:
    return {
        level: [Decimal10(-value.mantissa, value.exponent) for value in listed]
        for level, listed in data.items()
    }


def ten_to(power: int) -> Fraction:
    return Fraction(10) ** power
