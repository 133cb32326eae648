"""The two Brown-Forsythe tests, of equal variances and of equal means (F*), on three groups.

Source: the test suite of statsmodels (test_oneway.py), whose values come from R.
"""

from assayfolio.statistics.equal_variances import brown_forsythe_variances
from assayfolio.statistics.welch import brown_forsythe_means
from support.reference import agrees_as_printed, analysed, decimals, examples

GROUPS = examples()["brown-forsythe-means"]


def test_the_printed_figures():
    check = brown_forsythe_variances(decimals(GROUPS["data"]))
    means = brown_forsythe_means(analysed(GROUPS["data"]))
    computed = {"median Levene statistic": check.f, "median Levene p": check.tail.p}
    computed |= {"F*": means.f, "denominator df": means.df2, "p (df1 = k-1)": means.tail.p}
    assert set(computed) == set(GROUPS["expected"])
    for quantity, value in computed.items():
        assert agrees_as_printed(value, GROUPS["expected"][quantity]), quantity
