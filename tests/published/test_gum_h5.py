"""Analysis of variance in the evaluation of uncertainty: JCGM 100:2008 (GUM), Annex H.5, Table H.9.

A voltage standard on ten days, five readings a day; the guide prints each day's mean and standard deviation.
Readings with exactly these are m + s, m - s, m + s, m - s, m. The table, 57, 85 and F were seen in public
text; the other figures are from memory.
"""

from fractions import Fraction
from math import sqrt

import pytest

from assayfolio.exact import Decimal10, ExactSums, to_double
from assayfolio.statistics.oneway import OneWay, one_way
from assayfolio.statistics.precision import Precision, precision
from assayfolio.statistics.tails import f_isf
from support.reference import agrees_as_printed, examples

EXAMPLE = examples()["gum-h5"]
READINGS_A_DAY = 5


def readings() -> OneWay:
    """The readings in microvolts."""
    means, deviations = EXAMPLE["data"]["day mean / V"], EXAMPLE["data"]["day standard deviation / uV"]
    days = []
    for day, (mean, sd) in enumerate(zip(means, deviations, strict=True)):
        m, s = int(Fraction(mean) * 10**6), int(sd)
        days.append(
            (f"day {day + 1}", ExactSums.of(Decimal10(m + s * sign, 0) for sign in (1, -1, 1, -1, 0)))
        )
    return one_way(days)


def figures(analysis: OneWay, found: Precision) -> dict[str, float | Fraction]:
    by_days, pooled = found.mean_ways
    spread_of_days = to_double(by_days.u) * sqrt(found.k)
    df = (analysis.df_between, analysis.df_within)
    assert analysis.f is not None
    return {
        "grand mean / V": by_days.mean / 10**6,
        "s(day means) / uV": spread_of_days,
        "sqrt(K) s(day means) = s_a / uV": sqrt(READINGS_A_DAY) * spread_of_days,
        "pooled s_b / uV": to_double(found.repeatability.sd),
        "F as printed": READINGS_A_DAY * Fraction(round(spread_of_days)) ** 2 / 85**2,
        "F unrounded route": analysis.f,
        "critical F(0.95;9,40)": float(f_isf(0.05, *df)),
        "critical F(0.975;9,40)": float(f_isf(0.025, *df)),
        "s_B between days / uV": to_double(found.between.sd),
        "u(mean), day-effect model / uV": to_double(by_days.u),
        "u(mean), no day effect, pooled 49 df / uV": to_double(pooled.u),
    }


@pytest.mark.parametrize("quantity", EXAMPLE["expected"])
def test_the_printed_figures(quantity):
    analysis = readings()
    computed = figures(analysis, precision(analysis, Fraction(95, 100)))
    assert agrees_as_printed(computed[quantity], EXAMPLE["expected"][quantity])


def test_the_readings_have_the_printed_means_and_standard_deviations():
    stated = zip(EXAMPLE["data"]["day mean / V"], EXAMPLE["data"]["day standard deviation / uV"], strict=True)
    found = [(level.mean / 10**6, level.sd.square) for level in readings().levels]
    assert found == [(Fraction(mean), Fraction(sd) ** 2) for mean, sd in stated]


def test_both_ways_have_the_degrees_of_freedom_of_the_guide():
    by_days, pooled = precision(readings(), Fraction(95, 100)).mean_ways
    assert (by_days.df, pooled.df) == (9, 49)
