"""Families of comparisons: every kind and every adjustment of the plan reaches its procedure."""

from fractions import Fraction
from math import log10

import pytest
from scipy import stats

from assayfolio.exact import to_double
from assayfolio.findings import DIFFERENCE_SHOWN
from assayfolio.statistics.adjustment import P_ADJUSTMENTS, Tail
from support.studies import findings_of

DATA = {
    "20": ["10.12", "10.31", "10.04", "10.22", "10.18"],
    "25": ["10.41", "10.52", "10.33"],
    "35": ["10.91", "11.22", "11.01", "11.13"],
    "50": ["10.64", "10.48", "10.81", "10.77"],
}
POOLED = {
    "none": "t tests with the pooled variance, unadjusted",
    "bonferroni": "t tests with the pooled variance, Bonferroni",
    "sidak": "t tests with the pooled variance, Sidak",
    "holm": "t tests with the pooled variance, Holm",
    "hochberg": "t tests with the pooled variance, Hochberg",
    "scheffe": "Scheffe",
    "tukey-kramer": "Tukey-Kramer",
    "dunnett": "Dunnett, single-step",
    "dunnett-step-down": "Dunnett-Tamhane, step-down",
}
SEPARATE = {
    "none": "Welch t tests with Welch-Satterthwaite degrees of freedom, unadjusted",
    "bonferroni": "Welch t tests with Welch-Satterthwaite degrees of freedom, Bonferroni",
    "sidak": "Welch t tests with Welch-Satterthwaite degrees of freedom, Sidak",
    "holm": "Welch t tests with Welch-Satterthwaite degrees of freedom, Holm",
    "hochberg": "Welch t tests with Welch-Satterthwaite degrees of freedom, Hochberg",
    "games-howell": "Games-Howell",
}
NO_INTERVAL = {"holm", "hochberg", "dunnett-step-down"}
SEPARATELY = "design: {variances: separate}\n"


def family_of(plan: str, design: str = ""):
    (response,) = findings_of(DATA, f"{design}comparisons:\n  - {{name: f, {plan}}}\n").responses
    (family,) = response.comparisons
    return family


@pytest.mark.parametrize("adjust", sorted(POOLED))
def test_with_a_pooled_variance_every_row_has_the_pooled_degrees_of_freedom(adjust):
    plan = "pairs: all" if adjust == "tukey-kramer" else 'against: "20"'
    family = family_of(f"{plan}, adjust: {adjust}")
    assert family.method == POOLED[adjust]
    assert {row.df for row in family.rows} == {12}
    assert all((row.ci is None) == (adjust in NO_INTERVAL) for row in family.rows)
    assert all(row.p_adjusted >= row.p for row in family.rows)


@pytest.mark.parametrize("adjust", sorted(SEPARATE))
def test_with_separate_variances_every_row_has_degrees_of_freedom_of_its_own(adjust):
    family = family_of(f"pairs: all, adjust: {adjust}", SEPARATELY)
    assert family.method == SEPARATE[adjust]
    assert len({row.df for row in family.rows}) == len(family.rows) == 6
    sizes = {level: len(values) for level, values in DATA.items()}
    for row in family.rows:
        a, b = row.label.split(" - ")
        assert min(sizes[a], sizes[b]) - 1 <= row.df <= sizes[a] + sizes[b] - 2
    assert all((row.ci is None) == (adjust in NO_INTERVAL) for row in family.rows)
    assert all(row.p_adjusted >= row.p for row in family.rows)


def test_the_kind_of_a_family_says_what_is_compared():
    parts = """\
comparisons:
  - {name: p, pairs: all, adjust: holm}
  - {name: a, against: "20", adjust: holm}
  - {name: c, weights: {"20": 1, "50": -1}}
  - name: cs
    contrasts: [{name: one, weights: {"20": 1, "25": -1}}, {name: two, weights: {"35": 1, "50": -1}}]
    adjust: holm
  - {name: t, trend: linear}
"""
    (response,) = findings_of(DATA, parts).responses
    assert [family.kind for family in response.comparisons] == [
        "pairs",
        "against",
        "contrast",
        "contrasts",
        "trend",
    ]
    assert [row.label for row in response.comparisons[3].rows] == ["one", "two"]
    assert [family.family_size for family in response.comparisons] == [6, 3, 1, 2, 1]


