"""Every part of the findings stands in the report, under its own heading, in words and figures."""

import re
from dataclasses import replace
from fractions import Fraction
from functools import cache

import pytest

from assayfolio.findings import NotReported
from assayfolio.report.compose import compose
from assayfolio.report.content import ReportContent, Section
from assayfolio.report.prose import plain
from assayfolio.report.tables import Table
from report.cases import CASES


@cache
def composed(case: str) -> ReportContent:
    return compose(CASES[case]())


def read(words: object) -> str:
    """Text with plain blanks and hyphens, for comparing."""
    text = plain(words)  # type: ignore[arg-type]
    return text.replace("\u202f", " ").replace("\u00a0", " ").replace("\u2212", "-")


def section(case: str, title: str) -> Section:
    (found,) = [one for one in composed(case).sections if one.title == title]
    return found


def tables(part: Section) -> list[Table]:
    return [block.table for block in part.blocks if block.kind == "table"]


def rows(table: Table) -> list[list[str]]:
    return [[read(cell.words) for cell in row] for row in table.rows]


def heads(table: Table) -> list[str]:
    return [read(column.head) for column in table.columns]


def words(part: Section) -> str:
    return " ".join(read(block.words) for block in part.blocks if block.kind in ("paragraph", "heading"))


def facts(part: Section) -> dict[str, str]:
    return {
        read(entry.what): read(entry.value)
        for block in part.blocks
        if block.kind == "facts"
        for entry in block.entries
    }


def card(case: str, family: str):
    (found,) = [one for one in composed(case).cards if read(one.family) == family]
    return found


# sections


def test_sections_are_numbered_through_and_only_those_that_apply_are_there():
    titles = [f"{one.number} {one.title}" for one in composed("random days").sections]
    assert titles == [
        "1 Plan",
        "2 Data",
        "3 Checks of the assumptions",
        "4 Outlier proposals",
        "5 Analysis of variance",
        "6 Precision",
        "7 Acceptance criteria",
        "8 Asked for and not reported",
        "9 Method",
        "10 Provenance",
        "11 Data listing",
    ]


def test_a_study_without_comparisons_has_no_section_on_them():
    assert "Comparisons" not in [one.title for one in composed("random days").sections]


def test_several_responses_come_one_after_the_other():
    titles = [one.title for one in composed("two responses").sections]
    first = [title for title in titles if title.endswith(": ash")]
    second = [title for title in titles if title.endswith(": protein")]
    assert [title.removesuffix(": ash") for title in first] == [
        title.removesuffix(": protein") for title in second
    ]
    assert titles.index(second[0]) == titles.index(first[-1]) + 1
    assert titles[0] == "Plan"
    assert titles[-4:] == ["Asked for and not reported", "Method", "Provenance", "Data listing"]


@pytest.mark.parametrize("case", CASES)
def test_no_two_sections_headings_tables_or_figures_bear_the_same_mark(case):
    content = composed(case)
    blocks = [block for one in content.sections for block in one.blocks]
    anchors = [one.anchor for one in content.sections]
    anchors += [block.anchor for block in blocks if block.kind == "heading" and block.anchor]
    labels = [block.table.label for block in blocks if block.kind == "table"]
    labels += [block.label for block in blocks if block.kind in ("figure", "listing")]
    files = [picture.name for picture in content.pictures]
    for marks in (anchors, labels, files, [one.number for one in content.sections]):
        assert len(marks) == len(set(marks))
    assert {one.anchor for one in (*content.cards, *content.summary)} <= set(anchors)


# plan


def test_the_plan_shows_weights_scores_margins_and_limits():
    captions = [read(table.caption) for table in tables(section("two responses", "Plan"))]
    assert "Weights of the contrasts of “planned contrasts”." in captions
    assert "Margins of equivalence and where they come from." in captions
    assert "Acceptance criteria of the plan." in captions
    (weights,) = [
        table for table in tables(section("two responses", "Plan")) if "Weights" in read(table.caption)
    ]
    assert rows(weights)[0] == ["near-infrared against wet chemistry", "-0.5", "-0.5", "0.5", "0.5"]
    (scores,) = [table for table in tables(section("trend", "Plan")) if "Scores" in read(table.caption)]
    assert rows(scores)[1] == ["95", "9.5"]


