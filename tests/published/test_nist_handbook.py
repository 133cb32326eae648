"""Worked examples of the NIST/SEMATECH e-Handbook of Statistical Methods, at the digits it prints.

Sections 7.4.3.3 (one-way analysis), 7.4.7.1 (Tukey intervals), 7.4.7.2 and 7.4.7.3 (Scheffe and Bonferroni
intervals for contrasts), 1.3.5.4, 1.3.5.7 and 1.3.5.10 (gear diameters), 1.3.5.17.1 (Grubbs' test).
tests/vectors/worked_examples.json says which figures were seen in public text and which are from memory.

Not compared: Levene's test about the trimmed mean, which is not offered.
"""

from fractions import Fraction
from math import sqrt

import pytest

from assayfolio.exact import to_double
from assayfolio.statistics.comparisons import TWO_SIDED, compare
from assayfolio.statistics.distributions import studentized_range_isf
from assayfolio.statistics.equal_variances import (
    bartlett_variances,
    brown_forsythe_variances,
    levene_variances,
)
from assayfolio.statistics.estimates import contrast_estimate
from assayfolio.statistics.estimates import pair_estimates as pairs_of
from assayfolio.statistics.grubbs import grubbs_limit
from assayfolio.statistics.inference import omnibus_test
from assayfolio.statistics.outliers import grubbs_single
from assayfolio.statistics.simultaneous import compare_scheffe, compare_tukey_kramer
from assayfolio.statistics.tails import chi2_isf, f_isf, t_isf
from support.reference import agrees_as_printed, analysed, decimals, examples

EXAMPLES = examples()
NOT_COMPARED = {
    "nist-eda-gear": {
        "Levene (25 % trimmed) statistic",
        "Levene (25 % trimmed) p",
    },
}


def resistors(data):
    analysis = analysed(data)
    test = omnibus_test(analysis, 0.05)
    level = {summary.level: summary for summary in analysis.levels}
    return {
        "SS treatments": analysis.ss_between,
        "SS error": analysis.ss_within,
        "SS total corrected": analysis.ss_total,
        "MS treatments": analysis.ms_between,
        "MS error": analysis.ms_within,
        "F": analysis.f,
        "df treatments": analysis.df_between,
        "df error": analysis.df_within,
        "correction for the mean": analysis.grand_mean**2 * analysis.n_total,
        "mean level 1": level["Level 1"].mean,
        "mean level 2": level["Level 2"].mean,
        "mean level 3": level["Level 3"].mean,
        "p": test.tail.p,
        "critical F 5 %": test.f_critical,
    }


def simultaneous_intervals(data):
    analysis = analysed(data)
    found = {"q(0.05;4,16)": float(studentized_range_isf(0.05, analysis.k, analysis.df_within))}
    for row in compare_tukey_kramer(analysis, pairs_of(analysis), 0.05):
        a, b = (f"mu{name[-1]}" for name in row.label.split(" - "))
        lower, upper = row.interval
        found |= {f"{a}-{b} lower": lower, f"{a}-{b} upper": upper}
        found |= {f"{b}-{a} lower": -upper, f"{b}-{a} upper": -lower}
    return found


def two_contrasts(data):
    analysis = analysed(data)
    half = Fraction(1, 2)
    signs = {"C1": (1, 1, -1, -1), "C2": (1, -1, 1, -1)}
    estimates = [
        contrast_estimate(analysis, label, {level: half * s for level, s in zip(data, row, strict=True)})
        for label, row in signs.items()
    ]
    found = {
        "MS error": analysis.ms_within,
        "F(0.05;3,16)": float(f_isf(0.05, analysis.df_between, analysis.df_within)),
        "t(1-0.05/4;16)": float(t_isf(0.05 / 4, analysis.df_within)),
    }
    for row in compare(analysis, estimates, "bonferroni", TWO_SIDED, 0.05):
        found |= {f"{row.label} estimate": row.estimate, "s(C)": to_double(row.se)}
        found |= {f"{row.label} Bonferroni lower": row.interval[0]}
        found |= {f"{row.label} Bonferroni upper": row.interval[1]}
    for row in compare_scheffe(analysis, estimates, 0.05):
        found |= {
            f"{row.label} Scheffe lower": row.interval[0],
            f"{row.label} Scheffe upper": row.interval[1],
        }
    return found


def gears(data):
    analysis = analysed(data)
    check = brown_forsythe_variances(decimals(data))
    levene, bartlett = levene_variances(decimals(data)), bartlett_variances(analysis)
    return {
        "SS between": analysis.ss_between,
        "SS within": analysis.ss_within,
        "SS total": analysis.ss_total,
        "MS between": analysis.ms_between,
        "MS within": analysis.ms_within,
        "F": analysis.f,
        "critical F 5 %": omnibus_test(analysis, 0.05).f_critical,
        "Brown-Forsythe statistic": check.f,
        "Brown-Forsythe p": check.tail.p,
        "Levene (mean) statistic": levene.f,
        "Levene (mean) p": levene.tail.p,
        "Bartlett statistic": bartlett.statistic,
        "Bartlett p": bartlett.tail.p,
        "critical chi-square 5 %, 9 df": float(chi2_isf(0.05, bartlett.df)),
    }


def uranium(data):
    ((_, values),) = decimals(data)
    found = grubbs_single("sample", values)
    assert found.indexes == (7,)
    return {"G": to_double(found.statistic), "critical G one-sided 5 %": grubbs_limit(0.05, 8, ends=1)}


COMPUTED = {
    "nist-hb-7433": resistors,
    "nist-hb-7471": simultaneous_intervals,
    "nist-hb-7472-7473": two_contrasts,
    "nist-eda-gear": gears,
    "nist-eda-grubbs": uranium,
}


@pytest.mark.parametrize("example", COMPUTED)
def test_the_printed_figures(example):
    expected = EXAMPLES[example]["expected"]
    computed = COMPUTED[example](EXAMPLES[example]["data"])
    left_out = NOT_COMPARED.get(example, set())
    assert left_out <= set(expected)
    for quantity in expected.keys() - left_out:
        assert agrees_as_printed(computed[quantity], expected[quantity]), quantity


def test_the_range_point_is_the_t_point_for_two_means():
    # 7.4.7.1 builds on this identity: q(2 means) = sqrt(2) t.
    point = float(studentized_range_isf(0.05, 2, 16))
    assert point == pytest.approx(sqrt(2) * float(t_isf(0.025, 16)), rel=1e-10)
