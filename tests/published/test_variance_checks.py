"""The Brown-Forsythe test of equal variances against values computed independently with exact fractions.

Source: tests/vectors/variance_checks.json (its `source` says how it was made), family `levene_median`,
fourteen data sets. Not compared, for they belong to later work: levene_mean, bartlett, cochran_C, hartley,
anderson_darling, grubbs and the table of Cochran's critical values.
"""

import pytest

from assayfolio.exact import to_double
from assayfolio.statistics.checks import brown_forsythe_variances
from support.reference import cases_of, decimals, relative_error

CASES = {
    name: case for name, case in cases_of("variance_checks").items() if "levene_median" in case["expected"]
}
TOLERANCE = 1e-11


def test_fourteen_data_sets_are_compared():
    assert len(CASES) == 14


@pytest.mark.parametrize("name", CASES)
def test_statistic_is_the_nearest_double_and_p_agrees(name):
    expected = CASES[name]["expected"]["levene_median"]
    check = brown_forsythe_variances(decimals(CASES[name]["inputs"]["data"]))
    assert to_double(check.f) == float(expected["W"])
    assert check.df == (expected["df1"], expected["df2"])
    assert relative_error(check.tail.p, expected["p"]) < TOLERANCE
