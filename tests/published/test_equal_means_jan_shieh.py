"""The F test and Welch's test on four groups of measurements with unequal numbers.

Source: Jan and Shieh 2019, as the test suite of statsmodels (test_oneway.py) quotes it. The paper's test,
that all means together lie within a margin, is not offered: equivalence is shown pair by pair.
"""

from assayfolio.statistics.welch import welch_test
from support.reference import agrees_as_printed, analysed, examples

FOUR = examples()["jan-shieh-2019-equivalence"]
NOT_OFFERED = {"equivalence p, equal variances", "equivalence p, Welch"}


def test_the_printed_figures():
    analysis = analysed(FOUR["data"])
    welch = welch_test(analysis, 0.05)
    computed = {
        "F (classical)": analysis.f,
        "Welch F (usual, with the correction factor)": welch.f,
        "Welch denominator df": welch.df2,
    }
    assert set(computed) == set(FOUR["expected"]) - NOT_OFFERED
    for quantity, value in computed.items():
        assert agrees_as_printed(value, FOUR["expected"][quantity]), quantity
