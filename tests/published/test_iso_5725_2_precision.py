"""Repeatability and reproducibility in the examples of ISO 5725-2:1994, Annex B.

Data and printed values from memory. B.1, sulfur in coal: eight laboratories with three to five results;
B.3, creosote oil: nine laboratories in duplicate. In B.3 laboratory 1, at level 5 laboratory 6 too, was
excluded before the precision was estimated. The figures of outlier tests in the same examples are named
here and belong to the tests of those.
"""

from fractions import Fraction

import pytest

from assayfolio.exact import to_double
from assayfolio.statistics.precision import precision
from support.reference import agrees_as_printed, analysed, examples

EXAMPLES = examples()
EXCLUDED = {
    "iso5725-2-creosote-1": {"lab 1"},
    "iso5725-2-creosote-2": {"lab 1"},
    "iso5725-2-creosote-3": {"lab 1"},
    "iso5725-2-creosote-4": {"lab 1"},
    "iso5725-2-creosote-5": {"lab 1", "lab 6"},
    "iso5725-2-coal-1": set(),
    "iso5725-2-coal-3": set(),
    "iso5725-2-coal-4": set(),
}
OUTLIER_TESTS = ("Grubbs", "Cochran")


def figures(name: str) -> dict[str, float | Fraction]:
    data = {lab: texts for lab, texts in EXAMPLES[name]["data"].items() if lab not in EXCLUDED[name]}
    analysis = analysed(data)
    found = precision(analysis, Fraction(95, 100))
    mean = "m after exclusions" if EXCLUDED[name] else "m"
    return {
        mean: analysis.grand_mean,
        "s_r": to_double(found.repeatability.sd),
        "s_R": to_double(found.total.sd),
    }


@pytest.mark.parametrize("name", EXCLUDED)
def test_the_printed_mean_repeatability_and_reproducibility(name):
    expected = EXAMPLES[name]["expected"]
    computed = figures(name)
    others = {quantity for quantity in expected if quantity.startswith(OUTLIER_TESTS)}
    assert computed.keys() == expected.keys() - others
    assert all(agrees_as_printed(computed[quantity], expected[quantity]) for quantity in computed)


@pytest.mark.parametrize("name", ["iso5725-2-coal-1", "iso5725-2-coal-3", "iso5725-2-coal-4"])
def test_unequal_cells_enter_by_the_weighted_n_of_the_standard(name):
    found = precision(analysed(EXAMPLES[name]["data"]), Fraction(95, 100))
    assert found.n0 == (27 - Fraction(16 + 25 + 6 * 9, 27)) / 7
