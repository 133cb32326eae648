"""How often a process that has not changed signals: against closed forms, and against counting every case."""

import math
from collections.abc import Callable, Iterator, Sequence
from itertools import groupby, pairwise, permutations, product
from statistics import NormalDist

import pytest

from assayfolio.statistics.control_charts import D2, D4
from assayfolio.statistics.false_signals import (
    expected_signals,
    mean_run_length,
    range_signal_rate,
    settled_rate,
)
from assayfolio.statistics.run_rules import RULES, BandRule, CountRule, Rule, StepRule

NORMAL = NormalDist()


def rules(*names: str) -> list[Rule]:
    return [RULES[name].rule for name in names]


# In turn: E(14) of the Euler zigzag numbers counts the orders of 14 values that go up and down.
SETTLED = {
    "beyond-limits": 2 * NORMAL.cdf(-3),
    "seven-one-side": 2 / 2**7,
    "eight-one-side": 2 / 2**8,
    "nine-one-side": 2 / 2**9,
    "six-rising": 2 / math.factorial(6),
    "seven-rising": 2 / math.factorial(7),
    "fourteen-in-turn": 2 * 199360981 / math.factorial(14),
    "fifteen-within": (1 - 2 * NORMAL.cdf(-1)) ** 15,
    "eight-outside": (2 * NORMAL.cdf(-1)) ** 8,
}


@pytest.mark.parametrize("name", SETTLED)
def test_the_chance_at_one_point_is_the_closed_form(name: str) -> None:
    assert settled_rate(rules(name)) == pytest.approx(SETTLED[name], rel=1e-11)


def test_the_chance_of_two_of_three_is_that_of_its_three_cases() -> None:
    beyond = NORMAL.cdf(-2)
    # The newest beyond, and not both of the two before it within: on either side.
    assert settled_rate(rules("two-of-three")) == pytest.approx(
        2 * beyond * (1 - (1 - beyond) ** 2), rel=1e-11
    )


RUN_LENGTHS = {
    "a run of k on either side": (CountRule(9, 9, 0), 2**9 - 1),
    "one point beyond": (CountRule(1, 1, 3), 1 / (2 * NORMAL.cdf(-3))),
    # n values have no three in a row that rise or fall in 2 E(n) of n! orders; E(n)/n! sums to sec 1 + tan 1.
    "three one way": (StepRule(3, "one way"), 2 * (1 / math.cos(1) + math.tan(1)) - 2),
    # n values have no three in turn where all rise or all fall: 2 of n! orders.
    "three in turn": (StepRule(3, "in turn"), 2 * math.e - 2),
}


@pytest.mark.parametrize("what", RUN_LENGTHS)
def test_the_mean_run_length_is_the_closed_form(what: str) -> None:
    rule, expected = RUN_LENGTHS[what]
    assert mean_run_length([rule]) == pytest.approx(expected, rel=1e-8)


def test_a_moving_range_is_beyond_its_limit_as_often_as_a_difference_of_two_values() -> None:
    assert range_signal_rate() == pytest.approx(2 * NORMAL.cdf(-D4 * D2 / math.sqrt(2)), rel=1e-11)


# --- counting every case: zones in every order, and within a zone every order of its values

LINES = (-2.0, -1.0, 0.0, 1.0, 2.0)
POINTS = 5
Held = Callable[[Sequence[float]], bool]


def two_of_three_beyond_one(last: Sequence[float]) -> bool:
    up, down = (sum(value * side > 1 for value in last[-3:]) >= 2 for side in (1, -1))
    return (up and last[-1] > 1) or (down and last[-1] < -1)


def three_on_a_side(last: Sequence[float]) -> bool:
    return len(last) >= 3 and abs(sum(1 if value > 0 else -1 for value in last[-3:])) == 3


def beyond_two(last: Sequence[float]) -> bool:
    return abs(last[-1]) > 2


def three_within_one(last: Sequence[float]) -> bool:
    return len(last) >= 3 and all(abs(value) < 1 for value in last[-3:])


def two_outside_one(last: Sequence[float]) -> bool:
    return len(last) >= 2 and all(abs(value) > 1 for value in last[-2:])


