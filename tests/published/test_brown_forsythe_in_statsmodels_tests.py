"""The Brown-Forsythe test of equal variances on three groups.

Source: the test suite of statsmodels (test_oneway.py), whose values come from R. The test of means by the
same authors (F*, its degrees of freedom and p) belongs to later work and is not compared.
"""

from assayfolio.statistics.checks import brown_forsythe_variances
from support.reference import agrees_as_printed, decimals, examples

GROUPS = examples()["brown-forsythe-means"]
NOT_COMPARED = {"F*", "denominator df", "p (df1 = k-1)"}


def test_the_printed_figures():
    check = brown_forsythe_variances(decimals(GROUPS["data"]))
    computed = {"median Levene statistic": check.f, "median Levene p": check.tail.p}
    assert set(computed) == set(GROUPS["expected"]) - NOT_COMPARED
    for quantity, value in computed.items():
        assert agrees_as_printed(value, GROUPS["expected"][quantity]), quantity
