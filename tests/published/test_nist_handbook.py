"""Worked examples of the NIST/SEMATECH e-Handbook of Statistical Methods, at the digits it prints.

Sections 7.4.3.3 (one-way analysis), 7.4.7.1 (Tukey intervals), 7.4.7.3 (Bonferroni intervals for contrasts),
1.3.5.4, 1.3.5.7 and 1.3.5.10 (gear diameters). tests/vectors/worked_examples.json says which figures were
seen in public text and which are from memory.

Not compared, for they belong to later work: Scheffe intervals, Bartlett's test, Levene's test about the mean
and about the trimmed mean, and the chi-square point that goes with Bartlett's test.
"""

from fractions import Fraction
from math import sqrt

import pytest

from assayfolio.exact import to_double
from assayfolio.statistics.checks import brown_forsythe_variances
from assayfolio.statistics.comparisons import TWO_SIDED, compare, compare_tukey_kramer, contrast_estimate
from assayfolio.statistics.comparisons import pair_estimates as pairs_of
from assayfolio.statistics.distributions import studentized_range_isf
from assayfolio.statistics.inference import omnibus_test
from assayfolio.statistics.tails import f_isf, t_isf
from support.reference import agrees_as_printed, analysed, decimals, examples

EXAMPLES = examples()
NOT_COMPARED = {
    "nist-hb-7472-7473": {"C1 Scheffe lower", "C1 Scheffe upper", "C2 Scheffe lower", "C2 Scheffe upper"},
    "nist-eda-gear": {
        *("Bartlett statistic", "Bartlett p", "Levene (mean) statistic", "Levene (mean) p"),
        *("Levene (25 % trimmed) statistic", "Levene (25 % trimmed) p", "critical chi-square 5 %, 9 df"),
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
    return found


def gears(data):
    analysis = analysed(data)
    check = brown_forsythe_variances(decimals(data))
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
    }


COMPUTED = {
    "nist-hb-7433": resistors,
    "nist-hb-7471": simultaneous_intervals,
    "nist-hb-7472-7473": two_contrasts,
    "nist-eda-gear": gears,
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
