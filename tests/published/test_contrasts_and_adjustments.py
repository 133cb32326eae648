"""Contrasts and the adjustment of p-values against values computed independently with exact fractions.

Source: tests/vectors/contrasts.json (its `source` says how it was made). Eight contrasts, seven lists of
p-values. Quantities of later work are listed below by name and are not compared.
"""

from fractions import Fraction
from math import log10

import pytest

from assayfolio.exact import to_double
from assayfolio.statistics.adjustment import P_ADJUSTMENTS, Tail
from assayfolio.statistics.comparisons import TWO_SIDED, ComparisonResult, compare, contrast_estimate
from support.reference import analysed, cases_of, error_in_widths, relative_error

CASES = cases_of("contrasts")
CONTRASTS = tuple(name for name in CASES if name.startswith("contrast_"))
LISTS = tuple(name for name in CASES if name.startswith("adjust_list_"))
LATER_CASES = tuple(name for name in CASES if name.startswith("orthogonal_polynomial_"))
TOLERANCE = 1e-11

CONTRAST_COMPARED = {
    *("estimate", "se", "t", "df", "p", "ci", "p_bonferroni", "p_sidak", "ci_bonferroni", "ci_sidak"),
    "ss",
}
CONTRAST_NOT_COMPARED = {"p_scheffe", "ci_scheffe"}
LIST_COMPARED = {"bonferroni", "sidak", "holm"}
LIST_NOT_COMPARED = {"holm_sidak", "hochberg", "benjamini_hochberg"}


def family(name: str, adjust: str) -> ComparisonResult:
    """The contrast of the case, as one of a family of the stated size."""
    inputs = CASES[name]["inputs"]
    analysis = analysed(inputs["data"])
    weights = dict(zip(inputs["data"], map(Fraction, inputs["coefficients"]), strict=True))
    estimates = [contrast_estimate(analysis, "c", weights)] * inputs["family_size"]
    alpha = to_double(1 - Fraction(inputs["conf_level"]))
    return compare(analysis, estimates, adjust, TWO_SIDED, alpha)[0]


def test_every_quantity_of_the_reference_is_compared_or_listed_as_later_work():
    assert {*CONTRASTS, *LISTS, *LATER_CASES} == set(CASES)
    for name in CONTRASTS:
        assert set(CASES[name]["expected"]) <= {"contrast", "welch_contrast"}
        assert set(CASES[name]["expected"]["contrast"]) == CONTRAST_COMPARED | CONTRAST_NOT_COMPARED
    for name in LISTS:
        assert set(CASES[name]["expected"]) == LIST_COMPARED | LIST_NOT_COMPARED


@pytest.mark.parametrize("name", CONTRASTS)
def test_estimate_error_and_statistic_are_the_nearest_doubles(name):
    expected = CASES[name]["expected"]["contrast"]
    row = family(name, "none")
    assert to_double(row.estimate) == float(expected["estimate"])
    assert to_double(row.se) == float(expected["se"])
    assert to_double(row.statistic) == float(expected["t"])
    assert row.df == expected["df"]
    analysis = analysed(CASES[name]["inputs"]["data"])
    assert to_double(row.statistic.square * analysis.ms_within) == float(expected["ss"])


@pytest.mark.parametrize("name", CONTRASTS)
@pytest.mark.parametrize(
    ("adjust", "p", "interval"),
    [("none", "p", "ci"), ("bonferroni", "p_bonferroni", "ci_bonferroni"), ("sidak", "p_sidak", "ci_sidak")],
)
def test_p_and_interval(name, adjust, p, interval):
    expected = CASES[name]["expected"]["contrast"]
    row = family(name, adjust)
    assert relative_error(row.adjusted.p, expected[p]) < TOLERANCE
    assert row.interval is not None
    assert error_in_widths(row.interval, expected[interval]) < TOLERANCE


@pytest.mark.parametrize("name", LISTS)
@pytest.mark.parametrize("adjust", sorted(LIST_COMPARED))
def test_adjusted_p_in_the_order_of_the_raw_ones(name, adjust):
    raw = [float(text) for text in CASES[name]["inputs"]["raw_p"]]
    tails = [Tail(p, log10(p) if p else float("-inf")) for p in raw]
    adjusted = P_ADJUSTMENTS[adjust](tails)
    for tail, expected in zip(adjusted, CASES[name]["expected"][adjust], strict=True):
        assert relative_error(tail.p, expected) < TOLERANCE
        if tail.p:
            assert tail.log10_p == pytest.approx(log10(float(expected)), abs=1e-14)
        else:
            assert tail.log10_p == float("-inf")
