"""Two one-sided tests against values computed independently with exact fractions and 36-digit tails.

Source: tests/vectors/equivalence.json (its `source` says how it was made): six cases with the pooled
variance, five with separate variances, among them an offset of 1e12, two values in a level, asymmetric
margins and p from 1e-10 to 0.17.
"""

from fractions import Fraction

import pytest

from assayfolio.exact import to_double
from assayfolio.statistics.equivalence import Margins, equivalence_pooled, equivalence_separate
from support.reference import analysed, cases_of, error_in_widths, relative_error

CASES = cases_of("equivalence")
TOLERANCE = 1e-11


def result(name):
    inputs = CASES[name]["inputs"]
    margins = Margins(*(Fraction(limit) for limit in inputs["margin"]))
    procedure = equivalence_pooled if inputs["variance"].startswith("pooled") else equivalence_separate
    (row,) = procedure(
        analysed(inputs["data"]), [tuple(inputs["groups"])], margins, float(inputs["alpha"]), "none"
    )
    return row


def test_eleven_cases_are_compared():
    assert len(CASES) == 11


@pytest.mark.parametrize("name", CASES)
def test_estimate_error_and_statistics(name):
    row, expected = result(name), CASES[name]["expected"]
    assert row.label == " - ".join(CASES[name]["inputs"]["groups"])
    assert to_double(row.estimate) == float(expected["diff"])
    assert to_double(row.se) == float(expected["se"])
    assert row.df == float(expected["df"])
    assert to_double(row.lower.statistic) == float(expected["t_lower"])
    assert to_double(row.upper.statistic) == float(expected["t_upper"])


@pytest.mark.parametrize("name", CASES)
def test_tails_interval_and_verdict(name):
    row, expected = result(name), CASES[name]["expected"]
    assert relative_error(row.tail_lower.p, expected["p_lower"]) < TOLERANCE
    assert relative_error(row.tail_upper.p, expected["p_upper"]) < TOLERANCE
    assert relative_error(row.tail.p, expected["p"]) < TOLERANCE
    assert row.adjusted == row.tail
    assert error_in_widths(row.interval, expected["ci_1_minus_2alpha"]) < TOLERANCE
    assert (row.tail.p <= float(CASES[name]["inputs"]["alpha"])) is expected["equivalent"]
