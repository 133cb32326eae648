"""Checks and outlier tests against values computed independently with exact fractions and 36-digit tails.

Source: tests/vectors/variance_checks.json (its `source` says how it was made): fourteen data sets for tests
of equal variances, a table of Cochran's critical values, ten samples for normality and Grubbs' test. Every
case is compared; of its values only `hartley` is not, since that test is not offered.

For unequal sizes the vectors give Cochran's C as a description; the test then goes by shares in SS within, so
its p is compared for equal sizes only.
"""

import re

import pytest

from assayfolio.exact import ExactSums, Root, to_double
from assayfolio.statistics.cochran import cochran_limit, cochran_variances, largest_variance_share
from assayfolio.statistics.equal_variances import (
    bartlett_variances,
    brown_forsythe_variances,
    levene_variances,
)
from assayfolio.statistics.grubbs import grubbs_limit, grubbs_tail, lowest_and_highest
from assayfolio.statistics.normality import anderson_darling, residuals
from assayfolio.statistics.outliers import grubbs_single
from support.reference import analysed, cases_of, decimals, relative_error

CASES = cases_of("variance_checks")
SPREADS = {name: case for name, case in CASES.items() if "bartlett" in case["expected"]}
SAMPLES = {name: case for name, case in CASES.items() if "grubbs" in case["expected"]}
TABLE = CASES["cochran_critical_table"]
TOLERANCE = 1e-11


def sample(name):
    ((_, values),) = decimals({"sample": SAMPLES[name]["inputs"]["data"]})
    return values


def test_every_case_and_every_kind_of_value_is_compared():
    assert (len(SPREADS), len(SAMPLES), len(CASES)) == (14, 10, 25)
    kinds = {kind for case in SPREADS.values() for kind in case["expected"]}
    assert kinds == {"levene_mean", "levene_median", "bartlett", "cochran_C", "hartley"}
    assert {kind for case in SAMPLES.values() for kind in case["expected"]} == {"anderson_darling", "grubbs"}


@pytest.mark.parametrize("name", SPREADS)
@pytest.mark.parametrize(
    ("kind", "check"),
    [("levene_median", brown_forsythe_variances), ("levene_mean", levene_variances)],
    ids=["median", "mean"],
)
def test_f_of_the_distances_from_the_level_centres(name, kind, check):
    expected = SPREADS[name]["expected"][kind]
    found = check(decimals(SPREADS[name]["inputs"]["data"]))
    assert to_double(found.f) == float(expected["W"])
    assert found.df == (expected["df1"], expected["df2"])
    assert relative_error(found.tail.p, expected["p"]) < TOLERANCE


@pytest.mark.parametrize("name", SPREADS)
def test_bartlett(name):
    expected = SPREADS[name]["expected"]["bartlett"]
    found = bartlett_variances(analysed(SPREADS[name]["inputs"]["data"]))
    assert relative_error(found.statistic, expected["statistic"]) < 1e-14
    assert relative_error(found.statistic * to_double(found.correction), expected["uncorrected"]) < 1e-14
    assert to_double(found.correction) == float(expected["correction"])
    assert found.df == expected["df"]
    assert relative_error(found.tail.p, expected["p"]) < TOLERANCE


@pytest.mark.parametrize("name", SPREADS)
def test_cochran(name):
    expected = SPREADS[name]["expected"]["cochran_C"]
    analysis = analysed(SPREADS[name]["inputs"]["data"])
    level, share = largest_variance_share(analysis)
    assert (level, to_double(share)) == (expected["group"], float(expected["C"]))
    equal_sizes = len({summary.n for summary in analysis.levels}) == 1
    assert ("p_bonferroni_bound" in expected) is equal_sizes
    if equal_sizes:
        found = cochran_variances(analysis)
        assert (found.level, found.share) == (level, share)
        assert relative_error(found.bound.p, expected["p_bonferroni_bound"]) < TOLERANCE
        for alpha in ("0.05", "0.01"):
            limit = cochran_limit(float(alpha), found.levels, *found.df)
            assert relative_error(limit, expected[f"crit_{alpha}"]) < TOLERANCE


def test_the_cases_of_cochran_hold_equal_and_unequal_sizes():
    bounds = ["p_bonferroni_bound" in case["expected"]["cochran_C"] for case in SPREADS.values()]
    assert (bounds.count(True), bounds.count(False)) == (3, 11)


@pytest.mark.parametrize("sizes", TABLE["expected"])
@pytest.mark.parametrize("alpha", TABLE["inputs"]["alphas"])
def test_critical_values_of_cochran(sizes, alpha):
    k, n = (int(number) for number in re.findall(r"\d+", sizes))
    limit = cochran_limit(float(alpha), k, n - 1, (k - 1) * (n - 1))
    assert relative_error(limit, TABLE["expected"][sizes][alpha]) < TOLERANCE


@pytest.mark.parametrize("name", SAMPLES)
def test_anderson_darling(name):
    expected = SAMPLES[name]["expected"]["anderson_darling"]
    found = anderson_darling(residuals([("sample", sample(name))]))
    assert relative_error(found.a2, expected["A2"]) < 1e-13
    assert relative_error(found.modified, expected["A2_star"]) < 1e-13
    assert relative_error(found.p, expected["p"]) < TOLERANCE


@pytest.mark.parametrize("name", SAMPLES)
def test_grubbs_at_either_end(name):
    expected, values = SAMPLES[name]["expected"]["grubbs"], sample(name)
    found = grubbs_single("sample", values)
    assert to_double(found.statistic) == float(expected["G"])
    assert found.indexes == (expected["index"],)
    assert relative_error(found.p, expected["p_two"]) < TOLERANCE
    assert relative_error(found.straggler_limit, expected["crit_two"]) < TOLERANCE


@pytest.mark.parametrize("name", SAMPLES)
def test_grubbs_at_each_end(name):
    expected, values = SAMPLES[name]["expected"]["grubbs"], sample(name)
    n = ExactSums.of(values).n
    low, high = lowest_and_highest(values)
    for end, suffix in ((low, "min"), (high, "max")):
        assert isinstance(end.g, Root)
        assert to_double(end.g) == float(expected[f"G_{suffix}"])
        assert relative_error(grubbs_tail(end.g, n, ends=1), expected[f"p_{suffix}"]) < TOLERANCE
    assert relative_error(grubbs_limit(0.05, n, ends=1), expected["crit_one"]) < TOLERANCE