@pytest.mark.requirement("PLAN-13")
def test_a_margin_stands_with_its_source():
    (margins,) = [t for t in tables(section("two responses", "Plan")) if "Margins" in read(t.caption)]
    assert rows(margins) == [
        [
            "ash within 0.02 g/100 g (ash)",
            "-0.02 to 0.02 g/100 g",
            "0.05",
            "invented specification RF-12, section 4",
        ],
        [
            "protein within 2 percent (protein)",
            "-2 to 2 % of the reference mean",
            "0.05",
            "invented specification RF-12, section 5",
        ],
        [
            "protein is not lower by 0.15 g/100 g or more (protein)",
            "above -0.15 g/100 g",
            "0.05",
            "not stated in the plan",
        ],
    ]


def test_planned_power_is_said_to_come_from_the_plan_alone():
    part = section("two responses", "Plan")
    assert "From the plan alone, and never from the data" in words(part)
    (power,) = [table for table in tables(part) if "Power" in read(table.caption)]
    found = CASES["two responses"]().findings.power
    assert len(power.rows) == len(found.rows)
    assert [row[2] for row in rows(power)] == [f"{row.power:.4f}" for row in found.rows]
    dunnett = next(row for row in rows(power) if "Dunnett" in row[0])
    assert dunnett[0] == "each instrument against the reference bench (Dunnett, single-step)"
    numbers = next(row.n_for_target for row in found.rows if row.method.startswith("Dunnett"))
    assert numbers[0] > numbers[1]  # allocation for a control
    assert dunnett[3] == f"{numbers[0]}; {numbers[1]}"
    assert "Two numbers of values: at reference bench, and at each other level." in [
        read(one) for one in power.notes
    ]


def test_without_planned_power_nothing_is_said_about_power():
    text = " ".join(words(one) for one in composed("balanced").sections)
    assert not re.search(r"\bpower\b", text, flags=re.IGNORECASE)


# checks and proposals


def test_each_check_has_the_symbol_of_its_statistic():
    (checks,) = tables(section("two responses", "Checks of the assumptions: ash"))
    assert [(row[0].split(" ")[0], row[1]) for row in rows(checks)] == [
        ("Brown–Forsythe", "F"),
        ("Levene", "F"),
        ("Bartlett", "χ²"),
        ("Cochran", "C"),
        ("Shapiro–Wilk", "W"),
        ("Anderson–Darling", "A²"),
        ("Trend", "t"),
    ]


def test_residuals_are_shown_in_measuring_order_where_it_is_known():
    captions = [
        read(block.caption)
        for case, title in (
            ("two responses", "Checks of the assumptions: ash"),
            ("balanced", "Checks of the assumptions"),
        )
        for block in section(case, title).blocks
        if block.kind == "figure" and "Left" in read(block.caption)
    ]
    assert "in the measuring order;" in captions[0]
    assert "in the order of the file;" in captions[1]


@pytest.mark.requirement("REPORT-7")
def test_proposals_name_lines_values_and_both_limits_and_say_that_nothing_was_removed():
    part = section("sixty levels", "Outlier proposals")
    assert "Nothing was removed" in words(part)
    assert "look for a cause" not in words(part)
    assert "A proposal calls for a cause" in words(part)
    (proposals,) = tables(part)
    assert heads(proposals)[4:7] == ["Statistic", "Straggler limit, 5 %", "Outlier limit, 1 %"]
    found = [
        one
        for one in CASES["sixty levels"]().findings.responses[0].outliers
        if one.verdict in ("outlier", "straggler")
    ]
    assert found
    assert len(proposals.rows) == len(found)
    for row, one in zip(rows(proposals), found, strict=True):
        assert row[2] == (", ".join(map(str, one.lines)) or "–")
        assert row[7] == one.verdict


