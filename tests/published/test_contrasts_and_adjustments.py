"""Contrasts, trends and adjusted p-values against values computed independently with exact fractions.

Source: tests/vectors/contrasts.json (its `source` says how it was made). Eight contrasts with pooled and with
separate variances, five families of orthogonal polynomials, seven lists of p-values. Two adjustments of the
lists are not offered and are listed below: Benjamini and Hochberg's bounds no family-wise error rate, and the
Sidak form of Holm's procedure does so only under conditions that Holm's does not need.
"""

from fractions import Fraction
from math import log10

import pytest

from assayfolio.exact import to_double
from assayfolio.statistics.adjustment import P_ADJUSTMENTS, Tail
from assayfolio.statistics.comparisons import TWO_SIDED, ComparisonResult, compare
from assayfolio.statistics.estimates import contrast_estimate
from assayfolio.statistics.polynomials import polynomial_estimates
from assayfolio.statistics.separate_variances import compare_separate
from assayfolio.statistics.simultaneous import compare_scheffe
from support.reference import analysed, cases_of, error_in_widths, relative_error

CASES = cases_of("contrasts")
CONTRASTS = tuple(name for name in CASES if name.startswith("contrast_"))
LISTS = tuple(name for name in CASES if name.startswith("adjust_list_"))
TRENDS = tuple(name for name in CASES if name.startswith("orthogonal_polynomial_"))
SEPARATE = tuple(name for name in CONTRASTS if "welch_contrast" in CASES[name]["expected"])
DEGREES = tuple(
    (name, degree) for name in TRENDS for degree in range(1, CASES[name]["inputs"]["max_degree"] + 1)
)
TOLERANCE = 1e-11

CONTRAST_COMPARED = {
    *("estimate", "se", "t", "df", "p", "ci", "p_bonferroni", "p_sidak", "ci_bonferroni", "ci_sidak"),
    *("ss", "p_scheffe", "ci_scheffe"),
}
SEPARATE_COMPARED = {"se", "t", "df", "p"}
TREND_COMPARED = {"estimate", "se", "t", "df", "p", "ci", "ss", "p_scheffe", "ci_scheffe", "coefficients"}
LIST_COMPARED = {"bonferroni", "sidak", "holm", "hochberg"}
LIST_NOT_OFFERED = {"holm_sidak", "benjamini_hochberg"}


def estimates_and_alpha(name: str):
    """The contrast of the case, as many times as its family is large, and the level."""
    inputs = CASES[name]["inputs"]
    analysis = analysed(inputs["data"])
    weights = dict(zip(inputs["data"], map(Fraction, inputs["coefficients"]), strict=True))
    estimates = [contrast_estimate(analysis, "c", weights)] * inputs["family_size"]
    return analysis, estimates, to_double(1 - Fraction(inputs["conf_level"]))


def family(name: str, adjust: str) -> ComparisonResult:
    """The contrast of the case, as one of a family of the stated size."""
    analysis, estimates, alpha = estimates_and_alpha(name)
    if adjust == "scheffe":
        return compare_scheffe(analysis, estimates, alpha)[0]
    return compare(analysis, estimates, adjust, TWO_SIDED, alpha)[0]


