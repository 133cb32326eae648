"""Data drawn by hypothesis for properties of comparisons, and what such properties say."""

from collections.abc import Sequence
from fractions import Fraction

from hypothesis import assume
from hypothesis import strategies as st

from assayfolio.exact import Decimal10, ExactSums
from assayfolio.statistics.comparisons import GREATER, LESS, TWO_SIDED, ComparisonResult
from assayfolio.statistics.oneway import OneWay, one_way

ALTERNATIVES = (TWO_SIDED, GREATER, LESS)
ALPHAS = st.sampled_from([0.1, 0.05, 0.01, 0.001])

Data = dict[str, list[int]]


def analysed_tenths(data: Data, plus: int = 0, exponent: int = -1) -> OneWay:
    """The analysis of whole numbers of tenths, with `plus` tenths added to each; or of another unit."""
    return one_way(
        [
            (level, ExactSums.of(Decimal10(v + plus, exponent) for v in values))
            for level, values in data.items()
        ]
    )


@st.composite
def levels_that_vary(draw: st.DrawFn, fewest: int = 2, most: int = 5) -> Data:
    """Levels of two to six values, each of which varies."""
    values = st.lists(st.integers(0, 60), min_size=2, max_size=6)
    levels = draw(st.lists(values, min_size=fewest, max_size=most))
    assume(all(len(set(listed)) > 1 for listed in levels))
    return {f"L{at}": listed for at, listed in enumerate(levels)}


def excludes_zero(interval: tuple[float | None, float | None] | None) -> bool:
    """Whether the interval leaves zero out."""
    assert interval is not None
    lower, upper = interval
    return (lower is not None and lower >= 0) or (upper is not None and upper <= 0)


def without_direction(rows: Sequence[ComparisonResult]) -> dict[frozenset[str], tuple[object, ...]]:
    """What two-sided rows of pairs say, whichever of the two levels comes first."""
    return {
        frozenset(row.label.split(" - ")): (abs(row.estimate), row.se, row.df, row.tail, row.adjusted)
        for row in rows
    }


def in_another_unit(row: ComparisonResult, power: int) -> tuple[object, ...]:
    """What a row says once its estimate and error are counted in units ten to the `power` as large."""
    unit = Fraction(10) ** power
    return (row.estimate / unit, row.se.square / unit**2, row.df, row.statistic, row.tail, row.adjusted)
