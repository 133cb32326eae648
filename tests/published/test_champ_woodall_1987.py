"""C. W. Champ and W. H. Woodall, Exact results for Shewhart control charts with supplementary runs rules.

Technometrics 29 (1987) 393-399, table 1: mean run lengths of charts with the rules of Western Electric, after
a shift of the mean by 0 to 2 standard deviations. From memory; those without a shift also stand in the
NIST/SEMATECH e-Handbook, 6.3.2 (91.75 for all rules; from memory), whose example of a chart of individual
values (6.3.2.2, flow rates) is compared as well.
"""

from fractions import Fraction

import pytest

from assayfolio.statistics.control_charts import chart_limits
from assayfolio.statistics.false_signals import mean_run_length
from assayfolio.statistics.run_rules import RULES

NAMES = {"1": "beyond-limits", "2": "two-of-three", "3": "four-of-five", "4": "eight-one-side"}
TABLE = {
    "1": {0.0: 370.40, 0.2: 308.43, 0.4: 200.08, 0.6: 119.67, 0.8: 71.55, 2.0: 6.30},
    "12": {0.0: 225.44, 1.0: 20.01},
    "13": {0.0: 166.05},
    "14": {0.0: 152.73},
    "123": {0.0: 132.89},
    "124": {0.0: 122.05},
    "134": {0.0: 105.78},
    "1234": {0.0: 91.75, 0.2: 66.80, 0.4: 36.61, 0.8: 13.25, 1.0: 9.22, 2.0: 3.13},
}


@pytest.mark.parametrize(
    ("rules", "shift", "length"),
    [(rules, shift, length) for rules, row in TABLE.items() for shift, length in row.items()],
)
def test_the_mean_run_length_is_the_published_one(rules: str, shift: float, length: float) -> None:
    found = mean_run_length([RULES[NAMES[one]].rule for one in rules], shift)
    assert found == pytest.approx(length, abs=0.0051)


def test_the_chart_of_individual_flow_rates_is_the_published_one() -> None:
    rates = [Fraction(tenths, 10) for tenths in (496, 476, 499, 513, 478, 512, 526, 524, 536, 521)]
    limits = chart_limits(rates)
    assert limits.centre == Fraction("50.81")
    assert round(float(limits.mean_range), 4) == 1.8778
    # The handbook divides by d2 rounded to 1.128.
    assert 50.81 + 3 * float(limits.mean_range) / 1.128 == pytest.approx(55.8041, abs=6e-5)
    assert limits.line(3) == pytest.approx(55.8041, abs=0.002)
    assert limits.line(-3) == pytest.approx(45.8159, abs=0.002)
    assert {limits.zone(rate) for rate in rates} <= set(range(-3, 4))