def test_every_quantity_of_the_reference_is_compared_or_not_offered():
    assert {*CONTRASTS, *LISTS, *TRENDS} == set(CASES)
    for name in CONTRASTS:
        assert set(CASES[name]["expected"]) <= {"contrast", "welch_contrast"}
        assert set(CASES[name]["expected"]["contrast"]) == CONTRAST_COMPARED
    for name in SEPARATE:
        assert set(CASES[name]["expected"]["welch_contrast"]) == SEPARATE_COMPARED
    for name, degree in DEGREES:
        assert set(CASES[name]["expected"]) == {"unweighted", "weighted"}
        for kind in ("unweighted", "weighted"):
            assert set(CASES[name]["expected"][kind][f"degree_{degree}"]) == TREND_COMPARED
            assert len(CASES[name]["expected"][kind]) == CASES[name]["inputs"]["max_degree"]
    for name in LISTS:
        assert set(CASES[name]["expected"]) == LIST_COMPARED | LIST_NOT_OFFERED
    assert not LIST_NOT_OFFERED & set(P_ADJUSTMENTS)


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
    [
        ("none", "p", "ci"),
        ("bonferroni", "p_bonferroni", "ci_bonferroni"),
        ("sidak", "p_sidak", "ci_sidak"),
        ("scheffe", "p_scheffe", "ci_scheffe"),
    ],
)
def test_p_and_interval(name, adjust, p, interval):
    expected = CASES[name]["expected"]["contrast"]
    row = family(name, adjust)
    assert relative_error(row.adjusted.p, expected[p]) < TOLERANCE
    assert row.interval is not None
    assert error_in_widths(row.interval, expected[interval]) < TOLERANCE


@pytest.mark.parametrize("name", SEPARATE)
def test_separate_variances(name):
    expected = CASES[name]["expected"]["welch_contrast"]
    _, estimates, alpha = estimates_and_alpha(name)
    row = compare_separate(estimates, "none", TWO_SIDED, alpha)[0]
    assert to_double(row.se) == float(expected["se"])
    assert to_double(row.statistic) == float(expected["t"])
    assert row.df == float(expected["df"])
    assert relative_error(row.tail.p, expected["p"]) < TOLERANCE


def trend(name: str, kind: str, degree: int):
    """The contrast of the reference, which has whole weights, and what is expected of it."""
    inputs = CASES[name]["inputs"]
    expected = CASES[name]["expected"][kind][f"degree_{degree}"]
    weights = dict(zip(inputs["data"], map(Fraction, expected["coefficients"]), strict=True))
    analysis = analysed(inputs["data"])
    return analysis, contrast_estimate(analysis, "trend", weights), expected


@pytest.mark.parametrize("kind", ["unweighted", "weighted"])
@pytest.mark.parametrize(("name", "degree"), DEGREES)
def test_a_trend_with_whole_weights(name, kind, degree):
    analysis, estimate, expected = trend(name, kind, degree)
    (row,) = compare(analysis, [estimate], "none", TWO_SIDED, 0.05)
    (among_all,) = compare_scheffe(analysis, [estimate], 0.05)
    assert to_double(row.estimate) == float(expected["estimate"])
    assert to_double(row.se) == float(expected["se"])
    assert to_double(row.statistic) == float(expected["t"])
    assert row.df == expected["df"]
    assert to_double(row.estimate**2 / estimate.variance_factor) == float(expected["ss"])
    assert relative_error(row.tail.p, expected["p"]) < TOLERANCE
    assert error_in_widths(row.interval, expected["ci"]) < TOLERANCE
    assert relative_error(among_all.adjusted.p, expected["p_scheffe"]) < TOLERANCE
    assert error_in_widths(among_all.interval, expected["ci_scheffe"]) < TOLERANCE


@pytest.mark.parametrize(("name", "degree"), DEGREES)
def test_the_trend_found_is_a_multiple_of_that_with_whole_weights(name, degree):
    inputs = CASES[name]["inputs"]
    analysis, whole, expected = trend(name, "weighted", degree)
    scores = dict(zip(inputs["data"], map(Fraction, inputs["doses"]), strict=True))
    found = polynomial_estimates(analysis, scores, inputs["max_degree"])[degree - 1]
    assert [level for level, _ in found.weights] == [level for level, _ in whole.weights]
    (unit,) = {one / other for (_, one), (_, other) in zip(found.weights, whole.weights, strict=True)}
    assert unit > 0
    assert found.value == unit * whole.value
    assert found.variance_factor == unit**2 * whole.variance_factor
    assert to_double(found.value**2 / found.variance_factor) == float(expected["ss"])


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