def test_few_tests_are_all_shown_with_what_they_found():
    (table,) = tables(section("random days", "Outlier proposals"))
    assert len(table.rows) == 12  # eleven on values and variances, one on the means of the days
    assert [row[0] for row in rows(table)].count("Grubbs, one level mean") == 1
    assert {row[7] for row in rows(table)} == {"neither"}


def test_a_proposal_keeps_what_its_test_remarks():
    content = CASES["random days"]()
    found = content.findings.responses[0]
    note = "beyond the 1 % limit; look for a cause, nothing was removed; another test names the same value"
    one = replace(found.outliers[0], lines=(2,), verdict="outlier", note=note)
    responses = (replace(found, outliers=(one,)),)
    changed = replace(content, findings=replace(content.findings, responses=responses))
    (part,) = [part for part in compose(changed).sections if part.title == "Outlier proposals"]
    (table,) = tables(part)
    assert rows(table)[0][-1] == "outlier"
    assert "day 1: another test names the same value." in [read(one) for one in table.notes]


# analysis of variance


def test_separate_variances_have_their_own_tests_and_the_planned_one_is_marked():
    (_, means) = tables(section("separate variances", "Analysis of variance"))
    names = [row[0] for row in rows(means)]
    assert names == [
        "Welch’s F",
        "Brown–Forsythe test of equal means (F*)",
        "Brown–Forsythe test of equal means (F*), with Mehrotra’s degrees of freedom",
    ]
    assert [row[-1] for row in rows(means)] == ["the planned test", "for comparison", "for comparison"]
    assert "between the means of the 4 levels by Welch’s F" in words(
        section("separate variances", "Analysis of variance")
    )


def test_the_planned_test_carries_the_verdict():
    case = "brown-forsythe for means"
    assert (
        read(composed(case).cards[0].family)
        == "analysis of variance · Brown–Forsythe test of equal means (F*)"
    )
    assert "by the Brown–Forsythe test of equal means (F*)" in words(section(case, "Analysis of variance"))
    (_, means) = tables(section(case, "Analysis of variance"))
    assert [row[-1] for row in rows(means)] == ["for comparison", "the planned test", "for comparison"]


@pytest.mark.requirement("REPORT-1")
def test_effect_sizes_stand_with_the_interval_of_cohens_f():
    (_, effects) = tables(section("trend", "Analysis of variance"))
    effect = CASES["trend"]().findings.responses[0].effect
    assert [row[1] for row in rows(effects)] == ["η²", "ω²", "ε²", "f"]
    assert rows(effects)[3][3:] == [f"{end:.3f}" for end in effect.cohen_f_ci]


@pytest.mark.requirement("REPORT-10")
def test_levels_drawn_at_random_are_not_compared_with_one_another():
    assert "single levels are not compared" in words(section("random days", "Analysis of variance"))
    assert read(composed("random days").cards[0].question) == "Do levels of day add to the spread of acidity?"


def test_a_test_adjusted_for_several_responses_says_so():
    (anova, _) = tables(section("two responses", "Analysis of variance: ash"))
    assert re.search(
        r"Adjusted for 2 responses by Bonferroni: p = .*; the verdict follows it", read(anova.notes[0])
    )


# comparisons


@pytest.mark.requirement("REPORT-3")
@pytest.mark.parametrize(
    ("case", "name", "words_in_it"),
    [
        ("trend", "hotter than 105 °C gives more", "one-sided (greater: the first level above the second)"),
        ("trend", "slope", "one-sided (greater: above zero)"),
        ("separate variances", "all pairs of methods", "each with its own degrees of freedom"),
        (
            "two responses",
            "planned contrasts",
            "adjusted together by Šidák, adjusted for 2 responses by Bonferroni",
        ),
        (
            "two responses by holm",
            "planned contrasts",
            "adjusted together with those of all 2 responses by Holm",
        ),
    ],
)
def test_a_family_says_how_it_was_formed(case, name, words_in_it):
    title = "Comparisons: ash" if "responses" in case else "Comparisons"
    blocks = section(case, title).blocks
    places = [
        place for place, block in enumerate(blocks) if block.kind == "heading" and read(block.words) == name
    ]
    assert words_in_it in read(blocks[places[0] + 1].words)


