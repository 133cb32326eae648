"""Mussel shells at five places, from McDonald, Handbook of Biological Statistics.

Data and full-length figures as the documentation of scipy.stats.f_oneway quotes them.
"""

from assayfolio.exact import to_double
from assayfolio.statistics.inference import omnibus_test
from support.reference import agrees_as_printed, analysed, examples

MUSSELS = examples()["mussels"]


def test_the_printed_figures():
    analysis = analysed(MUSSELS["data"])
    assert analysis.f is not None
    computed = {
        "F": to_double(analysis.f),
        "p": omnibus_test(analysis, 0.05).tail.p,
        "df between": analysis.df_between,
        "df within": analysis.df_within,
    }
    assert set(computed) == set(MUSSELS["expected"])
    for quantity, expected in MUSSELS["expected"].items():
        assert agrees_as_printed(computed[quantity], expected), quantity
