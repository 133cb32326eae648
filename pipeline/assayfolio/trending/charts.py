"""Charts over lots as a plan asks for them: limits from its baseline, signals by rule, criteria lines."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from datetime import datetime, timedelta
from fractions import Fraction
from typing import Literal

from assayfolio.statistics.control_charts import ChartLimits, chart_limits, moving_ranges
from assayfolio.statistics.false_signals import expected_signals, range_signal_rate, settled_rate
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.statistics.run_rules import ISO, RULES, NamedRule, signals
from assayfolio.study.plan import StudyDefinition, TrendPlan
from assayfolio.trending.series import LotResult, Point, Series, series_of

RANGE_RULE = "range-beyond-limit"
RANGE_WORDS = "a moving range beyond its upper three-sigma limit"
RANGE_SOURCE = ISO
MONTH = timedelta(days=30)

Panel = Literal["individuals", "moving range"]


@dataclass(frozen=True, slots=True)
class Signal:
    """A rule that holds at a point: on which panel, at which place of the series."""

    panel: Panel
    place: int
    lot: str
    run: str
    rule: str


@dataclass(frozen=True, slots=True)
class CriterionLine:
    """A limit that was set in advance, and the places of the values that do not meet it."""

    relation: Literal["at most", "at least"]
    limit: Fraction
    unmet: tuple[int, ...]


@dataclass(frozen=True, slots=True)
class Chart:
    """A chart of individual values and moving ranges.

    `limits` is None where the baseline gives none, and `why_no_limits` then says why. `ranges` stand from the
    second point on. `baseline` are the places of the points that the limits come from. `expected` is how many
    points of a process that has not changed would have signalled on both panels.
    """

    series: Series
    baseline: tuple[int, ...]
    limits: ChartLimits | None
    why_no_limits: str
    ranges: tuple[Fraction, ...]
    signals: tuple[Signal, ...]
    lines: tuple[CriterionLine, ...]
    expected: float


@dataclass(frozen=True, slots=True)
class Month:
    """The 30 days up to the newest lot: how many lots, and the false signals expected in as many.

    `signals` is the sum over the charts with limits, each once longer than its rules look back.
    """

    begins: str
    ends: str
    lots: int
    signals: float


@dataclass(frozen=True, slots=True)
class TrendFindings:
    """All charts of a study.

    `rate` is the chance of a false signal at one point of the individuals panel, `range_rate` that at one
    moving range; 0 where no rule looks at it.
    """

    study: StudyDefinition
    plan: TrendPlan
    results: tuple[LotResult, ...]
    charts: tuple[Chart, ...]
    rate: float
    range_rate: float
    month: Month | None

    @property
    def signals(self) -> int:
        """How many signals there are on all charts."""
        return sum(len(chart.signals) for chart in self.charts)

    @property
    def unmet(self) -> int:
        """How many values do not meet a criterion line."""
        return sum(len(line.unmet) for chart in self.charts for line in chart.lines)


def chart_lots(study: StudyDefinition, results: Sequence[LotResult]) -> TrendFindings:
    """The charts of a study over the results of its lots, which are in the order of the charts."""
    plan = study.trend
    assert plan is not None, "asked for by a study with a trend"
    rules = [RULES[name] for name in plan.rules if name != RANGE_RULE]
    rate = settled_rate([one.rule for one in rules]) if rules else 0.0
    range_rate = range_signal_rate() if RANGE_RULE in plan.rules else 0.0
    charts = tuple(_chart(study, plan, one, rules, range_rate) for one in series_of(study, results))
    return TrendFindings(
        study=study,
        plan=plan,
        results=tuple(results),
        charts=charts,
        rate=rate,
        range_rate=range_rate,
        month=_month(results, sum(chart.limits is not None for chart in charts) * (rate + range_rate)),
    )


def _chart(
    study: StudyDefinition, plan: TrendPlan, series: Series, rules: Sequence[NamedRule], range_rate: float
) -> Chart:
    values = [point.value for point in series.points]
    ranges = moving_ranges(values)
    baseline = _baseline(plan, series.points)
    limits, why = _limits(plan, values, baseline, series.points)
    lines = tuple(_lines(study, plan, series))
    if limits is None:
        return Chart(series, baseline, None, why, ranges, (), lines, 0.0)
    told = (*_of_values(series.points, limits, rules), *_of_ranges(plan, series.points, limits, ranges))
    expected = expected_signals([one.rule for one in rules], len(values)) if rules else 0.0
    return Chart(series, baseline, limits, "", ranges, told, lines, expected + range_rate * len(ranges))


def _baseline(plan: TrendPlan, points: Sequence[Point]) -> tuple[int, ...]:
    if plan.first is not None:
        return tuple(range(min(plan.first, len(points))))
    return tuple(place for place, point in enumerate(points) if point.lot in plan.lots)


def _limits(
    plan: TrendPlan, values: Sequence[Fraction], baseline: Sequence[int], points: Sequence[Point]
) -> tuple[ChartLimits | None, str]:
    wanted = len(plan.lots) if plan.first is None else plan.first
    if len(baseline) < wanted:
        missing = [lot for lot in plan.lots if lot not in {point.lot for point in points}]
        named = f"; there is none of {', '.join(missing)}" if missing else ""
        return None, f"the planned baseline is {wanted} lots, and {len(baseline)} of them are there{named}"
    try:
        return chart_limits([values[place] for place in baseline]), ""
    except NotComputableError as error:
        return None, str(error)


def _of_values(points: Sequence[Point], limits: ChartLimits, rules: Sequence[NamedRule]) -> Iterator[Signal]:
    values = [point.value for point in points]
    zones = [limits.zone(value) for value in values]
    for place, names in enumerate(signals(zones, values, rules)):
        for name in names:
            yield Signal("individuals", place, points[place].lot, points[place].run, name)


def _of_ranges(
    plan: TrendPlan, points: Sequence[Point], limits: ChartLimits, ranges: Sequence[Fraction]
) -> Iterator[Signal]:
    if RANGE_RULE not in plan.rules:
        return
    for place, moving_range in enumerate(ranges, start=1):
        if limits.range_is_beyond(moving_range):
            yield Signal("moving range", place, points[place].lot, points[place].run, RANGE_RULE)


def _lines(study: StudyDefinition, plan: TrendPlan, series: Series) -> Iterator[CriterionLine]:
    """The limits of `trend.criteria`, and of the study's criteria on the repeatability."""
    planned = [*plan.criteria] + [one for one in study.criteria if one.quantity == "repeatability-sd"]
    for one in planned:
        if one.quantity != series.quantity or one.response not in (None, series.response):
            continue
        values = [point.value for point in series.points]
        if one.at_least is not None:
            low = one.at_least
            yield CriterionLine("at least", low, tuple(at for at, value in enumerate(values) if value < low))
        if one.at_most is not None:
            high = one.at_most
            yield CriterionLine("at most", high, tuple(at for at, value in enumerate(values) if value > high))


def _month(results: Sequence[LotResult], chance: float) -> Month | None:
    """The lots started in the 30 days up to the newest, and the false signals expected in as many."""
    if not results:
        return None
    times = sorted(datetime.fromisoformat(result.started) for result in results)
    begins = times[-1] - MONTH
    lots = sum(time > begins for time in times)
    return Month(begins.date().isoformat(), times[-1].date().isoformat(), lots, lots * chance)
