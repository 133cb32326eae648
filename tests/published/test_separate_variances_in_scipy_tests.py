"""Welch's test and Games-Howell pairs of the test suite of scipy.

Source: test_stats.py, whose values come from R's oneway.test, and test_hypotests.py, which quotes an
independent implementation of Games and Howell's procedure to about seven digits.
"""

from assayfolio.statistics.estimates import pair_estimates
from assayfolio.statistics.separate_variances import compare_games_howell
from assayfolio.statistics.welch import welch_test
from support.reference import agrees_as_printed, analysed, examples

EXAMPLES = examples()


def hold(computed, example):
    expected = EXAMPLES[example]["expected"]
    assert set(computed) == set(expected)
    for quantity, printed in expected.items():
        assert agrees_as_printed(computed[quantity], printed), quantity


def test_welch():
    found = welch_test(analysed(EXAMPLES["welch-scipy"]["data"]), 0.05)
    hold({"Welch F": found.f, "p": found.tail.p}, "welch-scipy")


def test_games_howell():
    analysis = analysed(EXAMPLES["games-howell-scipy"]["data"])
    computed = {}
    for row in compare_games_howell(analysis, pair_estimates(analysis), 0.05):
        pair = row.label.replace(" - ", "-")
        computed |= {f"{pair} diff": row.estimate, f"{pair} p": row.adjusted.p}
        computed |= {f"{pair} lower": row.interval[0], f"{pair} upper": row.interval[1]}
    hold(computed, "games-howell-scipy")
