"""At which points of a chart the rules hold."""

from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.statistics.control_charts import ChartLimits
from assayfolio.statistics.run_rules import RULES, signals
from assayfolio.study.trend_plan import RUN_RULES

# Lines a little off whole numbers, so that no point of a test lies on one.
LIMITS = ChartLimits(20, Fraction(0), Fraction(1128379, 1000000))


def points_of(rule: str, text: str) -> list[int]:
    """The places, from one, of the points at which `rule` holds; blanks stand between the points."""
    values = [Fraction(one) for one in text.split()]
    zones = [LIMITS.zone(value) for value in values]
    found = signals(zones, values, [RULES[rule]])
    return [place for place, names in enumerate(found, start=1) if names]


HOLDS = {
    "beyond-limits": ("0.5 3.2 -2.9 -3.1", [2, 4]),
    "two-of-three": ("2.5 0 2.5 2.2 -2.2 0 0 -2.3 -2.3", [3, 4, 9]),
    "four-of-five": ("1.2 1.3 0.2 1.4 1.1 1.2 0 -1.2", [5, 6]),
    "seven-one-side": ("1 1 1 1 1 1 1 -1", [7]),
    "eight-one-side": ("-1 -.1 -.2 -.3 -.2 -.1 -.3 -.2 -.1 1", [8, 9]),
    "nine-one-side": (".1 .2 .1 .2 .1 .2 .1 .2 .1", [9]),
    "six-rising": ("-.5 -.4 -.3 -.2 -.1 0 .1 .05 .04 .03 .02 .01 .005", [6, 7, 12, 13]),
    "seven-rising": ("7 6 5 4 3 2 1 2", [7]),
    "fourteen-in-turn": ("0 1 0 1 0 1 0 1 0 1 0 1 0 1 0 0", [14, 15]),
    "fifteen-within": ("5 " + ".2 -.3 0 " * 5 + ".1 2", [16, 17]),
    "eight-outside": ("1.5 -1.5 2 -2 3.5 -1.2 1.1 -2.2 0", [8]),
}


@pytest.mark.parametrize("rule", HOLDS)
def test_a_rule_holds_at_the_point_that_completes_its_run(rule: str) -> None:
    text, expected = HOLDS[rule]
    assert points_of(rule, text) == expected


def test_a_point_on_the_centre_line_is_on_neither_side() -> None:
    assert points_of("nine-one-side", "1 1 1 1 1 1 1 1 0 1") == []


def test_equal_neighbours_end_a_rise() -> None:
    assert points_of("six-rising", "1 2 3 3 4 5 6") == []
    assert points_of("fourteen-in-turn", "0 1 0 1 0 1 0 0 1 0 1 0 1 0 1") == []


def test_the_point_that_signals_is_itself_beyond_the_line() -> None:
    assert points_of("two-of-three", "2.5 2.5 0") == [2]
    assert points_of("four-of-five", "1.5 1.5 1.5 1.5 0") == [4]


def test_points_beyond_on_different_sides_do_not_add_up() -> None:
    assert points_of("two-of-three", "2.5 -2.5 2.6") == [3]
    assert points_of("four-of-five", "1.5 -1.5 1.5 -1.5 1.5 1.5") == []


sequences = st.lists(st.fractions(-4, 4, max_denominator=20), max_size=40)


@given(sequences)
def test_a_chart_upside_down_signals_at_the_same_points(values):
    turned = [-value for value in values]
    found, other = (
        signals([LIMITS.zone(value) for value in each], each, list(RULES.values()))
        for each in (values, turned)
    )
    assert found == other


@given(sequences, sequences)
def test_what_comes_later_changes_no_signal(values, more):
    whole = values + more
    rules = list(RULES.values())
    first = signals([LIMITS.zone(value) for value in values], values, rules)
    assert signals([LIMITS.zone(value) for value in whole], whole, rules)[: len(values)] == first


def test_every_rule_that_a_plan_can_name_is_known_with_its_source() -> None:
    assert {*RULES, "range-beyond-limit"} == set(RUN_RULES)
    assert all(rule.source for rule in RULES.values())
