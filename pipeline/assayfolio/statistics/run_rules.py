"""Rules by which a run of points on a chart of individual values gives a signal, named with their sources.

A rule looks at the last points of the chart and holds or does not hold at the newest of them; every point at
which it holds is a signal. A point on a line does not lie beyond it, and one on the centre line lies on
neither side.

Sources, all from memory: Western Electric, Statistical Quality Control Handbook, 1956, tests for instability
and for unnatural patterns; L. S. Nelson, The Shewhart control chart - tests for special causes, Journal of
Quality Technology 16 (1984) 237-239, tests 1 to 8; ISO 7870-2:2013, Control charts - Part 2: Shewhart control
charts. The values of "six in a row" are six points, five steps.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from fractions import Fraction
from itertools import pairwise
from typing import Literal, TypeAlias

WESTERN_ELECTRIC = "Western Electric 1956"
NELSON = "Nelson 1984"
ISO = "ISO 7870-2:2013"


@dataclass(frozen=True, slots=True)
class CountRule:
    """`needed` of the last `window` points, the newest among them, beyond `sigmas` lines on one side."""

    needed: int
    window: int
    sigmas: int


@dataclass(frozen=True, slots=True)
class BandRule:
    """All of the last `window` points within `sigmas` lines of the centre line, or all beyond them."""

    window: int
    sigmas: int
    side: Literal["within", "outside"]


@dataclass(frozen=True, slots=True)
class StepRule:
    """The last `window` points rise or fall without a break, or go up and down in turn."""

    window: int
    steps: Literal["one way", "in turn"]


Rule: TypeAlias = CountRule | BandRule | StepRule


@dataclass(frozen=True, slots=True)
class NamedRule:
    """A rule with its name, what it says, and where it was published."""

    name: str
    words: str
    source: str
    rule: Rule


_LISTED = (
    NamedRule(
        "beyond-limits",
        "a point beyond a three-sigma limit",
        f"{WESTERN_ELECTRIC}, test 1; {NELSON}, test 1; {ISO}",
        CountRule(1, 1, 3),
    ),
    NamedRule(
        "two-of-three",
        "two of three points in a row beyond two sigma on the same side",
        f"{WESTERN_ELECTRIC}, test 2; {NELSON}, test 5",
        CountRule(2, 3, 2),
    ),
    NamedRule(
        "four-of-five",
        "four of five points in a row beyond one sigma on the same side",
        f"{WESTERN_ELECTRIC}, test 3; {NELSON}, test 6",
        CountRule(4, 5, 1),
    ),
    NamedRule(
        "seven-one-side",
        "seven points in a row on the same side of the centre line",
        ISO,
        CountRule(7, 7, 0),
    ),
    NamedRule(
        "eight-one-side",
        "eight points in a row on the same side of the centre line",
        f"{WESTERN_ELECTRIC}, test 4",
        CountRule(8, 8, 0),
    ),
    NamedRule(
        "nine-one-side",
        "nine points in a row on the same side of the centre line",
        f"{NELSON}, test 2",
        CountRule(9, 9, 0),
    ),
    NamedRule(
        "six-rising",
        "six points in a row, each above the one before, or each below",
        f"{NELSON}, test 3",
        StepRule(6, "one way"),
    ),
    NamedRule(
        "seven-rising",
        "seven points in a row, each above the one before, or each below",
        ISO,
        StepRule(7, "one way"),
    ),
    NamedRule(
        "fourteen-in-turn",
        "fourteen points in a row that go up and down in turn",
        f"{NELSON}, test 4",
        StepRule(14, "in turn"),
    ),
    NamedRule(
        "fifteen-within",
        "fifteen points in a row within one sigma of the centre line",
        f"{WESTERN_ELECTRIC}, stratification; {NELSON}, test 7",
        BandRule(15, 1, "within"),
    ),
    NamedRule(
        "eight-outside",
        "eight points in a row beyond one sigma, on either side",
        f"{WESTERN_ELECTRIC}, mixture; {NELSON}, test 8",
        BandRule(8, 1, "outside"),
    ),
)
RULES: Mapping[str, NamedRule] = {one.name: one for one in _LISTED}


def signals(
    zones: Sequence[int], values: Sequence[Fraction], rules: Sequence[NamedRule]
) -> tuple[tuple[str, ...], ...]:
    """The names of the rules that hold at each point.

    `zones` says where each point stands (`ChartLimits.zone`), `values` what it is.
    """
    return tuple(
        tuple(named.name for named in rules if _holds(named.rule, *_last(named.rule, zones, values, end)))
        for end in range(1, len(values) + 1)
    )


def _last(
    rule: Rule, zones: Sequence[int], values: Sequence[Fraction], end: int
) -> tuple[Sequence[int], Sequence[Fraction]]:
    """The points that `rule` looks at, the newest of them just before `end`."""
    begin = max(0, end - rule.window)
    return zones[begin:end], values[begin:end]


def _holds(rule: Rule, last: Sequence[int], values: Sequence[Fraction]) -> bool:
    """Whether `rule` holds at the newest of the points that it looks at."""
    newest = last[-1]
    if isinstance(rule, CountRule):
        if abs(newest) <= rule.sigmas:
            return False
        beyond = (zone for zone in last if abs(zone) > rule.sigmas and (zone > 0) == (newest > 0))
        return sum(1 for _ in beyond) >= rule.needed
    if len(last) < rule.window:
        return False
    if isinstance(rule, BandRule):
        return all((abs(zone) > rule.sigmas) == (rule.side == "outside") for zone in last)
    steps = [_sign(after - before) for before, after in pairwise(values)]
    if rule.steps == "in turn":
        steps = [-step if place % 2 else step for place, step in enumerate(steps)]
    return steps[0] != 0 and all(step == steps[0] for step in steps)


def _sign(value: Fraction) -> int:
    return (value > 0) - (value < 0)
