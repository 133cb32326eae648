"""Effect sizes and their noncentral intervals against values of 36 to 50 digit arithmetic.

Source: tests/vectors/one_way.json (its `source` says how it was made): the effect sizes of twenty data sets,
with limits at 95 % and 90 %.
"""

from math import sqrt

import pytest

from assayfolio.exact import to_double
from assayfolio.statistics.effects import effect_sizes, noncentrality_interval
from support.reference import analysed, cases_of, relative_error

CASES = cases_of("one_way")
REGULAR = tuple(name for name in CASES if "effect_ci" in CASES[name]["expected"])
TOLERANCE = 1e-11


def test_only_the_case_without_variation_within_levels_has_none():
    assert set(CASES) - set(REGULAR) == {"degenerate_ssw_zero"}


@pytest.mark.parametrize("name", REGULAR)
def test_sizes_are_the_nearest_doubles(name):
    expected = CASES[name]["expected"]
    sizes = effect_sizes(analysed(CASES[name]["inputs"]["data"]), 0.95)
    assert sizes.cohen_f is not None
    assert to_double(sizes.eta_squared) == float(expected["eta2"])
    assert to_double(sizes.omega_squared) == float(expected["omega2"])
    assert to_double(sizes.epsilon_squared) == float(expected["epsilon2"])
    assert to_double(sizes.cohen_f) == float(expected["cohen_f"])
    assert to_double(max(sizes.omega_squared, 0)) == float(expected["omega2_truncated"])
    assert to_double(max(sizes.epsilon_squared, 0)) == float(expected["epsilon2_truncated"])


@pytest.mark.parametrize("name", REGULAR)
@pytest.mark.parametrize("confidence", ["0.95", "0.90"])
def test_limits(name, confidence):
    analysis = analysed(CASES[name]["inputs"]["data"])
    limits = CASES[name]["expected"]["effect_ci"][confidence]
    assert analysis.f is not None
    noncentrality = noncentrality_interval(
        to_double(analysis.f), analysis.df_between, analysis.df_within, float(confidence)
    )
    ends = effect_sizes(analysis, float(confidence)).cohen_f_ci
    assert ends is not None
    n = analysis.n_total
    for at in (0, 1):
        assert relative_error(noncentrality[at], limits["lambda_"][at]) < TOLERANCE
        assert relative_error(noncentrality[at] / (noncentrality[at] + n), limits["eta2"][at]) < TOLERANCE
        assert relative_error(ends[at], limits["cohen_f"][at]) < TOLERANCE
        assert ends[at] == pytest.approx(sqrt(noncentrality[at] / n), rel=1e-11)
