"""Random-effects examples in the documentation of R packages, fitted there by restricted likelihood (REML).

Dyestuff (Davies and Goldsmith) and Dyestuff2 (Box and Tiao 1973) from lme4, Rail from nlme. For equal n REML
and the analysis of variance agree while the between-level component is positive. Where it is negative
(Dyestuff2) REML pools both mean squares into one: that is the pooled way to state the mean, not the
repeatability, which stays the mean square within.
"""

from fractions import Fraction

from assayfolio.exact import Root, to_double
from assayfolio.statistics.precision import BETWEEN_LEVELS, POOLED, precision
from support.reference import agrees_as_printed, analysed, examples

EXAMPLES = examples()


def found_in(name):
    return precision(analysed(EXAMPLES[name]["data"]), Fraction(95, 100))


def assert_as_printed(computed, name):
    expected = EXAMPLES[name]["expected"]
    assert computed.keys() == expected.keys()
    assert [
        quantity for quantity in expected if not agrees_as_printed(computed[quantity], expected[quantity])
    ] == []


def test_dyestuff():
    found = found_in("dyestuff")
    assert found.mean.way == BETWEEN_LEVELS
    computed = {
        "grand mean": found.mean.mean,
        "SE of mean": to_double(found.mean.u),
        "batch variance": found.between.variance,
        "batch SD": to_double(found.between.sd),
        "residual variance": found.repeatability.variance,
        "residual SD": to_double(found.repeatability.sd),
    }
    assert_as_printed(computed, "dyestuff")


def test_rail():
    found = found_in("rail")
    computed = {
        "mean": found.mean.mean,
        "SE": to_double(found.mean.u),
        "between SD": to_double(found.between.sd),
        "residual SD": to_double(found.repeatability.sd),
    }
    assert_as_printed(computed, "rail")


def test_dyestuff2_whose_component_is_negative():
    found = found_in("dyestuff2")
    assert found.between.raw_variance == Fraction(-20654887, 15625000)
    assert found.repeatability.variance == Fraction(9341181, 625000)
    assert found.mean.way == POOLED
    pooled_variance = found.mean.u.square * found.n_total
    computed = {
        "grand mean": found.mean.mean,
        "REML residual variance when batch variance is 0": pooled_variance,
        "REML residual SD": to_double(Root.of(pooled_variance)),
        "SE of mean (REML)": to_double(found.mean.u),
    }
    assert_as_printed(computed, "dyestuff2")
