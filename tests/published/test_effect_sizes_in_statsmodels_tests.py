"""Effect sizes from F(3, 35) = 45.8, as the tests of statsmodels quote them from an R package.

That package takes lambda = df2 f^2 for the limits of eta squared, which are then lambda/(lambda + df2). Its
own search for them stops early; the vectors hold a longer computation too.
"""

from fractions import Fraction

import pytest

from assayfolio.exact import ExactSums, to_double
from assayfolio.statistics.effects import effect_sizes, noncentrality_interval
from assayfolio.statistics.oneway import LevelSummary, OneWay
from support.reference import agrees_as_printed, examples

EXAMPLE = examples()["effectsize-f"]


def analysis_with(f: Fraction, df1: int, df2: int) -> OneWay:
    """An analysis of df1 + 1 levels with that F; the means play no part in effect sizes."""
    empty = ExactSums(1, 0, 0, 0)
    levels = tuple(LevelSummary(f"L{at}", empty, Fraction(0), Fraction(0)) for at in range(df1 + 1))
    return OneWay(levels, Fraction(0), f * df1 / df2, Fraction(1), df1 + 1 + df2)


def test_the_printed_sizes_and_limits():
    df1, df2 = (int(df) for df in EXAMPLE["data"]["df"])
    analysis = analysis_with(Fraction(EXAMPLE["data"]["F"]), df1, df2)
    assert analysis.f == Fraction("45.8")
    sizes = effect_sizes(analysis, 0.90)
    assert sizes.cohen_f is not None
    lower, upper = noncentrality_interval(45.8, df1, df2, 0.90)
    computed = {
        "eta squared": to_double(sizes.eta_squared),
        "epsilon squared": to_double(sizes.epsilon_squared),
        "omega squared": to_double(sizes.omega_squared),
        "Cohen f": to_double(sizes.cohen_f),
        "eta squared lower 90 %": lower / (lower + df2),
        "eta squared upper 90 %": upper / (upper + df2),
    }
    assert set(computed) == set(EXAMPLE["expected"])
    for quantity, expected in EXAMPLE["expected"].items():
        assert agrees_as_printed(computed[quantity], expected), quantity
        assert computed[quantity] == pytest.approx(float(expected["recomputed"]), rel=1e-12)
