"""Tukey-Kramer intervals for three brands with unequal numbers of values.

Source: the test suite of scipy (test_hypotests.py), which quotes an independent implementation to about
seven digits.
"""

from assayfolio.statistics.estimates import pair_estimates
from assayfolio.statistics.simultaneous import compare_tukey_kramer
from support.reference import agrees_as_printed, analysed, examples

BRANDS = examples()["tukey-kramer-scipy"]


def test_the_printed_figures():
    analysis = analysed(BRANDS["data"])
    computed = {}
    for row in compare_tukey_kramer(analysis, pair_estimates(analysis), 0.05):
        pair = "-".join(name[-1] for name in row.label.split(" - "))
        computed |= {f"{pair} diff": row.estimate, f"{pair} p": row.adjusted.p}
        computed |= {f"{pair} lower": row.interval[0], f"{pair} upper": row.interval[1]}
    assert set(computed) == set(BRANDS["expected"])
    for quantity, expected in BRANDS["expected"].items():
        assert agrees_as_printed(computed[quantity], expected), quantity
