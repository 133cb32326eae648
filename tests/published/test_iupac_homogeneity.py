"""Homogeneity of a proficiency-test material: IUPAC International Harmonized Protocol, 2006, Appendix 1.

Thompson, Ellison and Wood, Pure Appl. Chem. 78, 145; data and printed values from memory. Twelve units of
soya flour, copper in duplicate. The package does not offer the factors F1 and F2 of the expanded criterion;
they are made of points of chi-square and F, which the protocol's table of them checks.
"""

from fractions import Fraction

import pytest

from assayfolio.exact import to_double
from assayfolio.statistics.cochran import cochran_limit, largest_variance_share
from assayfolio.statistics.precision import precision
from assayfolio.statistics.tails import chi2_isf, f_isf
from support.reference import agrees_as_printed, analysed, examples

SOYA = examples()["iupac-2006-soya"]
FACTORS = examples()["iupac-2006-f1f2"]
ALLOWED_SD = 0.3 * 1.14


def factors(m: int) -> tuple[float, float]:
    return float(chi2_isf(0.05, m - 1)) / (m - 1), (float(f_isf(0.05, m - 1, m)) - 1) / 2


def test_the_soya_flour():
    analysis = analysed(SOYA["data"])
    found = precision(analysis, Fraction(95, 100))
    f1, f2 = factors(analysis.k)
    analytical = found.repeatability.variance
    computed = {
        "sum of squared differences": 2 * analysis.ss_within,
        "Cochran Dmax^2/sum D^2": largest_variance_share(analysis)[1],
        "Cochran critical 5 % m=12": cochran_limit(0.05, 12, 1, 11),
        "V_S variance of sums": 2 * analysis.ms_between,
        "s_an^2": analytical,
        "s_sam^2": found.between.raw_variance,
        "F1 (m=12)": f1,
        "F2 (m=12)": f2,
        "critical value F1*s_all^2 + F2*s_an^2": f1 * ALLOWED_SD**2 + f2 * to_double(analytical),
    }
    expected = SOYA["expected"]
    assert computed.keys() == expected.keys()
    assert all(agrees_as_printed(computed[quantity], expected[quantity]) for quantity in computed)


@pytest.mark.parametrize("m", FACTORS["data"]["m"])
def test_points_of_chi_square_and_f_give_the_printed_factors(m):
    expected = FACTORS["expected"]
    f1, f2 = factors(int(m))
    assert agrees_as_printed(f1, expected[f"F1 m={m}"])
    assert agrees_as_printed(f2, expected[f"F2 m={m}"])
