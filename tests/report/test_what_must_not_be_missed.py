"""The first page says what must not be missed; what a plan does not assume is no departure from it."""

from dataclasses import replace

import pytest

from assayfolio.findings import CRITERION_MET, CRITERION_NOT_MET, NOT_ASSESSABLE, NotReported
from assayfolio.report.basis import Basis
from assayfolio.report.compose import compose
from assayfolio.report.criteria import criteria_count, quantity_name
from assayfolio.report.diagnostics import normal_plot
from assayfolio.report.numbering import Part
from assayfolio.report.prose import plain
from report.cases import CASES

WITH_CRITERIA = [case for case in CASES if CASES[case]().study.criteria]
SEPARATE = [case for case in CASES if CASES[case]().study.design.variances == "separate"]


def read(words: object) -> str:
    return plain(words).replace("\u00a0", " ").replace("\u202f", " ").replace("−", "-")


def line(content, what: str) -> str:
    (found,) = [one for one in content.summary if one.what == what]
    return read(found.words)


# acceptance criteria


@pytest.mark.parametrize("case", WITH_CRITERIA)
def test_every_criterion_not_met_is_named_on_the_first_page(case, pages_of):
    content = CASES[case]()
    first = pages_of(case)[0]
    for basis in Basis.of_each(content):
        for one in basis.response.criteria:
            if one.verdict != CRITERION_MET:
                assert quantity_name(basis, one.quantity, one.level) in first.replace("\u00a0", " ")
    assert criteria_count([one for found in content.findings.responses for one in found.criteria]) in first


@pytest.mark.parametrize("case", WITH_CRITERIA)
def test_the_criteria_come_right_after_the_overall_question(case):
    families = [read(card.family).split(" · ") for card in compose(CASES[case]()).cards]
    for place, family in enumerate(families):
        if "acceptance criteria" in family:
            assert "analysis of variance" in families[place - 1]


def test_the_line_on_criteria_leads_to_the_response_that_misses_one():
    content = CASES["two responses"]()
    missed = [
        any(one.verdict != CRITERION_MET for one in found.criteria) for found in content.findings.responses
    ]
    basis = Basis(content, missed.index(True))
    (found,) = [one for one in compose(content).summary if one.what == "Criteria"]
    assert found.anchor == basis.place(Part.CRITERIA).anchor


def test_both_limits_of_a_criterion_count():
    content = CASES["large numbers"]()
    composed = compose(content)
    assert len(content.study.criteria) == 2
    assert line(composed, "Criteria").startswith(
        "1 of 3 limits not met: largest difference of two level means"
    )
    (card,) = [card for card in composed.cards if read(card.family) == "acceptance criteria"]
    assert card.verdict == "1 of 3 limits not met"
    plan = composed.sections[0]
    planned = next(block.table for block in plan.blocks if block.kind == "table")
    assert [read(row[1].words) for row in planned.rows if read(row[0].words) == "Acceptance criteria"] == [
        "3 limits"
    ]


def test_counts_of_limits_name_what_is_amiss_first():
    (found,) = CASES["large numbers"]().findings.responses
    one = found.criteria[0]
    missed, unknown, met = (
        replace(one, verdict=v) for v in (CRITERION_NOT_MET, NOT_ASSESSABLE, CRITERION_MET)
    )
    assert criteria_count([met, missed, unknown, missed]) == "2 of 4 limits not met, 1 not assessable"
    assert criteria_count([met, unknown]) == "1 of 2 limits not assessable"
    assert criteria_count([met, met]) == "all 2 limits met"
    assert criteria_count([unknown]) == "not assessable"


@pytest.mark.requirement("PLAN-6")
def test_what_is_not_reported_is_named_on_the_first_page():
    content = CASES["two responses"]()
    gap = NotReported("comparison: planned contrasts", "no reason", "protein")
    changed = replace(content, findings=replace(content.findings, not_reported=(gap,)))
    assert line(compose(changed), "Not reported").endswith("protein, comparison: planned contrasts")


# separate variances


@pytest.mark.parametrize("case", SEPARATE)
def test_unequal_variances_are_no_departure_where_they_are_not_assumed(case):
    content = CASES[case]()
    checks = line(compose(content), "Checks")
    assert "equal variances are not assumed" in checks
    assert "departure is shown by Brown" not in checks


@pytest.mark.parametrize("case", SEPARATE)
def test_figures_speak_of_no_fault_in_unequal_spread(case):
    content = compose(CASES[case]())
    captions = " ".join(
        read(block.caption) for one in content.sections for block in one.blocks if block.kind == "figure"
    )
    assert "would speak against one variance" not in captions
    assert "each divided by the standard deviation of its level" in captions


