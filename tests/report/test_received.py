"""What became of every value on its way to the analysis stands in the report, and the counts add up."""

import re
from dataclasses import replace
from fractions import Fraction
from functools import cache

import pytest

from assayfolio.errors import RenderingError
from assayfolio.report.alternatives import Side, side_by_side
from assayfolio.report.basis import Basis
from assayfolio.report.compose import compose
from assayfolio.report.content import ReportContent, Section
from assayfolio.report.numbering import Numbering
from assayfolio.report.prose import legible, plain, prose
from assayfolio.report.tables import Column, Table
from report.cases import CASES
from report.samples import report_input
from report.samples_received import EXCLUDED, NAMES

EXCLUDING = ["wells", "plain exclusion"]


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


def table(part: Section, beginning: str) -> Table:
    (found,) = [one for one in tables(part) if read(one.caption).startswith(beginning)]
    return found


def rows(found: Table) -> list[list[str]]:
    return [[read(cell.words) for cell in row] for row in found.rows]


def sentences(part: Section) -> str:
    """The paragraphs and lists of a section."""
    texts = [read(block.words) for block in part.blocks if block.kind == "paragraph"]
    texts += [read(item) for block in part.blocks if block.kind == "items" for item in block.items]
    return " ".join(texts)


def facts(part: Section) -> dict[str, str]:
    listed = [entry for block in part.blocks if block.kind == "facts" for entry in block.entries]
    return {read(entry.what): read(entry.value) for entry in listed}


def line(case: str, what: str) -> str:
    (found,) = [one for one in composed(case).summary if one.what == what]
    return read(found.words)


def lines(case: str) -> list[str]:
    return [one.what for one in composed(case).summary]


def titles(case: str) -> list[str]:
    return [one.title for one in composed(case).sections]


# the counts


def test_each_row_of_the_counts_adds_up_to_what_is_analysed():
    counts = rows(table(section("wells", "Data"), "Values of nitrite from received to analysed"))
    assert [row[0] for row in counts] == ["bench", "field-east", "field-west", "All levels"]
    for _, received, *left_out, analysed in counts:
        assert int(received) - sum(map(int, left_out)) == int(analysed)


def test_the_last_row_of_the_counts_is_their_sum():
    *levels, total = rows(table(section("wells", "Data"), "Values of nitrite from received to analysed"))
    for column in range(1, len(total)):
        assert sum(int(row[column]) for row in levels) == int(total[column])


def test_the_counts_of_each_level_are_those_of_the_findings():
    found = CASES["wells"]().findings.responses[0]
    counts = rows(table(section("wells", "Data"), "Values of nitrite from received to analysed"))
    for row, flow in zip(counts, found.flow, strict=False):
        wanted = [flow.received, flow.missing, flow.excluded, flow.merged, flow.analysed]
        assert row == [flow.level, *map(str, wanted)]


def test_the_first_page_has_the_counts_in_one_line():
    words = "23 received, 1 missing, 2 excluded, 5 fewer by averaging repeats, 15 analysed"
    assert line("wells", "Data").startswith(words)


@pytest.mark.parametrize("case", CASES)
def test_the_first_page_counts_every_value_that_was_received_and_every_one_that_is_analysed(case):
    for found in CASES[case]().findings.responses:
        received = sum(flow.received for flow in found.flow)
        assert f"{received} received, " in line(case, "Data")
        assert f"{sum(level.n for level in found.levels)} analysed" in line(case, "Data")


def test_counts_that_do_not_add_up_are_no_report():
    content = CASES["balanced"]()
    (found,) = content.findings.responses
    wrong = (replace(found.flow[0], received=found.flow[0].received + 1), *found.flow[1:])
    changed = replace(content.findings, responses=(replace(found, flow=wrong),))
    with pytest.raises(RenderingError, match="do not add up"):
        compose(replace(content, findings=changed))


def test_counts_of_other_numbers_of_values_are_no_report():
    content = CASES["balanced"]()
    (found,) = content.findings.responses
    one_less = replace(found.flow[0], received=5, analysed=5)
    changed = replace(content.findings, responses=(replace(found, flow=(one_less, *found.flow[1:])),))
    with pytest.raises(RenderingError, match="not those of the levels"):
        compose(replace(content, findings=changed))


