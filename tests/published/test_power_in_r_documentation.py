"""Power of a one-way design as the documentation of R's power.anova.test prints it.

The variance between means has the divisor k - 1. The number of values is printed as a real number; here it is
the whole number above.
"""

from math import ceil, sqrt

from assayfolio.statistics.power import f_power, f_power_of_means
from assayfolio.statistics.sample_size import smallest_n
from support.reference import agrees_as_printed, examples

DESIGN = examples()["power-anova"]
GROUPS, N = int(DESIGN["data"]["groups"]), int(DESIGN["data"]["n"])
BETWEEN, WITHIN = float(DESIGN["data"]["between.var"]), float(DESIGN["data"]["within.var"])
ALPHA = float(DESIGN["data"]["alpha"])


def test_the_printed_power():
    # Four means with variance 1: two pairs, sqrt(3) apart.
    means = [0.0, 0.0, sqrt(3 * BETWEEN), sqrt(3 * BETWEEN)]
    power = f_power_of_means(means, (N,) * GROUPS, sqrt(WITHIN), ALPHA)
    assert agrees_as_printed(power, DESIGN["expected"]["power n=5"])


def test_two_extremes_with_the_same_variance_have_the_same_power():
    difference = sqrt(2 * (GROUPS - 1) * BETWEEN)
    power = f_power((N,) * GROUPS, difference, sqrt(WITHIN), ALPHA)
    assert agrees_as_printed(power, DESIGN["expected"]["power n=5"])
    n = smallest_n(lambda n: f_power((n,) * GROUPS, difference, sqrt(WITHIN), ALPHA), 0.80)
    assert n == ceil(float(DESIGN["expected"]["n for power 0.80"]["printed"]))


def test_nothing_printed_is_left_out():
    assert set(DESIGN["expected"]) == {"power n=5", "n for power 0.80"}