def test_a_linear_trend_is_the_slope_of_the_means_over_the_names_of_the_levels():
    family = family_of("trend: linear")
    points = [(Fraction(name), Fraction(value)) for name, values in DATA.items() for value in values]
    n = len(points)
    centre_x, centre_y = (sum(column) / n for column in zip(*points, strict=True))
    slope = sum((x - centre_x) * (y - centre_y) for x, y in points) / sum(
        (x - centre_x) ** 2 for x, _ in points
    )
    assert family.rows[0].estimate == slope


def test_trend_scores_of_the_plan_go_before_the_names_of_the_levels():
    by_name = family_of("trend: polynomial, degree: 2, adjust: holm")
    tenfold = family_of(
        'trend: polynomial, degree: 2, scores: {"20": 200, "25": 250, "35": 350, "50": 500}, adjust: holm'
    )
    assert [row.label for row in tenfold.rows] == ["linear", "quadratic"]
    assert [row.p for row in tenfold.rows] == [row.p for row in by_name.rows]
    assert tenfold.rows[0].estimate * 10 == by_name.rows[0].estimate
    assert tenfold.rows[1].estimate * 100 == by_name.rows[1].estimate


@pytest.mark.parametrize("adjust", ["bonferroni", "sidak", "scheffe", "tukey-kramer"])
def test_simultaneous_intervals_agree_with_the_verdicts(adjust):
    family = family_of(f"pairs: all, adjust: {adjust}")
    assert {row.verdict for row in family.rows} != {DIFFERENCE_SHOWN}
    for row in family.rows:
        assert (row.verdict == DIFFERENCE_SHOWN) == (not row.ci[0] <= 0 <= row.ci[1])


@pytest.mark.parametrize("alternative", ["greater", "less"])
def test_one_sided_tests_against_a_reference_have_one_sided_intervals(alternative):
    family = family_of(f'against: "25", adjust: dunnett, alternative: {alternative}')
    assert family.alternative == alternative
    open_end = 1 if alternative == "greater" else 0
    for row in family.rows:
        assert row.ci[open_end] is None
        towards = row.ci[0] > 0 if alternative == "greater" else row.ci[1] < 0
        assert (row.verdict == DIFFERENCE_SHOWN) == towards


KITS = {
    "reference": ["10.11", "10.24", "10.03", "10.18"],
    "bench-kit": ["10.61", "10.44", "10.73", "10.52"],
    "field-kit": ["10.5", "10.5", "10.5", "10.5"],
    "old-kit": ["10.31", "10.12", "10.42", "10.20"],
}
STILL = "the values of field-kit do not vary at the recorded resolution, so its variance cannot be estimated"


def kits(plan: str, data=None):
    findings = findings_of(data or KITS, f"{SEPARATELY}comparisons:\n  - {{name: f, {plan}}}\n")
    reasons = {item.what: item.reason for item in findings.not_reported if item.what.startswith("comp")}
    return findings.responses[0].comparisons, reasons


def test_rows_with_a_level_that_does_not_vary_are_named_with_the_reason_and_the_others_stay():
    ((family,), reasons) = kits("pairs: all, adjust: holm")
    assert [row.label for row in family.rows] == [
        "reference - bench-kit",
        "reference - old-kit",
        "bench-kit - old-kit",
    ]
    assert reasons == {
        f"comparison: f: {label}": STILL
        for label in ("reference - field-kit", "bench-kit - field-kit", "field-kit - old-kit")
    }