def test_responses_with_different_counts_are_told_one_by_one():
    content = CASES["two responses"]()
    first, second = content.observations
    shorter = replace(
        second,
        rows=second.rows[1:],
        flow=tuple(
            replace(one, missing=1, analysed=one.analysed - 1) if one.level == second.rows[0].level else one
            for one in second.flow
        ),
    )
    (found,) = [
        one for one in compose(report_input(content.study, first, shorter)).summary if one.what == "Data"
    ]
    n = len(second.rows)
    assert f"{first.response}: {n} received, 0 excluded, {n} analysed" in read(found.words)
    assert f"{second.response}: {n} received, 1 missing, 0 excluded, {n - 1} analysed" in read(found.words)


# what does not apply is not there


@pytest.mark.parametrize("case", ["balanced", "two responses", "random days"])
def test_a_study_without_exclusions_limits_or_deviations_has_no_section_on_them(case):
    assert not [
        title for title in titles(case) if title.startswith(("Exclusions", "Values beyond", "Deviations"))
    ]
    assert not {"Exclusions", "Limits"} & set(lines(case))


def test_a_study_whose_values_are_all_analysed_as_received_says_so_and_has_no_table_of_counts():
    part = section("wells as planned", "Data")
    assert "18 received, 0 excluded, 18 analysed" in sentences(part)
    assert "Every value is analysed as it was received." in sentences(part)
    assert not [one for one in tables(part) if "from received to analysed" in read(one.caption)]


# exclusions


@pytest.mark.requirement("CHANGE-2")
@pytest.mark.parametrize("case", EXCLUDING)
def test_every_exclusion_stands_with_place_text_reason_persons_and_day(case):
    content = CASES[case]()
    files = [raw.file for raw in content.observations[0].files]
    shown = rows(table(section(case, "Exclusions"), "Values of nitrite that were excluded"))
    assert len(shown) == len(content.findings.exclusions) > 0
    for row, one in zip(shown, content.findings.exclusions, strict=True):
        place = f"{files.index(one.file) + 1}:{one.line}" if len(files) > 1 else str(one.line)
        assert row == [
            place, one.level, one.text, EXCLUDED[one.text], "D. Lund", "2026-09-22", "R. Thorne",
        ]  # fmt: skip


@pytest.mark.requirement("CHANGE-2")
@pytest.mark.parametrize("case", EXCLUDING)
def test_levels_stand_side_by_side_with_and_without_the_exclusions(case):
    content = CASES[case]()
    found = content.findings.responses[0]
    without = found.without_exclusions
    assert without is not None
    scale = Basis.of_each(content)[0].scale
    levels = table(section(case, "Exclusions"), "Levels of photometer")
    assert [(read(words), span) for words, span in levels.groups] == [
        ("", 1), ("as analysed", 3), ("with nothing excluded", 3),
    ]  # fmt: skip
    for row, with_it, without_it in zip(rows(levels), found.levels, without.levels, strict=True):
        assert row[0] == with_it.level
        assert row[1:3] == [str(with_it.n), read(scale.mean(with_it.mean))]
        assert row[4:6] == [str(without_it.n), read(scale.mean(without_it.mean))]
    assert sum(level.n for level in without.levels) > sum(level.n for level in found.levels)


@pytest.mark.parametrize("case", EXCLUDING)
def test_the_overall_test_stands_with_and_without_the_exclusions(case):
    found = CASES[case]().findings.responses[0]
    without = found.without_exclusions
    assert without is not None
    assert found.anova.f is not None
    assert without.anova.f is not None
    shown = rows(table(section(case, "Exclusions"), "Overall test (F test)"))
    assert [row[:3] for row in shown] == [
        ["as analysed", f"{float(found.anova.f):.3f}", f"2 and {found.anova.within.df}"],
        ["with nothing excluded", f"{float(without.anova.f):.3f}", f"2 and {without.anova.within.df}"],
    ]
    assert [row[-1] for row in shown] == [found.anova.verdict, without.anova.verdict]


