"""Ordinary data against scipy and statsmodels, to 1e-10.

Sources: scipy.stats (f_oneway, tukey_hsd, ttest_ind, levene, shapiro), statsmodels (anova_lm, multipletests,
t_test of a linear model). Data are drawn with a fixed seed and rounded to three decimals, without a large
offset, so that floating point loses nothing that matters. Small tails of scipy's studentised range keep an
absolute, not a relative, accuracy, so adjusted p of pairs are compared absolutely.
"""

import numpy as np
import pandas as pd
import pytest
from scipy import stats
from statsmodels.formula.api import ols
from statsmodels.stats.anova import anova_lm
from statsmodels.stats.multitest import multipletests

from assayfolio.exact import to_double
from assayfolio.statistics.comparisons import GREATER, LESS, TWO_SIDED, compare
from assayfolio.statistics.equal_variances import brown_forsythe_variances
from assayfolio.statistics.estimates import contrast_estimate, pair_estimates, reference_estimates
from assayfolio.statistics.inference import mean_interval, omnibus_test, sd_interval
from assayfolio.statistics.normality import residuals, shapiro_wilk
from assayfolio.statistics.simultaneous import compare_tukey_kramer
from support.reference import analysed, decimals

NAMES_THERE = {"hochberg": "simes-hochberg"}
SIZES = {"two": (7, 4), "balanced": (6, 6, 6, 6), "unequal": (3, 9, 5, 12, 4), "many": (4,) * 12}


def drawn(name: str) -> dict[str, list[str]]:
    generator = np.random.default_rng(20_11)
    return {
        f"L{at}": [f"{value:.3f}" for value in generator.normal(4.0 + 0.3 * at, 0.4 + 0.05 * at, n)]
        for at, n in enumerate(SIZES[name])
    }


@pytest.fixture(params=SIZES)
def data(request: pytest.FixtureRequest) -> dict[str, list[str]]:
    return drawn(request.param)


def as_floats(data: dict[str, list[str]]) -> list[np.ndarray]:
    return [np.array([float(text) for text in texts]) for texts in data.values()]


def near(value: float) -> object:
    return pytest.approx(value, rel=1e-10, abs=1e-12)


def near_both(lower: float, upper: float) -> object:
    return pytest.approx((lower, upper), abs=1e-10 * (upper - lower) / 2)


def test_f_and_p(data):
    analysis = analysed(data)
    other = stats.f_oneway(*as_floats(data))
    assert analysis.f is not None
    assert to_double(analysis.f) == near(other.statistic)
    assert omnibus_test(analysis, 0.05).tail.p == near(other.pvalue)


def test_table_of_variation(data):
    analysis = analysed(data)
    frame = pd.DataFrame([(level, float(text)) for level, texts in data.items() for text in texts])
    table = anova_lm(ols("y ~ C(level)", frame.set_axis(["level", "y"], axis=1)).fit())
    between, within = table.iloc[0], table.iloc[1]
    assert to_double(analysis.ss_between) == near(between["sum_sq"])
    assert to_double(analysis.ss_within) == near(within["sum_sq"])
    assert (analysis.df_between, analysis.df_within) == (between["df"], within["df"])
    assert to_double(analysis.ms_between) == near(between["mean_sq"])
    assert to_double(analysis.ms_within) == near(within["mean_sq"])
    assert omnibus_test(analysis, 0.05).tail.p == near(between["PR(>F)"])


def test_intervals_of_level_means_are_those_of_a_linear_model(data):
    analysis = analysed(data)
    frame = pd.DataFrame([(level, float(text)) for level, texts in data.items() for text in texts])
    model = ols("y ~ C(level) - 1", frame.set_axis(["level", "y"], axis=1)).fit()
    intervals = model.conf_int(alpha=0.1)
    for level in analysis.levels:
        ends = intervals.loc[f"C(level)[{level.level}]"]
        assert mean_interval(analysis, level, 0.1) == near_both(*ends)


