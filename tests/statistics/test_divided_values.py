"""Values that are no decimals (means of repeats, converted units) are analysed as exactly as decimals are."""

from fractions import Fraction

from hypothesis import given
from hypothesis import strategies as st

from assayfolio.exact import Decimal10, ExactSums, to_double
from assayfolio.statistics.equal_variances import brown_forsythe_variances, levene_variances
from assayfolio.statistics.normality import residuals
from assayfolio.statistics.oneway import NotComputableError, OneWay, one_way
from assayfolio.statistics.outliers import grubbs_double, grubbs_single
from assayfolio.statistics.resolution import resolution
from assayfolio.statistics.run_order import run_order_trend
from assayfolio.statistics.second_route import ReportedTable, second_route
from support.measured import Data

values = st.builds(Decimal10, st.integers(-(10**5), 10**5), st.integers(-3, 1))


@st.composite
def measured(draw: st.DrawFn) -> Data:
    levels = draw(st.lists(st.lists(values, min_size=3, max_size=6), min_size=2, max_size=4))
    spread = draw(st.integers(1, 9))
    levels[0] = [*levels[0], Decimal10(levels[0][0].mantissa + spread, levels[0][0].exponent)]
    return {f"L{at}": listed for at, listed in enumerate(levels)}


@st.composite
def in_other_words(draw: st.DrawFn) -> tuple[Data, Data]:
    """Data, and the same values with a divisor of their own each that cancels."""
    data = draw(measured())

    def divided(value: Decimal10) -> Decimal10:
        divisor = draw(st.integers(1, 12))
        return Decimal10(value.mantissa * divisor, value.exponent, divisor)

    return data, {level: [divided(value) for value in listed] for level, listed in data.items()}


def over(data: Data, divisor: int) -> Data:
    """Every value over `divisor`."""
    return {
        level: [Decimal10(value.mantissa, value.exponent, divisor) for value in listed]
        for level, listed in data.items()
    }


def analysed(data: Data) -> OneWay:
    return one_way([(level, ExactSums.of(listed)) for level, listed in data.items()])


def or_reason(what, *arguments):
    try:
        return what(*arguments)
    except NotComputableError as error:
        return str(error)


def ordered(data: Data) -> list[tuple[str, list[tuple[int, Decimal10]]]]:
    places = iter(range(1, 100))
    return [(level, [(next(places), value) for value in listed]) for level, listed in data.items()]


def statistics_without_unit(data: Data) -> list[object]:
    groups = list(data.items())
    trend = or_reason(run_order_trend, ordered(data))
    return [
        analysed(data).f,
        or_reason(brown_forsythe_variances, groups),
        or_reason(levene_variances, groups),
        trend if isinstance(trend, str) else (trend.statistic, trend.tail),
        *(grubbs_single(level, listed) for level, listed in groups),
        *(grubbs_double(level, listed) for level, listed in groups),
    ]


def statistics_with_unit(data: Data) -> list[object]:
    analysis, groups = analysed(data), list(data.items())
    trend = or_reason(run_order_trend, ordered(data))
    return [
        analysis.ss_between,
        analysis.ss_within,
        [level.mean for level in analysis.levels],
        residuals(groups),
        trend if isinstance(trend, str) else trend.slope,
    ]


@given(in_other_words())
def test_it_does_not_matter_how_a_value_is_written(pair):
    data, other = pair
    assert statistics_with_unit(other) == statistics_with_unit(data)
    assert statistics_without_unit(other) == statistics_without_unit(data)


@given(measured(), st.integers(2, 30))
def test_statistics_without_a_unit_do_not_change_with_the_unit(data, divisor):
    assert statistics_without_unit(over(data, divisor)) == statistics_without_unit(data)


@given(measured(), st.integers(2, 30))
def test_the_recorded_step_is_divided_as_the_values_are(data, divisor):
    divided = over(data, divisor)
    step = resolution(list(data.items()), analysed(data)).step
    assert resolution(list(divided.items()), analysed(divided)).step == step / divisor


@given(measured(), st.integers(2, 30))
def test_both_routes_agree_on_values_that_are_no_decimals(data, divisor):
    divided = over(data, divisor)
    analysis = analysed(divided)
    table = ReportedTable(
        means={level.level: to_double(level.mean) for level in analysis.levels},
        ss_between=to_double(analysis.ss_between),
        ss_within=to_double(analysis.ss_within),
        f=None if analysis.f is None else to_double(analysis.f),
    )
    assert not second_route(list(divided.items()), table, []).failures


def test_a_third_is_a_third():
    thirds = {"a": [Decimal10(1, 0, 3), Decimal10(2, 0, 3)], "b": [Decimal10(1, 0), Decimal10(1, 0)]}
    analysis = analysed(thirds)
    assert [level.mean for level in analysis.levels] == [Fraction(1, 2), Fraction(1)]
    assert analysis.ss_within == Fraction(1, 18)
    assert residuals(list(thirds.items())) == (-1 / 6, 1 / 6, 0.0, 0.0)