@pytest.mark.parametrize("case", EXCLUDING)
def test_every_comparison_stands_with_and_without_the_exclusions(case):
    content = CASES[case]()
    found = content.findings.responses[0]
    without = found.without_exclusions
    assert without is not None
    basis = Basis.of_each(content)[0]
    for with_it, without_it in zip(found.comparisons, without.comparisons, strict=True):
        shown = rows(table(section(case, "Exclusions"), f"Comparisons, {with_it.name}."))
        cells = [cell for row in shown for cell in row]
        for one, other in zip(with_it.rows, without_it.rows, strict=True):
            assert read(basis.label(one)) in cells
            assert read(basis.difference_scale.mean(one.estimate)) in cells
            assert read(basis.difference_scale.mean(other.estimate)) in cells


def test_equivalence_variances_precision_and_criteria_are_compared_too():
    captions = [read(one.caption) for one in tables(section("wells", "Exclusions"))]
    for beginning in ("Equivalence, equivalent within", "Ratios of variances", "Precision", "Acceptance"):
        assert any(caption.startswith(beginning) for caption in captions), beginning


def test_a_verdict_that_is_another_with_nothing_excluded_is_named_on_the_first_page_and_in_the_section():
    assert "verdicts differ on variances field-east / bench" in line("wells", "Exclusions")
    assert (
        "variances field-east / bench (as analysed: difference not shown; with nothing excluded: difference "
        "shown)" in sentences(section("wells", "Exclusions"))
    )


def test_verdicts_that_agree_are_said_to_agree():
    words = line("plain exclusion", "Exclusions")
    assert words.startswith(
        "1 value excluded, with its reason; with and without it the verdict of the overall"
    )
    assert "those of all 5 comparisons" in words
    assert words.endswith("agree")
    assert "these are the same: the verdict of the overall test" in sentences(
        section("plain exclusion", "Exclusions")
    )


def test_an_exclusion_bears_on_the_other_response_where_both_are_adjusted_together():
    ash, fat = (section("one response excluded", f"Exclusions: {name}") for name in ("ash", "fat"))
    assert "1 value of ash excluded by decision of a person, with its reason" in sentences(ash)
    assert "No value of fat was excluded. As p is adjusted over the responses together" in sentences(fat)
    assert table(fat, "Levels of laboratory, fat").rows
    assert not [one for one in tables(fat) if "were excluded" in read(one.caption)]


def test_without_an_approver_the_table_says_that_no_approval_is_recorded():
    content = CASES["plain exclusion"]()
    unapproved = tuple(replace(one, approved_by=None) for one in content.findings.exclusions)
    changed = compose(replace(content, findings=replace(content.findings, exclusions=unapproved)))
    (part,) = [one for one in changed.sections if one.title == "Exclusions"]
    shown = tables(part)[0]
    assert "Approved by" not in [read(column.head) for column in shown.columns]
    assert [read(note) for note in shown.notes] == ["No approval is recorded for any of them."]


# values beyond a limit


def test_values_beyond_a_limit_are_counted_with_their_limits():
    (row,) = rows(table(section("wells", "Values beyond a limit"), "Values of nitrite beyond a limit"))
    assert row == ["field-west", "7", "3", "0.02; 0.08", "1", "0.2"]


def test_the_result_under_each_policy_stands_side_by_side():
    censoring = CASES["wells"]().findings.responses[0].censoring
    assert censoring is not None
    part = section("wells", "Values beyond a limit")
    overall = rows(table(part, "Overall test under each way"))
    assert [row[0] for row in overall] == ["omitted", "half the limit (planned)", "the limit"]
    assert [row[1] for row in overall] == [f"{one.p:.4f}" for one in censoring.sensitivity]
    means = rows(table(part, "Level means under each way"))
    numbers = [[level[1] for level in one.levels] for one in censoring.sensitivity]
    assert [[row[at] for row in means] for at in (1, 3, 5)] == [list(map(str, ns)) for ns in numbers]
    assert len({tuple(ns) for ns in numbers}) > 1
    for family in CASES["wells"]().findings.responses[0].comparisons:
        shown = table(part, f"Comparisons under each way, {family.name}.")
        assert len(shown.rows) == len(family.rows)


