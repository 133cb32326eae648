"""The studentized range against values computed independently with 113-bit arithmetic, 18 digits and more.

Source: tests/vectors/studentized_range.json (its `source` and each case's `method` say how; the k = 2 cases
agree with Student's t to 30 digits). A q given as a decimal becomes the nearest double: that moves a tail by
the double's half unit times its relative slope, at most 5e-14 here.
"""

from typing import Any

import mpmath as mp
import pytest

from assayfolio.statistics.distributions import (
    studentized_range_isf,
    studentized_range_log10_sf,
    studentized_range_sf,
)
from support.high_precision import distance, distance_by_log10
from support.reference import cases_of

CASES = cases_of("studentized_range")
TAILS = sorted(name for name, case in CASES.items() if "q" in case["inputs"])
POINTS = sorted(name for name, case in CASES.items() if "upper_tail" in case["inputs"])


def test_every_case_is_either_a_tail_or_a_point() -> None:
    # The others hold whole Tukey-Kramer analyses, which have a test file of their own.
    others = [name for name in CASES if name not in TAILS + POINTS]
    assert len(TAILS) == 15
    assert len(POINTS) == 13
    assert all(name.startswith("tukey_kramer") for name in others)


def _inputs(case: dict[str, Any]) -> tuple[int, float]:
    return case["inputs"]["k"], float(case["inputs"]["df"])


@pytest.mark.parametrize("name", TAILS)
def test_a_tail_has_twelve_digits(name: str) -> None:
    case = CASES[name]
    q, truth = float(case["inputs"]["q"]), mp.mpf(case["expected"]["sf"])
    assert distance(studentized_range_sf(q, *_inputs(case)), truth) < 1e-12
    assert distance_by_log10(studentized_range_log10_sf(q, *_inputs(case)), truth) < 1e-12


@pytest.mark.parametrize("name", POINTS)
def test_a_point_has_thirteen_digits(name: str) -> None:
    case = CASES[name]
    point = studentized_range_isf(float(case["inputs"]["upper_tail"]), *_inputs(case))
    assert distance(point, mp.mpf(case["expected"]["q"])) < 1e-13
