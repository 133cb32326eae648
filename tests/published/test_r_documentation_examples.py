"""Examples of the documentation of R, at the digits its output prints.

Data sets PlantGrowth, InsectSprays, chickwts, iris, sleep and airquality with the outputs of aov, TukeyHSD,
shapiro.test, oneway.test and pairwise.t.test. tests/vectors/worked_examples.json says which figures were
seen in public text and which are from memory.

Not compared, for it belongs to later work: omega squared.
"""

import pytest

from assayfolio.exact import Root, to_double
from assayfolio.statistics.comparisons import TWO_SIDED, compare
from assayfolio.statistics.equal_variances import bartlett_variances
from assayfolio.statistics.estimates import pair_estimates
from assayfolio.statistics.inference import omnibus_test
from assayfolio.statistics.normality import residuals, shapiro_wilk
from assayfolio.statistics.separate_variances import compare_separate
from assayfolio.statistics.simultaneous import compare_tukey_kramer
from assayfolio.statistics.welch import welch_test
from support.reference import agrees_as_printed, analysed, decimals, examples

EXAMPLES = examples()
MONTHS = {"5": "May", "6": "Jun", "7": "Jul", "8": "Aug", "9": "Sep"}
NOT_COMPARED = {
    "plantgrowth": {"omega squared"},
}


def table(analysis, factor):
    return {
        f"SS {factor}".strip(): analysis.ss_between,
        f"MS {factor}".strip(): analysis.ms_between,
        "SS residual": analysis.ss_within,
        "MS residual": analysis.ms_within,
        "df residual": analysis.df_within,
        "F": analysis.f,
        "p": omnibus_test(analysis, 0.05).tail.p,
    }


def plant_growth(data):
    analysis = analysed(data)
    normality = shapiro_wilk(residuals(decimals(data)))
    found = table(analysis, "group")
    found |= {"Shapiro-Wilk W of residuals": normality.w, "Shapiro-Wilk p": normality.p}
    for row in compare_tukey_kramer(analysis, pair_estimates(analysis), 0.05):
        a, b = row.label.split(" - ")
        lower, upper = row.interval
        found |= {f"{b}-{a} diff": -row.estimate, f"{b}-{a} Tukey p": row.adjusted.p}
        found |= {f"{b}-{a} Tukey lower": -upper, f"{b}-{a} Tukey upper": -lower}
    return found


def insect_sprays(data):
    analysis = analysed(data)
    normality = shapiro_wilk(residuals(decimals(data)))
    return table(analysis, "") | {
        "residual SE": to_double(Root.of(analysis.ms_within)),
        "Shapiro-Wilk p of residuals": normality.p,
        "Bartlett p": bartlett_variances(analysis).tail.p,
    }


def extra_sleep(data):
    analysis = analysed(data)
    found = table(analysis, "group")
    welch = welch_test(analysis, 0.05)
    return {
        "classical F": found["F"],
        "classical p": found["p"],
        "Welch F": welch.f,
        "Welch denominator df": welch.df2,
        "Welch p": welch.tail.p,
    }


def insect_sprays_with_separate_variances(data):
    welch = welch_test(analysed(data), 0.05)
    return {"Welch F": welch.f, "denominator df": welch.df2, "p": welch.tail.p}


def ozone_by_month(data):
    analysis = analysed(data)
    pairs = pair_estimates(analysis)
    families = {
        "holm": compare(analysis, pairs, "holm", TWO_SIDED, 0.05),
        "bonferroni": compare(analysis, pairs, "bonferroni", TWO_SIDED, 0.05),
        "holm, Welch": compare_separate(pairs, "holm", TWO_SIDED, 0.05),
    }
    found = {}
    for family, rows in families.items():
        for row in rows:
            earlier, later = row.label.split(" - ")
            found[f"{family} {MONTHS[later]}-{MONTHS[earlier]}"] = row.adjusted.p
    return found


COMPUTED = {
    "plantgrowth": plant_growth,
    "insectsprays": insect_sprays,
    "chickwts": lambda data: table(analysed(data), "feed"),
    "iris-sepal-length": lambda data: table(analysed(data), "species"),
    "iris-sepal-width": lambda data: table(analysed(data), "species"),
    "iris-petal-length": lambda data: table(analysed(data), "species"),
    "iris-petal-width": lambda data: table(analysed(data), "species"),
    "sleep": extra_sleep,
    "insectsprays-welch": insect_sprays_with_separate_variances,
    "airquality-pairwise": ozone_by_month,
}


@pytest.mark.parametrize("example", COMPUTED)
def test_the_printed_figures(example):
    expected = EXAMPLES[example]["expected"]
    computed = COMPUTED[example](EXAMPLES[example]["data"])
    left_out = NOT_COMPARED.get(example, set())
    assert left_out <= set(expected)
    for quantity in expected.keys() - left_out:
        assert agrees_as_printed(computed[quantity], expected[quantity]), quantity
