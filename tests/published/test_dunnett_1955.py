"""Dunnett's procedure on the two data sets of his paper.

Source: C. W. Dunnett 1955, J. Am. Stat. Assoc. 50, 1096 (blood counts, fabric strength), with p-values and
limits as the test suite of scipy (test_multicomp.py) quotes them from independent implementations. Those were
found by random sampling and are right to about three digits, whence the tolerances; the values recomputed
beside them, by deterministic quadrature, are held to ten digits.
"""

import pytest

from assayfolio.exact import to_double
from assayfolio.statistics.comparisons import TWO_SIDED
from assayfolio.statistics.many_to_one_comparisons import compare_dunnett
from support.reference import agrees_as_printed, analysed, examples

EXAMPLES = examples()


def figures(data):
    found = {}
    for row in compare_dunnett(analysed(data), "control", TWO_SIDED, 0.05):
        level = row.label.removesuffix(" - control")
        found |= {f"{level} t": to_double(row.statistic), f"{level} two-sided adjusted p": row.adjusted.p}
        found |= {f"{level} simultaneous lower": row.interval[0]}
        found |= {f"{level} simultaneous upper": row.interval[1]}
    return found


@pytest.mark.parametrize("example", ["dunnett-1955-blood", "dunnett-1955-fabric"])
def test_the_printed_figures(example):
    expected = EXAMPLES[example]["expected"]
    computed = figures(EXAMPLES[example]["data"])
    assert set(computed) == set(expected)
    for quantity, printed in expected.items():
        assert agrees_as_printed(computed[quantity], printed), quantity
        assert computed[quantity] == pytest.approx(float(printed["recomputed"]), rel=1e-10), quantity