def test_separate_variances_give_each_comparison_its_degrees_of_freedom():
    first, *_ = tables(section("separate variances", "Comparisons"))
    column = heads(first).index("Degrees of freedom")
    family = CASES["separate variances"]().findings.responses[0].comparisons[0]
    assert [row[column] for row in rows(first)] == [f"{row.df:.2f}" for row in family.rows]


def test_a_trend_is_told_in_its_own_units_and_shares_no_axis():
    part = section("trend", "Comparisons")
    first, *_ = tables(part)
    assert [row[0] for row in rows(first)] == ["linear", "quadratic", "cubic"]
    assert "slope for each unit of the score" in words(part)
    assert card("trend", "trend with temperature · Holm").picture is None
    assert card("trend", "slope · no adjustment").picture is None


def test_intervals_that_hold_over_several_responses_say_so():
    first, *_ = tables(section("two responses", "Comparisons: ash"))
    assert "simultaneous 97.5 % intervals" in read(first.caption)
    assert "hold together over the 2 responses with 95 %" in read(first.notes[1])


# equivalence


def test_equivalence_shows_margin_source_both_tests_and_the_interval():
    part = section("separate variances", "Equivalence")
    assert "Margin -0.5 to 0.5 g/100 g, from invented contract of supply, annex 2." in words(part)
    assert "Margin -1 to 2 g/100 g, whose source the plan does not state." in words(part)
    first, second, third = [one for one in tables(part) if "one-sided tests" not in read(one.caption)]
    assert heads(first)[-4:] == ["p, lower margin", "p, upper margin", "Adjusted p", "Equivalence"]
    assert "with 90 % intervals" in read(first.caption)
    # alpha 0.025 for each side, over six pairs: 1 - 2 * 0.025 / 6
    assert "with 99.17 % intervals" in read(second.caption)
    assert "Non-inferiority, not higher by 1.5 percent, with 95 % bounds." in read(third.caption)
    assert "p, lower margin" not in heads(third)
    assert all(row[2] == "-∞" for row in rows(third))


def test_a_difference_and_equivalence_may_both_be_shown():
    content = CASES["two responses"]()
    found = content.findings.responses[1]
    difference, equal = found.comparisons[0], found.equivalence[0]
    both = [
        a.label
        for a in difference.rows
        for b in equal.rows
        if a.label == b.label and a.verdict == "difference shown" and b.verdict == "equivalence shown"
    ]
    assert both
    verdicts = {one.verdict for one in composed("two responses").cards}
    assert {"Equivalence shown in all 3 pairs", "Difference shown in 1 of 3 comparisons"} <= verdicts


def test_an_equivalence_card_counts_its_pairs_and_shows_the_interval():
    found = card("two responses", "ash · ash within 0.02 g/100 g · two one-sided tests, Holm")
    assert found.verdict == "Equivalence shown in 2 of 3 pairs"
    assert "95 % interval" in read(found.lines[0])
    assert found.picture is not None


# spread, precision, criteria


@pytest.mark.requirement("WORDS-4")
def test_ratios_of_variances_have_intervals():
    (table,) = tables(section("separate variances", "Spread"))
    spread = CASES["separate variances"]().findings.responses[0].spread
    assert [row[0] for row in rows(table)] == [row.label for row in spread.rows]
    assert all("–" not in row[2:4] for row in rows(table))


@pytest.mark.requirement("REPORT-5")
@pytest.mark.parametrize("case", ["separate variances", "balanced"])
def test_the_standard_deviation_of_each_level_stands_once_with_its_interval(case):
    (table,) = tables(section(case, "Data"))
    levels = CASES[case]().findings.responses[0].levels
    assert heads(table).count("Standard deviation") == 1
    place = heads(table).index("Standard deviation")
    for row, level in zip(rows(table), levels, strict=True):
        assert [float(end) for end in row[place + 1 : place + 3]] == pytest.approx(level.sd_ci, rel=0.02)
    captions = " ".join(read(table.caption) for part in composed(case).sections for table in tables(part))
    assert captions.count("For the standard deviation") == 1


