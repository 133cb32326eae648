"""Trends over numeric levels: orthogonal polynomials, scaled so that they are regression coefficients."""

from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from statsmodels.regression.linear_model import OLS

from assayfolio.exact import to_double
from assayfolio.statistics.comparisons import TWO_SIDED, compare
from assayfolio.statistics.estimates import pair_estimates
from assayfolio.statistics.polynomials import degree_name, polynomial_estimates
from assayfolio.statistics.separate_variances import compare_separate
from support.drawn import analysed_tenths, levels_that_vary
from support.reference import analysed

DOSES = {
    "none": ["1.2", "1.5", "0.9"],
    "low": ["1.9", "2.4", "2.2", "2.1"],
    "middle": ["3.9", "3.5"],
    "high": ["4.1", "4.4", "4.6", "3.9", "4.0"],
}
SCORES = {"none": Fraction(0), "low": Fraction(1, 2), "middle": Fraction(2), "high": Fraction(5)}


def as_columns() -> tuple[np.ndarray, np.ndarray]:
    x = [float(SCORES[level]) for level, texts in DOSES.items() for _ in texts]
    return np.array(x), np.array([float(text) for texts in DOSES.values() for text in texts])


@st.composite
def scored(draw: st.DrawFn):
    """Levels with distinct scores, in the order of the levels or not."""
    data = draw(levels_that_vary())
    fractions = st.fractions(-50, 50, max_denominator=12)
    scores = draw(st.lists(fractions, min_size=len(data), max_size=len(data), unique=True))
    return data, dict(zip(data, scores, strict=True))


@given(scored())
def test_sums_of_squares_of_all_degrees_add_up_to_that_between_levels(drawn):
    data, scores = drawn
    analysis = analysed_tenths(data)
    trends = polynomial_estimates(analysis, scores, analysis.k - 1)
    assert len(trends) == analysis.df_between
    assert sum(one.value**2 / one.variance_factor for one in trends) == analysis.ss_between


@given(scored())
def test_trends_are_contrasts_that_are_orthogonal_to_each_other(drawn):
    data, scores = drawn
    analysis = analysed_tenths(data)
    trends = polynomial_estimates(analysis, scores, analysis.k - 1)
    by_name = [{level.level: weight for level, weight in one.weights} for one in trends]
    for at, (one, weights) in enumerate(zip(trends, by_name, strict=True)):
        assert sum(weights.values()) == 0
        assert one.value == sum(weight * level.mean for level, weight in one.weights)
        assert one.variance_factor == sum(weight**2 / level.n for level, weight in one.weights)
        for other in by_name[:at]:
            shared = weights.keys() & other.keys()
            assert sum(weights[name] * other[name] / len(data[name]) for name in shared) == 0


@given(scored())
def test_the_last_coefficient_goes_through_every_mean(drawn):
    # A polynomial of degree k - 1 has no freedom left: its leading coefficient is a divided difference.
    data, scores = drawn
    analysis = analysed_tenths(data)
    last = polynomial_estimates(analysis, scores, analysis.k - 1)[-1]
    divided = Fraction(0)
    for level in analysis.levels:
        product = Fraction(1)
        for other in analysis.levels:
            if other is not level:
                product *= scores[level.level] - scores[other.level]
        divided += level.mean / product
    assert last.value == divided


@given(scored(), st.fractions(-20, 20, max_denominator=6), st.fractions(1, 9, max_denominator=5))
def test_the_zero_of_the_scores_does_not_matter_and_their_unit_scales(drawn, shift, unit):
    data, scores = drawn
    analysis = analysed_tenths(data)
    moved = {level: score * unit + shift for level, score in scores.items()}
    before = polynomial_estimates(analysis, scores, analysis.k - 1)
    after = polynomial_estimates(analysis, moved, analysis.k - 1)
    for degree, (one, other) in enumerate(zip(before, after, strict=True), start=1):
        assert other.value == one.value / unit**degree
        assert other.value**2 / other.variance_factor == one.value**2 / one.variance_factor


@given(scored(), st.randoms(use_true_random=False))
def test_the_order_of_the_levels_does_not_matter(drawn, random):
    data, scores = drawn
    shuffled = {level: data[level] for level in random.sample(sorted(data), len(data))}
    before = polynomial_estimates(analysed_tenths(data), scores, len(data) - 1)
    after = polynomial_estimates(analysed_tenths(shuffled), scores, len(data) - 1)
    assert [(one.value, one.variance_factor) for one in after] == [
        (one.value, one.variance_factor) for one in before
    ]


@pytest.mark.parametrize("degree", [1, 2, 3])
def test_each_row_is_the_leading_coefficient_of_a_regression(degree):
    analysis = analysed(DOSES)
    x, y = as_columns()
    estimate = polynomial_estimates(analysis, SCORES, degree)[-1]
    model = OLS(y, np.vander(x, degree + 1)).fit()
    assert to_double(estimate.value) == pytest.approx(model.params[0], rel=1e-10)
    # The same unscaled error; the regression's own residual also holds the lack of fit.
    assert to_double(estimate.variance_factor) == pytest.approx(model.normalized_cov_params[0, 0], rel=1e-9)


def test_two_levels_have_the_slope_between_their_means():
    analysis = analysed({"A": ["1", "3"], "B": ["6", "8", "7"]})
    (slope,) = polynomial_estimates(analysis, {"A": Fraction(1), "B": Fraction(11)}, 1)
    assert slope.value == Fraction(7 - 2, 10)
    (row,) = compare(analysis, [slope], "none", TWO_SIDED, 0.05)
    (pair,) = compare(analysis, pair_estimates(analysis), "none", TWO_SIDED, 0.05)
    assert row.statistic.square == pair.statistic.square
    assert row.statistic.sign == -pair.statistic.sign
    assert row.tail == pair.tail


def test_a_trend_goes_with_separate_variances_too():
    analysis = analysed(DOSES)
    (estimate,) = polynomial_estimates(analysis, SCORES, 1)
    (row,) = compare_separate([estimate], "none", TWO_SIDED, 0.05)
    assert row.se.square == sum(
        weight**2 * level.ss / ((level.n - 1) * level.n) for level, weight in estimate.weights
    )


def test_trends_are_named_by_their_degree():
    labels = [one.label for one in polynomial_estimates(analysed(DOSES), SCORES, 3)]
    assert labels == ["linear", "quadratic", "cubic"]
    assert [degree_name(degree) for degree in (4, 12)] == ["degree 4", "degree 12"]


@pytest.mark.parametrize(
    ("scores", "degree", "reason"),
    [
        (SCORES, 4, "a trend over 4 levels has a degree from 1 to 3, not 4"),
        (SCORES, 0, "a degree from 1 to 3, not 0"),
        (SCORES | {"high": Fraction(4, 2)}, 1, "levels 'middle' and 'high' have the same score"),
        ({level: SCORES[level] for level in ("none", "low", "high")}, 1, "level 'middle' has no score"),
        (SCORES | {"extreme": Fraction(9)}, 1, "a score for 'extreme', which is not a level"),
    ],
)
def test_scores_that_do_not_fit_are_refused(scores, degree, reason):
    with pytest.raises(ValueError, match=reason):
        polynomial_estimates(analysed(DOSES), scores, degree)
