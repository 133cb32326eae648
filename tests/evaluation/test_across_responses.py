"""Several responses in one study: each is analysed, and one question asked of all is adjusted for that."""

from itertools import chain

import pytest

from assayfolio.evaluation.across_responses import AcrossRule, FamilyTails
from assayfolio.findings import DIFFERENCE_SHOWN
from assayfolio.statistics.adjustment import Tail, holm
from support.studies import findings_of, findings_of_each

ASH = {
    "A": ["1.52", "1.55", "1.50", "1.49"],
    "B": ["1.59", "1.57", "1.61", "1.58"],
    "C": ["1.53", "1.56", "1.51", "1.54"],
}
PROTEIN = {
    "A": ["11.2", "11.9", "11.6", "11.4"],
    "B": ["11.8", "12.4", "12.0", "11.7"],
    "C": ["11.1", "11.5", "12.0", "11.3"],
}
BOTH = {"ash": ASH, "protein": PROTEIN}
PARTS = """\
comparisons:
  - {name: pairs, pairs: all, adjust: holm}
  - {name: one, weights: {A: 1, B: -1}}
equivalence:
  - {name: near A, against: A, margin: 0.5, adjust: holm}
  - {name: ash near A, against: A, margin: 0.1, adjust: holm, response: ash}
"""


def across(method: str, parts: str = PARTS):
    return findings_of_each(BOTH, f"design: {{across-responses: {method}}}\n{parts}")


def test_without_adjustment_each_response_stands_as_if_it_were_alone():
    together = findings_of_each(BOTH, PARTS)
    for response, data in zip(together.responses, BOTH.values(), strict=True):
        (alone,) = findings_of(data, PARTS.replace(", response: ash", "")).responses
        assert response.anova == alone.anova
        assert response.comparisons == alone.comparisons
        assert response.equivalence[0] == alone.equivalence[0]


def test_a_family_about_one_response_is_reported_for_that_one():
    ash, protein = findings_of_each(BOTH, PARTS).responses
    assert [family.name for family in ash.equivalence] == ["near A", "ash near A"]
    assert [family.name for family in protein.equivalence] == ["near A"]


def test_bonferroni_multiplies_every_p_by_the_number_of_responses():
    plain, adjusted = across("none"), across("bonferroni")
    for one, two in zip(plain.responses, adjusted.responses, strict=True):
        assert two.anova.p == one.anova.p
        assert two.anova.p_adjusted == pytest.approx(min(1, 2 * one.anova.p), rel=1e-11)
        for a, b in zip(
            chain(one.comparisons, one.equivalence), chain(two.comparisons, two.equivalence), strict=True
        ):
            assert (b.responses, b.across_responses) == (2, "bonferroni")
            for row, after in zip(a.rows, b.rows, strict=True):
                assert after.p == row.p
                assert after.p_adjusted == pytest.approx(min(1, 2 * row.p_adjusted), rel=1e-11)


def test_intervals_under_bonferroni_are_those_of_half_the_level_and_agree_with_the_verdicts():
    parts = "comparisons: [{name: pairs, pairs: all, adjust: tukey-kramer}]\n"
    head = "study: T\ntitle: t\ndata: {file: f.csv, response: y, factor: x}\nalpha: 0.025\n"
    for response, data in zip(across("bonferroni", parts).responses, BOTH.values(), strict=True):
        (strict,) = findings_of(data, parts, head).responses
        rows, strict_rows = response.comparisons[0].rows, strict.comparisons[0].rows
        assert [row.ci for row in rows] == [row.ci for row in strict_rows]
        assert [row.verdict for row in rows] == [row.verdict for row in strict_rows]
        assert response.anova.f_critical == strict.anova.f_critical
        for row in rows:
            assert (row.verdict == DIFFERENCE_SHOWN) == (not row.ci[0] <= 0 <= row.ci[1])


def test_holm_takes_the_rows_of_all_responses_as_one_family():
    plain, adjusted = across("none"), across("holm")
    for at in range(2):
        raw = [row.p for response in plain.responses for row in response.comparisons[at].rows]
        expected = [tail.p for tail in holm([Tail(p, 0.0) for p in raw])]
        found = [row for response in adjusted.responses for row in response.comparisons[at].rows]
        assert [row.p_adjusted for row in found] == pytest.approx(expected, rel=1e-11)
        assert all(row.ci is None for row in found)
    f_tests = [response.anova for response in adjusted.responses]
    expected = [tail.p for tail in holm([Tail(anova.p, 0.0) for anova in f_tests])]
    assert [anova.p_adjusted for anova in f_tests] == pytest.approx(expected, rel=1e-11)
    assert all(anova.f_critical is None for anova in f_tests)


def test_under_holm_a_family_about_one_response_is_tested_at_its_share_of_alpha():
    ash = across("holm").responses[0].equivalence[1]
    plain = across("none").responses[0].equivalence[1]
    assert (ash.responses, ash.across_responses) == (2, "bonferroni")
    expected = [min(1, 2 * row.p_adjusted) for row in plain.rows]
    assert [row.p_adjusted for row in ash.rows] == pytest.approx(expected, rel=1e-11)


@pytest.mark.parametrize("method", ["none", "bonferroni", "holm"])
def test_one_response_has_nothing_to_adjust_for(method):
    rule = AcrossRule("none", 1)
    tails = (Tail(0.01, -2.0), Tail(0.5, -0.30103))
    assert rule.adjusted([FamilyTails(tails, tails)]) == [tails]
    (family, *_) = findings_of(ASH, PARTS.replace(", response: ash", "")).responses[0].comparisons
    assert (family.responses, family.across_responses) == (1, "none")


def test_what_could_not_be_formed_keeps_its_place_in_the_count():
    tails = (Tail(0.01, -2.0), Tail(0.02, -1.69897))
    ((first, second), empty) = AcrossRule("holm", 2).adjusted([FamilyTails(tails, tails), None])
    assert first.p == pytest.approx(0.04)
    assert second.p == pytest.approx(0.06)
    assert empty == ()


def test_rows_that_a_family_lacks_keep_their_places_in_the_count():
    tails = (Tail(0.01, -2.0), Tail(0.02, -1.69897))
    (found, other) = AcrossRule("holm", 2).adjusted(
        [FamilyTails(tails[:1], tails[:1], 1), FamilyTails(tails, tails)]
    )
    assert found[0].p == pytest.approx(0.04)
    assert [tail.p for tail in other] == pytest.approx([0.04, 0.04])


def test_a_response_without_variation_does_not_keep_the_other_from_being_reported():
    flat = {level: ["1.5"] * 4 for level in ASH}
    findings = findings_of_each({"ash": ASH, "protein": flat}, f"design: {{across-responses: holm}}\n{PARTS}")
    ash, protein = findings.responses
    assert [family.name for family in ash.comparisons] == ["pairs", "one"]
    assert protein.comparisons == ()
    assert protein.anova.p_adjusted is None
    assert {item.response for item in findings.not_reported} == {"protein"}
    (alone,) = findings_of(ASH, PARTS.replace(", response: ash", "")).responses
    assert ash.anova.p_adjusted == pytest.approx(2 * alone.anova.p, rel=1e-11)


def test_not_reported_parts_follow_the_order_of_the_responses():
    flat = {level: ["1.5"] * 4 for level in ASH}
    findings = findings_of_each({"ash": flat, "protein": flat}, PARTS)
    named = [item.response for item in findings.not_reported]
    assert named == sorted(named)
    assert set(named) == {"ash", "protein"}
