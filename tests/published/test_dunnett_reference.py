"""Every level against a control by Dunnett's procedure against values of 113-bit arithmetic.

Source: tests/vectors/dunnett.json (its `source` says how it was made). Seven data sets: equal and unequal
sizes, one treatment, an offset of 1e12, data of mixed decimals, adjusted p from tiny to near 1.
"""

from math import log10

import pytest

from assayfolio.exact import to_double
from assayfolio.statistics.comparisons import GREATER, LESS, TWO_SIDED, ComparisonResult
from assayfolio.statistics.distributions import many_to_one_isf
from assayfolio.statistics.many_to_one_comparisons import compare_dunnett
from support.reference import analysed, cases_of, error_in_widths, relative_error, square_root

CASES = {name: case for name, case in cases_of("dunnett").items() if "data" in case["inputs"]}
TOLERANCE = 1e-11


def _alpha(name: str) -> float:
    return 1 - float(CASES[name]["inputs"]["conf_level"])


def _rows(name: str, alternative: str) -> dict[str, ComparisonResult]:
    inputs = CASES[name]["inputs"]
    rows = compare_dunnett(analysed(inputs["data"]), inputs["control"], alternative, _alpha(name))
    return {row.label.removesuffix(f" - {inputs['control']}"): row for row in rows}


def test_all_seven_data_sets_are_there():
    assert len(CASES) == 7


@pytest.mark.parametrize("name", CASES)
def test_every_difference_with_its_statistic(name):
    expected = CASES[name]["expected"]["comparisons"]
    rows = _rows(name, TWO_SIDED)
    assert set(rows) == set(expected)
    for level, row in rows.items():
        assert to_double(row.estimate) == float(expected[level]["diff"])
        assert to_double(row.se) == float(expected[level]["se"])
        assert row.statistic.sign * square_root(row.statistic.square) == float(expected[level]["t"])


@pytest.mark.parametrize(
    ("alternative", "key"), [(TWO_SIDED, "p_two"), (GREATER, "p_greater"), (LESS, "p_less")]
)
@pytest.mark.parametrize("name", CASES)
def test_adjusted_p_values_either_way(name, alternative, key):
    expected = CASES[name]["expected"]["comparisons"]
    for level, row in _rows(name, alternative).items():
        assert relative_error(row.adjusted.p, expected[level][key]) < TOLERANCE
        assert row.adjusted.log10_p == pytest.approx(log10(float(expected[level][key])), abs=TOLERANCE)


@pytest.mark.parametrize("name", CASES)
def test_simultaneous_intervals_and_bounds(name):
    expected = CASES[name]["expected"]["comparisons"]
    two, greater, less = (_rows(name, alternative) for alternative in (TWO_SIDED, GREATER, LESS))
    for level, values in expected.items():
        assert error_in_widths(two[level].interval, values["ci_two"]) < TOLERANCE
        lower, open_above = greater[level].interval
        open_below, upper = less[level].interval
        assert open_above is None
        assert open_below is None
        bounds = values["lower_bound_greater"], values["upper_bound_less"]
        assert error_in_widths((lower, upper), bounds) < TOLERANCE


@pytest.mark.parametrize(("key", "two_sided"), [("crit_two", True), ("crit_one", False)])
@pytest.mark.parametrize("name", CASES)
def test_critical_values(name, key, two_sided):
    inputs = CASES[name]["inputs"]
    analysis = analysed(inputs["data"])
    others = [level.n for level in analysis.levels if level.level != inputs["control"]]
    n_control = analysis.summary_of(inputs["control"]).n
    point = many_to_one_isf(_alpha(name), n_control, others, analysis.df_within, two_sided)
    assert relative_error(point, CASES[name]["expected"][key]) < TOLERANCE
