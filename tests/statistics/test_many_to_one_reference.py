"""The many-to-one distribution against values computed independently with 113-bit arithmetic, to 18 digits.

Source: tests/vectors/dunnett.json (its `source` and each case's `method` say how). Sizes equal and unequal,
up to 29 treatments, df 4 to infinite, points from 0.999 to 1e-10. A statistic given as a decimal becomes the
nearest double: that moves a tail by the double's half unit times its relative slope, at most 5e-15 here.
"""

from typing import Any

import mpmath as mp
import pytest

from assayfolio.statistics.distributions import (
    many_to_one_isf,
    many_to_one_log10_sf,
    many_to_one_sf,
)
from support.high_precision import distance, distance_by_log10
from support.reference import cases_of

CASES = cases_of("dunnett")
TAILS = sorted(name for name, case in CASES.items() if "t" in case["inputs"])
POINTS = sorted(name for name, case in CASES.items() if "alpha" in case["inputs"])


def test_every_case_is_a_tail_or_a_point_or_a_whole_analysis() -> None:
    # The analyses have a test file of their own.
    others = [name for name in CASES if name not in TAILS + POINTS]
    assert len(TAILS) == 6
    assert len(POINTS) == 14
    assert len(others) == 7
    assert all(name.startswith("dataset") for name in others)


def _law(case: dict[str, Any]) -> tuple[int, list[int], float, bool]:
    inputs = case["inputs"]
    return inputs["n_control"], inputs["n_treatments"], float(inputs["df"]), inputs["sided"] == "two"


@pytest.mark.parametrize("name", TAILS)
def test_a_tail_has_thirteen_digits(name: str) -> None:
    case = CASES[name]
    d, truth = float(case["inputs"]["t"]), mp.mpf(case["expected"]["sf"])
    assert distance(many_to_one_sf(d, *_law(case)), truth) < 1e-13
    assert distance_by_log10(many_to_one_log10_sf(d, *_law(case)), truth) < 1e-13


@pytest.mark.parametrize("name", POINTS)
def test_a_point_has_thirteen_digits(name: str) -> None:
    case = CASES[name]
    point = many_to_one_isf(float(case["inputs"]["alpha"]), *_law(case))
    assert distance(point, mp.mpf(case["expected"]["d"])) < 1e-13
