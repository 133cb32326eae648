"""Critical values of the studentised range and of Dunnett's two-sided test as standard tables print them.

Source: standard tables, from memory, to two decimals (tests/vectors/worked_examples.json). Dunnett's are for
equal sizes, whatever these are.
"""

import re

import pytest

from assayfolio.statistics.distributions import many_to_one_isf, studentized_range_isf
from support.reference import agrees_as_printed, examples

POINTS = examples()["range-dunnett-critical"]["expected"]
RANGE_POINTS = tuple(quantity for quantity in POINTS if quantity.startswith("q("))
DUNNETT_POINTS = tuple(quantity for quantity in POINTS if quantity.startswith("Dunnett"))


def test_every_point_of_the_example_is_compared():
    assert len(RANGE_POINTS) == 4
    assert len(DUNNETT_POINTS) == 5
    assert POINTS.keys() == {*RANGE_POINTS, *DUNNETT_POINTS}


@pytest.mark.parametrize("quantity", RANGE_POINTS)
def test_the_printed_point_of_the_range(quantity):
    alpha, k, df = re.fullmatch(r"q\((.+);(\d+),(\d+)\)", quantity).groups()
    assert agrees_as_printed(float(studentized_range_isf(float(alpha), int(k), int(df))), POINTS[quantity])


@pytest.mark.parametrize("n", [4, 11])
@pytest.mark.parametrize("quantity", DUNNETT_POINTS)
def test_the_printed_point_of_many_to_one(quantity, n):
    alpha, m, df = re.fullmatch(r"Dunnett d\((.+);(\d+) treatments,(\d+) df\)", quantity).groups()
    point = many_to_one_isf(float(alpha), n, [n] * int(m), int(df))
    assert agrees_as_printed(point, POINTS[quantity])
