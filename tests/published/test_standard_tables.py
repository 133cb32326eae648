"""Critical values of the studentised range as standard tables print them, to two decimals.

Source: standard tables, from memory (tests/vectors/worked_examples.json). The many-to-one points of the same
example belong to later work and are not compared.
"""

import re

import pytest

from assayfolio.statistics.distributions import studentized_range_isf
from support.reference import agrees_as_printed, examples

POINTS = examples()["range-dunnett-critical"]["expected"]
RANGE_POINTS = tuple(quantity for quantity in POINTS if quantity.startswith("q("))


def test_what_is_not_compared_is_the_many_to_one_points():
    assert len(RANGE_POINTS) == 4
    assert all(quantity.startswith("Dunnett") for quantity in POINTS.keys() - set(RANGE_POINTS))


@pytest.mark.parametrize("quantity", RANGE_POINTS)
def test_the_printed_point(quantity):
    alpha, k, df = re.fullmatch(r"q\((.+);(\d+),(\d+)\)", quantity).groups()
    assert agrees_as_printed(float(studentized_range_isf(float(alpha), int(k), int(df))), POINTS[quantity])