@pytest.mark.parametrize("case", SEPARATE)
def test_the_normal_plot_takes_each_level_by_its_own_spread(case):
    basis = Basis(CASES[case]())
    assert "SD of its level" in normal_plot(basis, "#0f5b66").svg.decode()
    for level in basis.levels:
        rows = zip(basis.scaled_residuals, basis.observations.rows, strict=True)
        squares = sum(float(value) ** 2 for value, row in rows if row.level == level.level)
        assert squares == pytest.approx(level.n - 1)


def test_with_one_variance_residuals_are_as_they_are():
    basis = Basis(CASES["balanced"]())
    assert "SD of its level" not in normal_plot(basis, "#0f5b66").svg.decode()
    checks = compose(CASES["large numbers"]()).summary
    assert "not assumed" not in " ".join(read(one.words) for one in checks)


# what intervals and tests can be recomputed from


def tables_of(case: str, section: str):
    return [
        block.table
        for one in compose(CASES[case]()).sections
        if one.title.startswith(section)
        for block in one.blocks
        if block.kind == "table"
    ]


@pytest.mark.requirement("REPORT-1")
@pytest.mark.parametrize("case", ["balanced", "unequal", "trend", "two responses", "large numbers"])
def test_every_table_with_intervals_has_its_critical_value(case):
    families = [family for found in CASES[case]().findings.responses for family in found.comparisons]
    for family, table in zip(families, tables_of(case, "Comparisons"), strict=True):
        notes = " ".join(map(read, table.notes))
        assert ("c = " in notes) is (family.critical is not None)
        if family.critical is not None:
            assert f"c = {family.critical:.3f}, with {family.rows[0].df} degrees of freedom" in notes


def test_with_separate_variances_each_comparison_has_its_own_critical_value():
    (found,) = CASES["separate variances"]().findings.responses
    table = tables_of("separate variances", "Comparisons")[0]
    column = [read(one.head) for one in table.columns].index("c")
    expected = [f"{row.critical:.3f}" for row in found.comparisons[0].rows]
    assert [read(row[column].words) for row in table.rows] == expected


@pytest.mark.parametrize("case", ["two responses", "separate variances", "large numbers"])
def test_every_one_sided_test_stands_with_what_it_is_made_of(case):
    families = [family for found in CASES[case]().findings.responses for family in found.equivalence]
    tests = [one for one in tables_of(case, "Equivalence") if "one-sided tests of" in read(one.caption)]
    assert len(tests) == len(families)
    for family, table in zip(families, tests, strict=True):
        boundaries = [test for row in family.rows for test in row.boundaries]
        heads = [read(one.head) for one in table.columns]
        assert heads[1:5] == ["Margin", "t", "Standard error", "Degrees of freedom"]
        printed = [read(row[2].words) for row in table.rows]
        assert [float(text) for text in printed] == pytest.approx(
            [test.t.sign * float(test.t.square) ** 0.5 for test in boundaries], abs=6e-4
        )


def test_non_inferiority_is_headed_by_its_name():
    heads = [
        read(one.head) for table in tables_of("separate variances", "Equivalence") for one in table.columns
    ]
    assert "Non-inferiority" in heads
    assert "Within margin" not in heads


# precision


def test_the_spread_between_levels_has_its_interval():
    (found,) = CASES["random days"]().findings.responses
    row = tables_of("random days", "Precision")[0].rows[1]
    assert read(row[0].words) == "Between levels"
    assert [float(read(cell.words)) for cell in row[2:4]] == pytest.approx(
        found.precision.between_sd_ci, rel=0.02
    )


def test_the_reported_interval_of_the_total_is_said_to_be_it():
    (section,) = [one for one in compose(CASES["random days"]()).sections if one.title == "Precision"]
    (facts,) = [block for block in section.blocks if block.kind == "facts"]
    entries = {read(one.what): read(one.value) for one in facts.entries}
    assert entries["Interval of the total"].endswith("this is the one reported")
    assert entries["Second interval"].endswith("for comparison")
    assert "Williams and Tukey" in entries["Interval between levels"]


def test_relative_standard_deviations_name_the_mean_they_are_relative_to():
    notes = read(tables_of("random days", "Precision")[0].notes[0])
    basis = Basis(CASES["random days"]())
    mean = basis.scale.mean(basis.response.precision.relative_mean)
    assert f"in percent of the stated grand mean (mean of the level means, {mean} g/100 mL)" in notes


# planned power


def test_a_word_on_equivalence_stands_only_where_its_power_is_given():
    content = CASES["two responses"]()
    power = content.findings.power
    without = replace(power, rows=tuple(row for row in power.rows if "one-sided" not in row.method))
    for rows, expected in ((power, True), (without, False)):
        changed = replace(content, findings=replace(content.findings, power=rows))
        words = " ".join(
            read(block.words)
            for one in compose(changed).sections
            for block in one.blocks
            if block.kind == "paragraph"
        )
        assert ("the true difference is taken as" in words) is expected