def test_a_level_of_one_value_has_no_variance_either():
    (families, reasons) = kits("against: reference, adjust: none", {**KITS, "bench-kit": ["10.61"]})
    assert [row.label for row in families[0].rows] == ["old-kit - reference"]
    assert reasons["comparison: f: bench-kit - reference"] == (
        "bench-kit has one value, so its variance cannot be estimated"
    )


@pytest.mark.requirement("REPORT-3")
@pytest.mark.parametrize("adjust", ["bonferroni", "sidak", "holm", "hochberg"])
def test_a_family_is_adjusted_for_its_planned_size_whatever_rows_it_lacks(adjust):
    ((family,), _) = kits(f"pairs: all, adjust: {adjust}")
    assert family.family_size == 6
    raw = [Tail(row.p, log10(row.p)) for row in family.rows]
    expected = P_ADJUSTMENTS[adjust]([*raw, *[Tail(1.0, 0.0)] * 3])[:3]
    assert [row.p_adjusted for row in family.rows] == pytest.approx([tail.p for tail in expected], rel=1e-9)


def test_games_and_howell_keep_the_number_of_levels():
    ((family,), reasons) = kits("pairs: all, adjust: games-howell")
    assert len(reasons) == 3
    for row in family.rows:
        range_p = stats.studentized_range.sf(
            2**0.5 * abs(float(row.estimate)) / float(to_double(row.se)), 4, row.df
        )
        assert row.p_adjusted == pytest.approx(range_p, rel=1e-6)


def test_a_contrast_and_a_trend_need_the_variance_of_every_level_they_weigh():
    data = {"1": KITS["reference"], "2": KITS["bench-kit"], "3": KITS["field-kit"]}
    parts = f"""\
{SEPARATELY}comparisons:
  - {{name: slope, trend: linear}}
  - name: c
    contrasts: [{{name: a, weights: {{"1": 1, "2": -1}}}}, {{name: b, weights: {{"1": 1, "3": -1}}}}]
    adjust: holm
"""
    findings = findings_of(data, parts)
    assert [[row.label for row in family.rows] for family in findings.responses[0].comparisons] == [["a"]]
    named = [item.what for item in findings.not_reported]
    assert "comparison: c: b" in named
    # A linear trend over three equidistant levels does not weigh the middle one, but the last.
    assert "comparison: slope" in named


def test_a_family_of_which_no_row_is_left_is_not_reported_and_the_others_are():
    data = {"A": ["1.0", "1.1", "0.9"], "B": ["1.2"], "C": ["1.30", "1.42", "1.37"]}
    parts = f"""\
{SEPARATELY}comparisons:
  - {{name: to B, against: B, adjust: holm}}
  - {{name: A and C, weights: {{A: 1, C: -1}}}}
"""
    findings = findings_of(data, parts)
    assert [family.name for family in findings.responses[0].comparisons] == ["A and C"]
    reasons = {item.what: item.reason for item in findings.not_reported}
    assert reasons["comparison: to B"] == "B has one value, so its variance cannot be estimated"
    assert all(item.response == "content" for item in findings.not_reported)


def test_with_one_variance_a_level_that_does_not_vary_is_compared_like_any_other():
    (response,) = findings_of(KITS, "comparisons: [{name: f, pairs: all, adjust: holm}]\n").responses
    assert len(response.comparisons[0].rows) == 6


def test_the_critical_value_stands_with_the_family_or_with_each_row():
    pooled = family_of("pairs: all, adjust: tukey-kramer")
    assert pooled.critical == pytest.approx(stats.studentized_range.isf(0.05, 4, 12) / 2**0.5, rel=1e-6)
    assert {row.critical for row in pooled.rows} == {pooled.critical}
    separate = family_of("pairs: all, adjust: bonferroni", SEPARATELY)
    assert separate.critical is None
    for row in separate.rows:
        assert row.critical == pytest.approx(stats.t.isf(0.025 / 6, row.df), rel=1e-9)
    for design in ("", SEPARATELY):
        stepwise = family_of("pairs: all, adjust: holm", design)
        assert stepwise.critical is None
        assert all(row.critical is None for row in stepwise.rows)