def three_one_way(last: Sequence[float]) -> bool:
    a, b, c = (*last[-3:], 0, 0)[:3]
    return len(last) >= 3 and (a < b < c or a > b > c)


def four_in_turn(last: Sequence[float]) -> bool:
    if len(last) < 4:
        return False
    a, b, c, d = last[-4:]
    return (a < b > c < d) or (a > b < c > d)


BY_HAND: dict[str, tuple[Rule, Held]] = {
    "two of three beyond one sigma": (CountRule(2, 3, 1), two_of_three_beyond_one),
    "three on one side": (CountRule(3, 3, 0), three_on_a_side),
    "beyond two sigma": (CountRule(1, 1, 2), beyond_two),
    "three within one sigma": (BandRule(3, 1, "within"), three_within_one),
    "two outside one sigma": (BandRule(2, 1, "outside"), two_outside_one),
    "three one way": (StepRule(3, "one way"), three_one_way),
    "four in turn": (StepRule(4, "in turn"), four_in_turn),
}
SETS = [
    *([name] for name in BY_HAND),
    ["two of three beyond one sigma", "three on one side", "beyond two sigma"],
    ["beyond two sigma", "three one way"],
    ["three on one side", "three one way", "four in turn"],
    ["two of three beyond one sigma", "three within one sigma", "three one way"],
    list(BY_HAND),
]


def every_case(points: int) -> Iterator[tuple[list[float], float]]:
    """Every kind of sequence of values, as one example of it, with its chance."""
    ends = [-3.0, *LINES, 3.0]
    places = [(low + high) / 2 for low, high in pairwise(ends)]
    cuts = [0.0, *(NORMAL.cdf(line) for line in LINES), 1.0]
    chances = [high - low for low, high in pairwise(cuts)]
    for zones in product(range(len(places)), repeat=points):
        chance = math.prod(chances[zone] for zone in zones)
        order = sorted(range(points), key=lambda at: zones[at])
        groups = [list(group) for _, group in groupby(order, key=lambda at: zones[at])]
        ways = math.prod(math.factorial(len(group)) for group in groups)
        for ranks in product(*(permutations(range(len(group))) for group in groups)):
            values = [0.0] * points
            for group, ranked in zip(groups, ranks, strict=True):
                for at, rank in zip(group, ranked, strict=True):
                    values[at] = places[zones[at]] + rank / 100
            yield values, chance / ways


@pytest.fixture(scope="module")
def cases() -> list[tuple[list[float], float]]:
    found = list(every_case(POINTS))
    assert math.fsum(chance for _, chance in found) == pytest.approx(1, abs=1e-12)
    return found


@pytest.mark.parametrize("names", SETS, ids=lambda names: " + ".join(names))
def test_the_chain_finds_what_counting_every_case_finds(names, cases):
    chain = [BY_HAND[name][0] for name in names]
    held = [BY_HAND[name][1] for name in names]
    told = [0.0] * POINTS
    for values, chance in cases:
        for end in range(1, POINTS + 1):
            if any(holds(values[:end]) for holds in held):
                told[end - 1] += chance
    for points in range(1, POINTS + 1):
        assert expected_signals(chain, points) == pytest.approx(math.fsum(told[:points]), abs=1e-11)
    assert settled_rate(chain) == pytest.approx(told[-1], abs=1e-11)


def test_expected_signals_grow_by_the_settled_chance_with_every_point_more() -> None:
    chosen = rules("beyond-limits", "nine-one-side", "six-rising", "two-of-three")
    ten, hundred = expected_signals(chosen, 10), expected_signals(chosen, 100)
    assert hundred - ten == pytest.approx(90 * settled_rate(chosen), rel=1e-9)


def test_a_rule_more_never_makes_signals_rarer() -> None:
    names = ("beyond-limits", "two-of-three", "four-of-five", "nine-one-side", "six-rising")
    rates = [settled_rate(rules(*names[:count])) for count in range(1, len(names) + 1)]
    assert rates == sorted(rates)


def test_no_rules_and_no_points_give_no_signals() -> None:
    assert expected_signals([], 100) == 0
    assert expected_signals(rules("beyond-limits"), 0) == 0
    assert mean_run_length([]) == math.inf
