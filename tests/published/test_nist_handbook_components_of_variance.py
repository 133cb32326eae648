"""Components of variance in the NIST/SEMATECH e-Handbook of Statistical Methods, section 7.4.5.

Five random batches, three determinations each; data and printed values from memory.
"""

from fractions import Fraction

import pytest

from assayfolio.statistics.precision import precision
from support.reference import agrees_as_printed, analysed, examples

EXAMPLE = examples()["nist-hb-745"]


@pytest.mark.parametrize("quantity", EXAMPLE["expected"])
def test_the_printed_figures(quantity):
    analysis = analysed(EXAMPLE["data"])
    found = precision(analysis, Fraction(95, 100))
    computed = {
        "F": analysis.f,
        "between-batch variance": found.between.raw_variance,
        "within-batch variance": found.repeatability.variance,
        "df between": analysis.df_between,
        "df within": found.repeatability.df,
    }
    assert agrees_as_printed(computed[quantity], EXAMPLE["expected"][quantity])
