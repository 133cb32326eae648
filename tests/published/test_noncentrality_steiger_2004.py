"""The interval for the noncentrality of F from Steiger's paper, as the tests of statsmodels quote it.

J. H. Steiger, Beyond the F test, Psychol. Methods 9, 2004, example 3: F(3, 76) = 5 with 20 values a group.
The root mean square standardised effect is sqrt(lambda / ((k - 1) n)).
"""

from math import sqrt

import pytest

from assayfolio.statistics.effects import noncentrality_interval
from support.reference import agrees_as_printed, examples

EXAMPLE = examples()["steiger-2004-nc"]


def test_the_printed_limits():
    f = float(EXAMPLE["data"]["F"])
    df1, df2 = (int(df) for df in EXAMPLE["data"]["df"])
    n = int(EXAMPLE["data"]["n per group"])
    lower, upper = noncentrality_interval(f, df1, df2, 0.95)
    computed = {
        "lambda lower 95 %": lower,
        "lambda upper 95 %": upper,
        "RMSSE lower": sqrt(lower / (df1 * n)),
        "RMSSE upper": sqrt(upper / (df1 * n)),
    }
    assert set(computed) == set(EXAMPLE["expected"])
    for quantity, expected in EXAMPLE["expected"].items():
        assert agrees_as_printed(computed[quantity], expected), quantity
        assert computed[quantity] == pytest.approx(float(expected["recomputed"]), rel=1e-12)
