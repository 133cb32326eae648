"""What a study plans for its control charts over lots."""

from dataclasses import dataclass
from fractions import Fraction
from typing import Literal, get_args

from assayfolio.errors import Place

ChartQuantity = Literal["lot-mean", "repeatability-sd", "difference"]
RunRuleName = Literal[
    "beyond-limits",
    "two-of-three",
    "four-of-five",
    "seven-one-side",
    "eight-one-side",
    "nine-one-side",
    "six-rising",
    "seven-rising",
    "fourteen-in-turn",
    "fifteen-within",
    "eight-outside",
    "range-beyond-limit",
]

TREND_KEYS = ("baseline", "quantities", "rules", "criteria")
BASELINE_KEYS = ("first", "lots")
TREND_CRITERION_KEYS = ("quantity", "at-most", "at-least", "response")
CHART_QUANTITIES: tuple[ChartQuantity, ...] = get_args(ChartQuantity)
RUN_RULES: tuple[RunRuleName, ...] = get_args(RunRuleName)


@dataclass(frozen=True, slots=True)
class TrendCriterion:
    """One entry of `trend.criteria:` - a line on the charts of a quantity that was set in advance.

    `response` is the one response that it is about, None where it is all.
    """

    quantity: ChartQuantity
    at_most: Fraction | None
    at_least: Fraction | None
    response: str | None
    place: Place


@dataclass(frozen=True, slots=True)
class TrendPlan:
    """`trend:` - the charts over lots: where their limits come from, what is charted, by which rules.

    The limits come from the `first` lots, or from the `lots` that are named; one of the two is given.
    """

    first: int | None
    lots: tuple[str, ...]
    quantities: tuple[ChartQuantity, ...]
    rules: tuple[RunRuleName, ...]
    criteria: tuple[TrendCriterion, ...]
    place: Place