def test_intervals_of_standard_deviations(data):
    analysis = analysed(data)
    for level, values in zip(analysis.levels, as_floats(data), strict=True):
        spread = values.var(ddof=1) * (level.n - 1)
        expected = np.sqrt(spread / stats.chi2(level.n - 1).ppf([0.975, 0.025]))
        assert sd_interval(level, 0.05) == (near(expected[0]), near(expected[1]))


def test_tukey_pairs(data):
    analysis = analysed(data)
    other = stats.tukey_hsd(*as_floats(data))
    interval = other.confidence_interval(0.95)
    position = {level: at for at, level in enumerate(data)}
    for row in compare_tukey_kramer(analysis, pair_estimates(analysis), 0.05):
        a, b = (position[level] for level in row.label.split(" - "))
        assert to_double(row.estimate) == near(other.statistic[a, b])
        assert row.adjusted.p == pytest.approx(other.pvalue[a, b], abs=1e-10)
        assert row.interval == near_both(interval.low[a, b], interval.high[a, b])


@pytest.mark.parametrize("alternative", [TWO_SIDED, GREATER, LESS])
def test_two_levels_are_the_pooled_t_test(alternative):
    data = drawn("two")
    analysis = analysed(data)
    row = compare(analysis, pair_estimates(analysis), "none", alternative, 0.05)[0]
    other = stats.ttest_ind(*as_floats(data), alternative=alternative)
    interval = other.confidence_interval(0.95)
    assert to_double(row.statistic) == near(other.statistic)
    assert row.tail.p == near(other.pvalue)
    assert row.df == other.df
    assert row.interval is not None
    for end, expected in zip(row.interval, interval, strict=True):
        assert end == (near(expected) if np.isfinite(expected) else None)


def test_contrast_is_the_t_test_of_a_linear_model():
    data = drawn("unequal")
    weights = (1, -2, 3, 0, -2)
    analysis = analysed(data)
    estimate = contrast_estimate(analysis, "c", dict(zip(data, weights, strict=True)))
    row = compare(analysis, [estimate], "none", TWO_SIDED, 0.05)[0]
    frame = pd.DataFrame([(level, float(text)) for level, texts in data.items() for text in texts])
    model = ols("y ~ C(level) - 1", frame.set_axis(["level", "y"], axis=1)).fit()
    other = model.t_test(np.array(weights, dtype=float))
    assert to_double(row.estimate) == near(float(other.effect[0]))
    assert to_double(row.se) == near(float(np.squeeze(other.sd)))
    assert to_double(row.statistic) == near(float(np.squeeze(other.tvalue)))
    assert row.tail.p == near(float(np.squeeze(other.pvalue)))
    assert row.interval == near_both(*other.conf_int()[0])


@pytest.mark.parametrize("adjust", ["bonferroni", "sidak", "holm", "hochberg"])
@pytest.mark.parametrize("alternative", [TWO_SIDED, GREATER, LESS])
def test_adjusted_p_of_families(data, adjust, alternative):
    analysis = analysed(data)
    for estimates in (pair_estimates(analysis), reference_estimates(analysis, "L1")):
        rows = compare(analysis, estimates, adjust, alternative, 0.05)
        expected = multipletests([row.tail.p for row in rows], method=NAMES_THERE.get(adjust, adjust))[1]
        assert [row.adjusted.p for row in rows] == [near(p) for p in expected]


def test_equal_variances(data):
    check = brown_forsythe_variances(decimals(data))
    other = stats.levene(*as_floats(data), center="median")
    assert to_double(check.f) == near(other.statistic)
    assert check.tail.p == near(other.pvalue)


def test_normality_of_residuals(data):
    check = shapiro_wilk(residuals(decimals(data)))
    centred = np.concatenate([values - values.mean() for values in as_floats(data)])
    other = stats.shapiro(centred)
    assert check.w == near(other.statistic)
    assert check.p == near(other.pvalue)
