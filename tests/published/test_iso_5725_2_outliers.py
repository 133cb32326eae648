"""Outlier tests of ISO 5725-2:1994: critical values of tables 4 and 5, examples B.1 and B.3 (coal, creosote).

Everything from memory. Examples "iso5725-2-critical", "iso5725-2-creosote-1" to "-5", "iso5725-2-coal-1",
"-3" and "-4" of tests/vectors/worked_examples.json; their precision figures are compared elsewhere. The
standard forms Grubbs' statistics of B.1 from cell means rounded to three decimals, and so does this test.
Mandel's h and k and the limits of ASTM E691 are not offered and not compared.
"""

import re
from fractions import Fraction

import pytest

from assayfolio.exact import Decimal10, Root, rounded_units
from assayfolio.statistics.cochran import cochran_limit
from assayfolio.statistics.grubbs import grubbs_limit, lowest_and_highest, lowest_and_highest_pair
from assayfolio.statistics.grubbs_pairs import pair_limit
from assayfolio.statistics.outliers import (
    NEITHER,
    OUTLIER,
    STRAGGLER,
    cochran_outlier,
    grubbs_double,
    grubbs_single,
)
from support.reference import agrees_as_printed, analysed, examples

EXAMPLES = examples()
LIMITS = EXAMPLES["iso5725-2-critical"]["expected"]
COVERED = {quantity for quantity in LIMITS if quantity.startswith(("Cochran", "Grubbs"))}
CREOSOTE = [f"iso5725-2-creosote-{level}" for level in (1, 2, 3, 4, 5)]
COAL = [f"iso5725-2-coal-{level}" for level in (1, 3, 4)]

# Table 5, two largest or two smallest: p, then the 1 % and the 5 % limit.
PAIR_LIMITS = [
    *((5, 0.0018, 0.0090), (6, 0.0116, 0.0349), (7, 0.0308, 0.0708), (8, 0.0563, 0.1101)),
    *((9, 0.0851, 0.1492), (10, 0.1150, 0.1864), (12, 0.1738, 0.2537), (15, 0.2530, 0.3367)),
    *((20, 0.3585, 0.4391), (25, 0.4376, 0.5123), (30, 0.4985, 0.5672), (40, 0.5862, 0.6445)),
]


def test_what_is_not_compared_is_mandel_and_e691():
    assert len(COVERED) == 12
    assert all(quantity.startswith(("Mandel", "E691")) for quantity in LIMITS.keys() - COVERED)


def limit_of(quantity: str) -> float:
    test, percent, p, n = re.fullmatch(r"(\w+).* (\d) % p=(\d+)(?: n=(\d+))?", quantity).groups()
    alpha, k = int(percent) / 100, int(p)
    if test == "Grubbs":
        return grubbs_limit(alpha, k, ends=2)
    return cochran_limit(alpha, k, int(n) - 1, (k - 1) * (int(n) - 1))


@pytest.mark.parametrize("quantity", sorted(COVERED))
def test_printed_critical_value(quantity):
    assert agrees_as_printed(limit_of(quantity), LIMITS[quantity])


@pytest.mark.parametrize(("n", "one_percent", "five_percent"), PAIR_LIMITS)
def test_printed_critical_values_for_two_values(n, one_percent, five_percent):
    # The standard prints the points of one end at half the level, from tables; 4 units of the fourth decimal
    # are the most by which any of these differs from the quadrature.
    assert pair_limit(0.005, n) == pytest.approx(one_percent, abs=4e-4)
    assert pair_limit(0.025, n) == pytest.approx(five_percent, abs=4e-4)


def cell_means(example: str) -> list[Decimal10]:
    means = (level.mean for level in analysed(EXAMPLES[example]["data"]).levels)
    return [Decimal10(rounded_units(mean, 3), -3) for mean in means]


@pytest.mark.parametrize("example", [*CREOSOTE, *COAL])
def test_printed_statistics_of_cell_means(example):
    means, expected = cell_means(example), EXAMPLES[example]["expected"]
    singles, pairs = lowest_and_highest(means), lowest_and_highest_pair(means)
    computed = {}
    for end, single, pair in zip(("low", "high"), singles, pairs, strict=True):
        computed |= {f"Grubbs single {end}": square_root_of(single.g), f"Grubbs double {end}": pair.ratio}
    printed = {quantity: value for quantity, value in expected.items() if quantity.startswith("Grubbs")}
    assert len(printed) >= 2
    for quantity, value in printed.items():
        assert agrees_as_printed(computed[quantity.split(" from ")[0]], value), quantity


def square_root_of(g: Root) -> Fraction:
    return Fraction(rounded_units(g, 20), 10**20)


@pytest.mark.parametrize("example", CREOSOTE)
def test_printed_figures_of_cochran(example):
    found = cochran_outlier(analysed(EXAMPLES[example]["data"]))
    for quantity, value in EXAMPLES[example]["expected"].items():
        if quantity.startswith("Cochran C"):
            assert found.level == re.search(r"\((.*)\)", quantity)[1]
            assert agrees_as_printed(found.statistic, value)
        elif quantity.startswith("Cochran critical"):
            limit = found.straggler_limit if "5 %" in quantity else found.outlier_limit
            assert agrees_as_printed(limit, value)


def test_the_verdicts_of_the_standard_on_creosote():
    # Laboratory 1 is an outlier at levels 3 and 4; laboratory 7 a straggler by Cochran at level 4; the C of
    # laboratory 6 at level 5 stays just below its 5 % limit.
    verdicts = {example: grubbs_single("cell means", cell_means(example)) for example in CREOSOTE}
    assert {example for example, found in verdicts.items() if found.verdict != NEITHER} == {
        "iso5725-2-creosote-3",
        "iso5725-2-creosote-4",
    }
    for example in ("iso5725-2-creosote-3", "iso5725-2-creosote-4"):
        assert (verdicts[example].verdict, verdicts[example].indexes) == (OUTLIER, (0,))
    level_4, level_5 = (cochran_outlier(analysed(EXAMPLES[name]["data"])) for name in CREOSOTE[3:])
    assert (level_4.level, level_4.verdict) == ("lab 7", STRAGGLER)
    assert (level_5.level, level_5.verdict) == ("lab 6", NEITHER)
    assert grubbs_double("cell means", cell_means("iso5725-2-creosote-1")).verdict == NEITHER