def test_the_first_page_says_which_verdicts_turn_over_with_the_policy():
    words = line("wells", "Limits")
    assert words.startswith("3 values below a limit, analysed as half the limit; 1 value above a limit")
    assert words.endswith(
        "verdicts differ on relative repeatability standard deviation (at most 40 %), "
        "largest difference of two level means (at most 0.03 mg/L)"
    )


def test_policies_that_disagree_are_named_with_their_verdicts():
    content = CASES["wells"]()
    found = content.findings.responses[0]
    assert found.censoring is not None
    omitted = replace(found.censoring.sensitivity[0], verdict="difference shown")
    censoring = replace(found.censoring, sensitivity=(omitted, *found.censoring.sensitivity[1:]))
    findings = replace(content.findings, responses=(replace(found, censoring=censoring),))
    changed = compose(replace(content, findings=findings))
    (part,) = [one for one in changed.sections if one.title == "Values beyond a limit"]
    assert (
        "overall test (omitted: difference shown; half the limit (planned): difference not shown; the limit: "
        "difference not shown)" in sentences(part)
    )
    (on_page_1,) = [one for one in changed.summary if one.what == "Limits"]
    assert "verdicts differ on overall test" in read(on_page_1.words)


# deviations


def test_every_deviation_stands_in_words_with_what_is_on_record():
    found = CASES["wells"]().findings.deviations
    shown = rows(table(section("wells", "Deviations"), "Deviations from the plan"))
    assert shown == [[read(one.what), one.reason] for one in found]
    assert any("position 4" in row[0] for row in shown)
    assert line("wells", "Deviations").startswith(f"{len(found)} deviations from the plan: {found[0].what}")


def test_a_kept_plan_says_what_was_looked_at():
    looked = "numbers of values, measuring order and labels of the worksheet"
    assert line("wells as planned", "Deviations").startswith(f"none found in {looked}")
    assert f"No deviation was found in {looked}" in sentences(section("wells as planned", "Plan"))


def test_a_plan_with_nothing_to_hold_against_the_data_does_not_claim_that_it_was_kept():
    words = line("balanced", "Deviations")
    assert re.search("the plan fixes n.* numbers of values .* worksheet", words)
    assert "none found in numbers of values" not in words
    assert "No deviation was found" not in sentences(section("balanced", "Plan"))


# files, units, repeats, measurements


def test_several_files_are_numbered_and_places_name_the_number():
    files = rows(table(section("wells", "Data"), "Data files, in the order"))
    sizes = [str(raw.size) for raw in CASES["wells"]().observations[0].files]
    form = "text, UTF-8, column names in line 4"
    assert files == [[str(at), NAMES[at - 1], form, sizes[at - 1]] for at in (1, 2)]


def test_lines_above_the_column_names_are_shown_as_typed():
    above = rows(table(section("wells", "Data"), f"What stands above the column names in {NAMES[0]}"))
    assert above == [["1", "Instrument", "photometers, three of them"], ["2", "Exported", "2026-09-22 17:04"]]


def test_units_repeats_and_missing_entries_are_accounted_for():
    words = sentences(section("wells", "Data"))
    assert "1 entry stands for a missing value (blank or “n.d.”); omitted, as planned." in words
    assert (
        "The unit of each value stands in column unit: 19 in mg/L; 1 in ug/L multiplied by exactly 0.001"
        in words
    )
    assert "9 repeats became 4 means" in words


@pytest.mark.requirement("REPORT-17", "SOURCE-9")
def test_facts_about_the_measurements_come_from_the_plan_or_from_their_column():
    found = facts(section("wells", "Data"))
    assert found["Measurand"] == "nitrite as nitrogen"
    assert found["Supplied by"] == "Tarn Valley waterworks"
    assert found["Operator"] == "C. Moor (11), D. Lund (9) (column analyst; numbers of analysed values)"


@pytest.mark.requirement("REPORT-17")
def test_what_the_measurements_tell_is_not_left_to_the_laboratorys_records():
    told, untold = (sentences(section(case, "Plan")) for case in ("wells", "balanced"))
    assert "persons who measured" in untold
    assert "persons who measured" not in told
    assert "environmental conditions" in told


# the listing


