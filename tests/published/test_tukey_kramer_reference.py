"""All pairs by the Tukey-Kramer procedure against values of 113-bit arithmetic.

Source: tests/vectors/tukey_kramer.json (its `source` says how it was made). Seven data sets: equal and
unequal sizes, a level with one value, thirty levels, an offset of 1e12, adjusted p from 2e-12 to 1.
"""

from math import log10, sqrt

import pytest

from assayfolio.exact import to_double
from assayfolio.statistics.distributions import studentized_range_isf
from assayfolio.statistics.estimates import pair_estimates
from assayfolio.statistics.simultaneous import compare_tukey_kramer
from support.reference import analysed, cases_of, error_in_widths, relative_error, square_root

CASES = cases_of("tukey_kramer")
TOLERANCE = 1e-11


@pytest.mark.parametrize("name", CASES)
def test_every_listed_pair(name):
    expected = CASES[name]["expected"]
    alpha = 1 - float(CASES[name]["inputs"]["conf_level"])
    analysis = analysed(CASES[name]["inputs"]["data"])
    rows = compare_tukey_kramer(analysis, pair_estimates(analysis), alpha)
    by_label = {row.label.replace(" - ", "-"): row for row in rows}
    assert set(expected["pairs"]) <= set(by_label)
    for label, pair in expected["pairs"].items():
        row = by_label[label]
        assert to_double(row.estimate) == float(pair["diff"])
        assert square_root(2 * row.statistic.square) == float(pair["q"])
        assert relative_error(row.adjusted.p, pair["p_adj"]) < TOLERANCE
        assert row.adjusted.log10_p == pytest.approx(log10(float(pair["p_adj"])), abs=1e-10)
        assert row.interval is not None
        assert error_in_widths(row.interval, pair["ci"]) < TOLERANCE
        assert row.df == expected["df"]


@pytest.mark.parametrize("name", CASES)
def test_error_term_and_critical_value(name):
    expected = CASES[name]["expected"]
    alpha = 1 - float(CASES[name]["inputs"]["conf_level"])
    analysis = analysed(CASES[name]["inputs"]["data"])
    assert to_double(analysis.ms_within) == float(expected["ms_within"])
    point = float(studentized_range_isf(alpha, analysis.k, analysis.df_within))
    assert relative_error(point, expected["q_crit"]) < TOLERANCE


def test_the_adjusted_p_is_for_all_levels_even_where_few_pairs_are_asked_for():
    analysis = analysed(CASES["uneq_k4"]["inputs"]["data"])
    pairs = pair_estimates(analysis)
    whole = compare_tukey_kramer(analysis, pairs, 0.05)
    alone = compare_tukey_kramer(analysis, pairs[:1], 0.05)
    assert alone[0] == whole[0]
    half_width = to_double(alone[0].estimate) - alone[0].interval[0]
    unadjusted = half_width / to_double(alone[0].se) * sqrt(2)
    assert unadjusted == pytest.approx(float(CASES["uneq_k4"]["expected"]["q_crit"]), rel=1e-10)
