"""Two one-sided tests of two groups with margin 0.6, two variables, each pooled and with separate variances.

Source: the test suite of statsmodels (test_tost.py), whose values come from an R package; example
"tost-clinic" of tests/vectors/worked_examples.json.

The equivalence of four means of Jan and Shieh (2019), example "jan-shieh-2019-equivalence", is another test:
one overall test of all means by a noncentral F, not two one-sided tests, and is not offered.
"""

from fractions import Fraction

import pytest

from assayfolio.exact import to_double
from assayfolio.statistics.equivalence import Margins, equivalence_pooled, equivalence_separate
from support.reference import agrees_as_printed, analysed, examples

CLINIC = examples()["tost-clinic"]
MARGINS = Margins(-Fraction(CLINIC["data"]["margin"]), Fraction(CLINIC["data"]["margin"]))
PROCEDURES = {"pooled": equivalence_pooled, "Welch": equivalence_separate}


@pytest.mark.parametrize("variable", ["var1", "var2"])
@pytest.mark.parametrize("procedure", PROCEDURES)
def test_the_printed_figures(variable, procedure):
    groups = [f"{variable} group {number}" for number in (1, 2)]
    analysis = analysed({group: CLINIC["data"][group] for group in groups})
    (row,) = PROCEDURES[procedure](analysis, [tuple(groups)], MARGINS, 0.05, "none")
    computed = {
        "mean difference": row.estimate,
        "SE": to_double(row.se),
        "df": row.df,
        "TOST p": row.tail.p,
        "90 % CI lower": row.interval[0],
        "90 % CI upper": row.interval[1],
    }
    for quantity, value in computed.items():
        assert agrees_as_printed(value, CLINIC["expected"][f"{variable} {procedure} {quantity}"]), quantity


def test_every_printed_figure_is_compared():
    assert len(CLINIC["expected"]) == 2 * 2 * 6