def test_every_entry_set_aside_is_listed_with_its_cause():
    aside = rows(table(section("wells", "Data listing"), "Entries of nitrite that were received"))
    number = section("wells", "Exclusions").number
    assert sorted(row[2:] for row in aside) == [
        ["0.098", f"excluded; reason in section {number}"],
        ["0.190", f"excluded; reason in section {number}"],
        ["n.d.", "missing"],
    ]


def test_repeats_stand_one_by_one_and_with_their_mean():
    content = CASES["wells"]()
    part = section("wells", "Data listing")
    (listing,) = [block for block in part.blocks if block.kind == "listing"]
    typed = [text for row in listing.rows for _, text, _ in row.values]
    otherwise = rows(table(part, "Values of nitrite that are analysed as another number"))
    means = {row[2]: row[3] for row in otherwise if row[4].startswith("mean of")}
    repeated = [row for row in content.observations[0].rows if row.repeats]
    assert len(means) == len(repeated)
    for row in repeated:
        assert all(one.text in typed for one in row.repeats)
        assert abs(Fraction(means[row.text]) - row.value.fraction) <= Fraction(1, 20000)


def test_what_was_put_in_or_converted_is_listed_beside_what_was_typed():
    otherwise = rows(
        table(section("wells", "Data listing"), "Values of nitrite that are analysed as another")
    )
    found = {row[2]: row[3:] for row in otherwise}
    assert found["<0.08"] == ["0.04", "half the limit"]
    assert found["ND"] == ["0.01", "ND stands for below 0.02: half the limit"]
    assert found[">0.2"] == ["0.2", "the limit"]
    assert found["91"] == ["0.091", "ug/L, times 0.001"]
    assert found["0.082; <0.08"] == ["0.0610", "mean of 2 repeats; half the limit"]


# the method, and text as it was typed


def test_the_method_tells_of_what_the_plan_asks_for_and_of_nothing_else():
    told, untold = (sentences(section(case, "Method")) for case in ("wells", "balanced"))
    for words in (
        "A value reported as below a limit is analysed as half the limit that stands with it, exactly.",
        "Repeats of one replicate are averaged exactly, as fractions",
        "Exclusions are decided by the persons named with them",
        "A value in ug/L is multiplied by exactly 0.001.",
    ):
        assert words in told
        assert words not in untold


@pytest.mark.parametrize(
    ("text", "shown"),
    [
        ("<b>0.2</b> {{ 7 }}", "<b>0.2</b> {{ 7 }}"),
        ("a\u202eb", "a<U+202E>b"),
        ("line\nend\x07", "line<U+000A>end<U+0007>"),
        ("x" * 1000, "x" * 240 + " … (1000 characters)"),
    ],
)
def test_a_cell_is_shown_as_typed_and_what_cannot_be_seen_by_its_number(text, shown):
    assert legible(text) == shown


def test_results_too_wide_to_stand_side_by_side_stand_one_below_the_other():
    columns = [Column("Estimate", "mg/L"), Column("p")]
    digits = "1234567890." * 4
    sides = [Side("as analysed", {"a": [digits, "0.5"]}), Side("otherwise", {"a": [digits, "0.4"]})]
    narrow = [Side(one.name, {"a": ["1.2", "0.5"]}) for one in sides]
    beside = side_by_side(Numbering(), prose("x"), "Row", columns, narrow)
    below = side_by_side(Numbering(), prose("x"), "Row", columns, sides)
    assert len(beside.rows) == 1
    assert [row[1] for row in rows(below)] == ["as analysed", "otherwise"]


def test_a_row_that_one_analysis_does_not_have_is_a_row_of_dashes():
    sides = [Side("one", {"a": ["1", "2"], "b": ["3", "4"]}), Side("other", {"a": ["5", "6"]})]
    shown = side_by_side(Numbering(), prose("x"), "Row", [Column("Estimate"), Column("p")], sides)
    assert rows(shown)[1] == ["b", "3", "4", "–", "–"]


@pytest.mark.needs("pdftotext")
@pytest.mark.parametrize("case", EXCLUDING)
def test_reasons_and_both_analyses_reach_the_page(case, pages_of):
    text = read("".join(pages_of(case)))
    assert all(one.reason in text for one in CASES[case]().findings.exclusions)
    assert "Results with and without the exclusions" in text
    assert text.count("with nothing excluded") >= 3
