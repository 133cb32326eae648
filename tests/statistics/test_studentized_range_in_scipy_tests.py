"""The studentized range against the mpmath table that SciPy's tests carry, read from where SciPy ships it.

Source: scipy/stats/tests/data/studentized_range_mpmath_ref.json (SciPy's authors, by mpmath, from memory of
their method: a double integral of the density). It holds doubles of the cumulative function, so the tail can
be compared to a few units of 1e-16, whatever its size; each case's own tolerance is far wider.
"""

import json
from importlib.resources import files

import pytest

from assayfolio.statistics.distributions import studentized_range_sf

TABLE = json.loads(
    (files("scipy.stats") / "tests" / "data" / "studentized_range_mpmath_ref.json").read_text("utf-8")
)
CUMULATIVE = [
    pytest.param(case["src_case"], case["mp_result"], id="q{q}-k{k}-df{v}".format(**case["src_case"]))
    for case in TABLE["cdf_data"]
]


def test_the_table_is_there() -> None:
    assert len(CUMULATIVE) == 72


@pytest.mark.parametrize(("case", "cumulative"), CUMULATIVE)
def test_the_cumulative_function_is_met_to_a_few_last_places(
    case: dict[str, float], cumulative: float
) -> None:
    tail = studentized_range_sf(case["q"], int(case["k"]), case["v"])
    assert 1 - tail == pytest.approx(cumulative, rel=0, abs=3e-15)
