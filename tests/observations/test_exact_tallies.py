"""Sums of columns of integers are exact whatever their size, and classes do not depend on the order."""

from collections import Counter

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from assayfolio.observations.histograms import MOST_CLASSES, Histogram
from assayfolio.observations.tallies import UnitTally, exact_squares, exact_sums

LEVELS = 4
sizes = st.sampled_from([10**3, 2**20, 2**26, 2**31, 2**32, 10**17, 2 * 10**18])


@st.composite
def numbers_by_level(draw: st.DrawFn, largest: int | None = None) -> list[tuple[int, int]]:
    size = draw(sizes) if largest is None else largest
    rows = st.tuples(st.integers(0, LEVELS - 1), st.integers(-size, size))
    return draw(st.lists(rows, min_size=1, max_size=60))


def columns(rows: list[tuple[int, int]]) -> tuple[np.ndarray, np.ndarray]:
    levels, numbers = zip(*rows, strict=True)
    return np.array(levels, np.int64), np.array(numbers, np.int64)


@given(numbers_by_level())
@settings(deadline=None)
def test_sums_and_squares_are_those_of_whole_numbers(rows: list[tuple[int, int]]) -> None:
    levels, numbers = columns(rows)
    largest = max(abs(number) for _, number in rows)
    by_level = [[number for level, number in rows if level == own] for own in range(LEVELS)]
    assert exact_sums(levels, numbers, LEVELS, largest) == [sum(own) for own in by_level]
    assert exact_squares(levels, numbers, LEVELS, largest) == [
        sum(number * number for number in own) for own in by_level
    ]


@given(numbers_by_level(10**18 - 1), st.integers(1, 59))
@settings(deadline=None)
def test_a_tally_in_two_parts_is_the_tally_of_the_whole(rows: list[tuple[int, int]], cut: int) -> None:
    parts = [part for part in (rows[:cut], rows[cut:]) if part]
    whole, pieces = (UnitTally(-3, rows[0][1]) for _ in range(2))
    whole.add(*columns(rows), LEVELS)
    for part in parts:
        pieces.add(*columns(part), LEVELS)
    assert [whole.totals(level) for level in range(LEVELS)] == [
        pieces.totals(level) for level in range(LEVELS)
    ]
    assert whole.step == pieces.step


@given(numbers_by_level(), st.randoms(use_true_random=False))
@settings(deadline=None)
def test_classes_hold_every_number_and_do_not_depend_on_the_order(
    rows: list[tuple[int, int]], chance: "st.random.Random"
) -> None:
    at_once, one_by_one = Histogram(), Histogram()
    at_once.add(*columns(rows), LEVELS)
    shuffled = list(rows)
    chance.shuffle(shuffled)
    for row in shuffled:
        one_by_one.add(*columns([row]), LEVELS)
    assert at_once.first == one_by_one.first
    assert at_once.shift == one_by_one.shift
    assert np.array_equal(at_once.filled, one_by_one.filled[:LEVELS])
    assert at_once.filled.shape[1] <= MOST_CLASSES
    counted = Counter((level, (number >> at_once.shift) - at_once.first) for level, number in rows)
    assert all(at_once.filled[cell] == count for cell, count in counted.items())
    assert at_once.filled.sum() == len(rows)
