"""Outlier tests propose; they name the lines in the data file, and nothing is removed."""

from fractions import Fraction

import pytest

from assayfolio.findings import NEITHER, NOT_ASSESSABLE, OUTLIER, STRAGGLER
from support.studies import findings_of

DATA = {
    "A": ["10.01", "10.03", "9.98", "10.02", "11.70", "10.00", "9.99"],
    "B": ["10.21", "10.18", "10.23", "10.20", "10.19"],
    "C": ["10.1", "10.3"],
}


def outliers_of(tests: str, data=None):
    return findings_of(data or DATA, f"outliers: {{test: {tests}}}\n").responses[0].outliers


def test_the_value_far_out_is_named_with_its_line_in_the_file():
    a, b, _ = outliers_of("grubbs")
    assert (a.level, a.verdict) == ("A", OUTLIER)
    assert a.lines == (6,)  # the header is line 1
    assert a.values == (Fraction("11.70"),)
    assert a.p < 0.01
    assert float(a.statistic.square) ** 0.5 > a.outlier_limit > a.straggler_limit
    assert (b.level, b.verdict) == ("B", NEITHER)


@pytest.mark.requirement("REPORT-7")
def test_nothing_is_removed():
    (plain,), (tested,) = (
        findings_of(DATA).responses,
        findings_of(DATA, "outliers: {test: grubbs}\n").responses,
    )
    assert tested.anova == plain.anova
    assert tested.levels == plain.levels


def test_a_level_too_small_for_a_test_says_so():
    *_, c = outliers_of("grubbs")
    assert (c.level, c.verdict) == ("C", NOT_ASSESSABLE)
    assert c.note.startswith("not assessable: the test needs 3 values")
    assert (c.statistic, c.straggler_limit, c.outlier_limit, c.p, c.lines) == (None, None, None, None, ())


def test_two_values_at_one_end_are_named_together():
    data = {**DATA, "A": ["10.01", "11.66", "9.98", "10.02", "11.70", "10.00", "9.99", "10.03"]}
    single, double = outliers_of("[grubbs, grubbs-double]", data)[0::3]
    assert single.verdict == NEITHER  # the two hide each other
    assert double.verdict == OUTLIER
    assert double.lines == (3, 6)
    assert double.values == (Fraction("11.66"), Fraction("11.70"))
    assert float(double.statistic) < double.outlier_limit < double.straggler_limit


def test_two_values_count_only_where_one_alone_does_not():
    _, _, _, double, *_ = outliers_of("[grubbs, grubbs-double]")
    assert double.verdict in (OUTLIER, STRAGGLER)
    assert "already names a value" in double.note


def test_a_level_with_too_much_spread_is_named_without_lines():
    (cochran,) = outliers_of("cochran")
    assert (cochran.test, cochran.level, cochran.verdict) == ("cochran", "A", OUTLIER)
    assert cochran.lines == cochran.values == ()


def test_a_test_that_is_about_all_levels_and_cannot_be_done_names_none():
    (cochran,) = outliers_of("cochran", {"A": ["1.0", "1.1"], "B": ["2.0"]})
    assert (cochran.level, cochran.verdict) == ("", NOT_ASSESSABLE)


def test_tests_stand_in_the_order_of_the_plan_and_level_by_level():
    found = outliers_of("[cochran, grubbs]")
    assert [(one.test, one.level) for one in found] == [
        ("cochran", "A"),
        ("grubbs", "A"),
        ("grubbs", "B"),
        ("grubbs", "C"),
    ]


def test_values_that_agree_by_rounding_make_no_outlier_and_the_note_says_why():
    data = {"A": ["150.5", "150.5", "150.9", "151.2"], "B": ["150.1", "150.7", "150.4", "150.9"]}
    a, _ = outliers_of("grubbs-double", data)
    assert (a.verdict, a.statistic, a.p) == (NOT_ASSESSABLE, None, None)
    assert a.note.startswith("not assessable: the other 2 values of the level are all equal")
    assert a.lines == (4, 5)  # what would have been tested is still named
    assert a.values == (Fraction("150.9"), Fraction("151.2"))


def test_the_recorded_step_is_that_of_all_levels():
    data = {
        "A": ["10.00", "10.00", "10.00", "10.05", "10.00", "10.20"],
        "B": ["10.25", "10.40", "10.15", "10.50", "10.30"],
    }
    a, _ = outliers_of("grubbs", data)
    assert "step of 0.05" in a.note
    a, _ = outliers_of("grubbs", {**data, "B": ["10.26", "10.40", "10.15", "10.50", "10.30"]})
    assert a.verdict == OUTLIER


SAMPLE = {
    "day 1": ["10.01", "10.03", "9.98"],
    "day 2": ["10.02", "10.06", "9.99"],
    "day 3": ["10.05", "9.97", "10.01"],
    "day 4": ["10.03", "10.00", "9.96"],
    "day 5": ["10.71", "10.68", "10.75"],
}


def outliers_of_sample(tests: str, data):
    parts = f"design: {{effects: random}}\noutliers: {{test: {tests}}}\n"
    return findings_of(data, parts).responses[0].outliers


def test_the_means_of_a_sample_of_levels_are_tested_after_its_values():
    found = outliers_of_sample("[grubbs, grubbs-double, cochran]", SAMPLE)
    assert [one.about for one in found] == [
        *["values"] * 5,
        "level means",
        *["values"] * 5,
        "level means",
        "variance",
    ]
    single = found[5]
    assert (single.test, single.level, single.verdict) == ("grubbs", "", OUTLIER)
    assert single.levels == ("day 5",)
    assert single.lines == single.values == ()
    double = found[11]
    assert (double.test, len(double.levels)) == ("grubbs-double", 2)


def test_the_means_of_fixed_levels_are_what_is_compared_and_not_tested():
    assert {one.about for one in outliers_of("[grubbs, cochran]")} == {"values", "variance"}


def test_unequal_numbers_behind_the_means_are_told():
    *_, means = outliers_of_sample("grubbs", {**SAMPLE, "day 1": ["10.01", "10.03"]})
    assert "means are of unequal numbers of values" in means.note
    *_, means = outliers_of_sample("grubbs", SAMPLE)
    assert "unequal" not in means.note


def test_two_levels_are_too_few_for_a_test_of_means():
    *_, means = outliers_of_sample("grubbs", {level: SAMPLE[level] for level in ("day 1", "day 2")})
    assert (means.about, means.verdict, means.levels) == ("level means", NOT_ASSESSABLE, ())
    assert means.note == "not assessable: the test needs 3 level means; here are 2"


@pytest.mark.parametrize("value", ["10.04", "10.08", "10.16"])
def test_words_follow_the_limits(value):
    data = {"A": ["10.01", "10.03", "9.98", "10.02", value, "10.00", "9.99"], "B": ["10.2", "10.3"]}
    a = outliers_of("grubbs", data)[0]
    g = float(a.statistic.square) ** 0.5
    expected = OUTLIER if g > a.outlier_limit else STRAGGLER if g > a.straggler_limit else NEITHER
    assert a.verdict == expected
