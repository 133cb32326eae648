"""Evaluation of assay precision: D. Chesher, Clin. Biochem. Rev. 29 Suppl. 1 (2008), S23.

Calcium on five days, three replicates a day; data and values as quoted in a public validation script.
"""

from fractions import Fraction
from math import sqrt

from assayfolio.exact import to_double
from assayfolio.statistics.precision import precision
from assayfolio.statistics.tails import chi2_isf
from support.reference import agrees_as_printed, analysed, examples

EXAMPLE = examples()["chesher-2008-calcium"]
CLAIMED_SD = 0.022


def test_the_printed_figures():
    analysis = analysed(EXAMPLE["data"])
    found = precision(analysis, Fraction(95, 100))
    df = found.repeatability.df
    point = float(chi2_isf(0.025, df))
    assert found.total.df is not None
    computed = {
        "mean": analysis.grand_mean,
        "s_r": to_double(found.repeatability.sd),
        "variance of day means": analysis.ms_between / found.n0,
        "within-laboratory s_l": to_double(found.total.sd),
        "df within": df,
        "effective df of s_l": found.total.df,
        "chi-square (97.5 %, 10 df)": point,
        "verification value for claimed s_r 0.022": CLAIMED_SD * sqrt(point / df),
    }
    assert computed.keys() == EXAMPLE["expected"].keys()
    for quantity, expected in EXAMPLE["expected"].items():
        assert agrees_as_printed(computed[quantity], expected), quantity
