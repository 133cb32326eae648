"""Precision in the worked example of ASTM E691: glucose in serum, eight laboratories, three results each.

Data and printed values from memory. For material A the between-laboratory component is negative, and the
reproducibility standard deviation is that of repeatability.
"""

from fractions import Fraction

import pytest

from assayfolio.exact import to_double
from assayfolio.statistics.precision import precision
from support.reference import agrees_as_printed, analysed, examples

EXAMPLES = examples()
MATERIALS = ("astm-e691-glucose-A", "astm-e691-glucose-B", "astm-e691-glucose-C", "astm-e691-glucose-D")


@pytest.mark.parametrize("name", MATERIALS)
def test_the_printed_figures(name):
    analysis = analysed(EXAMPLES[name]["data"])
    found = precision(analysis, Fraction(95, 100))
    computed = {
        "mean": analysis.grand_mean,
        "s_r": to_double(found.repeatability.sd),
        "s_R": to_double(found.total.sd),
    }
    expected = EXAMPLES[name]["expected"]
    assert expected.keys() <= computed.keys()
    assert {"s_r", "s_R"} <= expected.keys()
    assert all(agrees_as_printed(computed[quantity], expected[quantity]) for quantity in expected)


def test_a_negative_component_is_kept_beside_the_zero_that_is_stated():
    found = precision(analysed(EXAMPLES["astm-e691-glucose-A"]["data"]), Fraction(95, 100))
    assert found.between.raw_variance == Fraction(-47501, 5040000)
    assert found.between.variance == 0
    assert found.total.variance == found.repeatability.variance