def test_long_figures_are_spread_over_tables_of_their_proper_size():
    found = tables(section("huge offset", "Data"))
    assert len(found) > 1
    assert sum(heads(table).count("Standard deviation") for table in found) == 1
    assert sum(heads(table).count("Largest") for table in found) == 1


@pytest.mark.requirement("REPORT-19")
def test_the_total_has_the_name_that_the_plan_gives_it():
    (precision, means) = tables(section("random days", "Precision"))
    assert [row[0] for row in rows(precision)] == [
        "Repeatability, within a level",
        "Between levels",
        "Intermediate precision",
    ]
    assert [row[0] for row in rows(means)] == ["Between levels (to state)", "Pooled"]
    text = words(section("random days", "Precision"))
    assert "What varied from level to level, by the plan: day and analyst." in text
    assert "within one laboratory the total is the intermediate precision" in text
    assert "it is called no more than that" in words(section("no spread between days", "Precision"))
    assert rows(tables(section("no spread between days", "Precision"))[0])[2][0] == "Total"


def test_a_negative_component_is_shown_and_reported_as_zero():
    part = section("no spread between days", "Precision")
    assert rows(tables(part)[0])[1][1] == "0"
    assert facts(part)["Between-level variance"].startswith("-0.000")
    assert facts(part)["Between-level variance"].endswith("negative, so kept here and reported as 0 above")


def test_fixed_levels_have_their_repeatability_alone():
    part = section("nothing to compare", "Precision")
    assert "the precision here is the repeatability alone" in words(part)
    assert len(tables(part)[0].rows) == 1


@pytest.mark.requirement("PLAN-13")
def test_a_criterion_shows_value_limit_and_verdict():
    (table,) = tables(section("two responses", "Acceptance criteria: ash"))
    assert rows(table) == [
        [
            "largest difference of two level means",
            "0.0310 g/100 g",
            "at most 0.03 g/100 g",
            "criterion not met",
        ],
        ["relative standard deviation of near-infrared portable", "1.05 %", "at most 2.5 %", "criterion met"],
    ]


def test_a_value_is_printed_in_digits_that_tell_it_from_its_limit():
    content = CASES["random days"]()
    found = content.findings.responses[0]
    close = replace(found.criteria[0], value=Fraction("0.60004"), verdict="criterion not met")
    responses = (replace(found, criteria=(close,)),)
    changed = replace(content, findings=replace(content.findings, responses=responses))
    (part,) = [part for part in compose(changed).sections if part.title == "Acceptance criteria"]
    assert rows(tables(part)[0])[0][1:3] == ["0.60004 %", "at most 0.6 %"]


def test_criteria_that_are_not_met_come_first_on_their_card():
    found = card("two responses", "ash · acceptance criteria")
    assert found.verdict == "1 of 2 limits not met"
    assert read(found.lines[0]).endswith("not met")


# what is not there


def test_questions_without_an_answer_keep_their_card_with_the_reason():
    verdicts = [(read(one.family), one.verdict) for one in composed("nothing to compare").cards]
    assert [family for family, verdict in verdicts if verdict == "Not assessable"] == [
        "analysis of variance",
        "against scale 1",
        "within 0.1 g",
        "variances against scale 1",
    ]


def test_with_several_responses_a_gap_names_the_one_it_is_about():
    content = CASES["two responses"]()
    gap = NotReported("comparison: planned contrasts", "no reason", "protein")
    changed = replace(content, findings=replace(content.findings, not_reported=(gap,)))
    (part,) = [part for part in compose(changed).sections if part.title == "Asked for and not reported"]
    assert words(part) == "protein, comparison: planned contrasts. No reason."


def test_each_response_has_its_own_listing():
    listings = [block for block in section("two responses", "Data listing").blocks if block.kind == "listing"]
    assert ["ash" in read(block.caption) for block in listings] == [True, False]
    assert ["protein" in read(block.caption) for block in listings] == [False, True]
