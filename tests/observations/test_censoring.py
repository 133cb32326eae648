"""Missing values and values beyond a limit: what they become is what the plan says, and nothing else."""

from dataclasses import replace
from fractions import Fraction

import pytest

from assayfolio.errors import DataError
from assayfolio.exact import Decimal10, NotADecimalError
from assayfolio.observations.censoring import CellReader, Reading
from assayfolio.study.plan import DataPlan
from support.received import long_lines, read, read_one, study_with

PLAN = DataPlan("d.csv", ("content",), "lot")
CODED = DataPlan(
    "d.csv",
    ("content",),
    "lot",
    missing_codes=("n.d.", "-", "-999"),
    limit_codes=(("ND", Fraction(1, 20)), ("<LOQ", Fraction(1, 10))),
)
LINES = long_lines({"a": ["0.31", "<0.05", "0.42"], "b": ["0.52", "0.61", "<0.10"]})


def faults_of(more: str, lines: list[str]) -> list[str]:
    with pytest.raises(DataError) as caught:
        read(study_with(more), lines)
    return [str(fault) for fault in caught.value.faults]


class TestWhatACellSays:
    @pytest.mark.parametrize(
        ("cell", "kind", "number"),
        [
            ("0.05", "measured", Decimal10(5, -2)),
            (" 1.50\t", "measured", Decimal10(150, -2)),
            ("<0.05", "below limit", Decimal10(5, -2)),
            ("< 0.05 ", "below limit", Decimal10(5, -2)),
            (">20", "above limit", Decimal10(20, 0)),
            ("<1e-3", "below limit", Decimal10(1, -3)),
            ("", "missing", None),
            (" \t", "missing", None),
        ],
    )
    def test_a_number_a_limit_or_nothing(self, cell, kind, number):
        assert CellReader(PLAN).read(cell) == Reading(kind, number)

    @pytest.mark.parametrize("cell", ["n.d.", " n.d. ", "-", "-999"])
    def test_a_declared_code_stands_for_a_missing_value_even_where_it_is_a_number(self, cell):
        assert CellReader(CODED).read(cell) == Reading("missing", None)

    def test_a_declared_code_stands_for_its_limit(self):
        reader = CellReader(CODED)
        assert reader.read("ND") == Reading("below limit", Decimal10(5, -2), coded=True)
        assert reader.read("<LOQ") == Reading("below limit", Decimal10(1, -1), coded=True)

    @pytest.mark.parametrize(
        "cell", ["ND", "n.d.", "N/A", "<", "> ", "<x", "<<1", "<=0.05", "\u22640.05", "~1", "1<2", "nan", "-"]
    )
    def test_nothing_else_is_taken_for_a_value(self, cell):
        with pytest.raises(NotADecimalError):
            CellReader(PLAN).read(cell)

    def test_codes_are_taken_as_typed(self):
        with pytest.raises(NotADecimalError):
            CellReader(CODED).read("nd")

    def test_a_limit_has_the_decimal_mark_of_the_plan(self):
        comma = DataPlan("d.csv", ("content",), "lot", decimal_mark="comma")
        assert CellReader(comma).read("<0,05") == Reading("below limit", Decimal10(5, -2))
        with pytest.raises(NotADecimalError):
            CellReader(comma).read("<0.05")


class TestRefused:
    """Without a policy nothing is left out and nothing put in; the place and the way out are named."""

    def test_a_blank_value(self):
        (fault,) = faults_of("", long_lines({"a": ["1", ""], "b": ["2", "3"]}))
        assert fault.startswith("values.csv:3:3: column `content` is blank - keep the original")
        assert "`missing: omit`" in fault

    @pytest.mark.parametrize(("cell", "key"), [("<0.05", "below-limit"), (">20", "above-limit")])
    def test_a_value_beyond_a_limit(self, cell, key):
        (fault,) = faults_of("missing: omit", long_lines({"a": ["1", cell], "b": ["2", "3"]}))
        assert f"values.csv:3:3: column `content` holds `{cell}`: a value reported against a limit" in fault
        assert f"`{key}`" in fault

    def test_a_limit_that_has_no_half_below_it(self):
        (fault,) = faults_of("below-limit: half-limit", long_lines({"a": ["1", "<0"], "b": ["2", "3"]}))
        assert "half of a limit that is not above zero" in fault

    def test_every_such_cell_is_told_in_one_pass(self):
        lines = long_lines({"a": ["", "<1", ">2"], "b": ["x", "3"]})
        assert [fault.split(": ")[0] for fault in faults_of("", lines)] == [
            f"values.csv:{line}:3" for line in (2, 3, 4, 5)
        ]

    def test_a_policy_for_one_kind_is_none_for_another(self):
        lines = long_lines({"a": ["1", "<1", ">2"], "b": ["3", "4"]})
        (fault,) = faults_of("below-limit: omit", lines)
        assert "`>2`" in fault


class TestPolicies:
    def test_omitted_values_are_set_aside_with_the_cause_and_the_limit(self):
        found = read_one("below-limit: omit", LINES)
        assert [(row.text, row.kind) for row in found.rows] == [
            (text, "measured") for text in ("0.31", "0.42", "0.52", "0.61")
        ]
        assert [(one.line, one.level, one.text, one.cause, one.value) for one in found.set_aside] == [
            (3, "a", "<0.05", "below limit", Decimal10(5, -2)),
            (7, "b", "<0.10", "below limit", Decimal10(10, -2)),
        ]

    def test_half_the_limit_is_put_in_exactly_and_the_text_stays(self):
        found = read_one("below-limit: half-limit", LINES)
        replaced = [row for row in found.rows if row.kind == "below limit"]
        assert [(row.text, row.value.fraction) for row in replaced] == [
            ("<0.05", Fraction(1, 40)),
            ("<0.10", Fraction(1, 20)),
        ]
        assert [row.limit.fraction for row in replaced if row.limit] == [Fraction(1, 20), Fraction(1, 10)]
        assert found.set_aside == ()
        assert found.places == 2

    def test_the_limit_is_put_in_exactly(self):
        found = read_one("below-limit: limit", LINES)
        assert [row.value for row in found.rows if row.kind == "below limit"] == [
            Decimal10(5, -2),
            Decimal10(10, -2),
        ]

    def test_a_value_above_a_limit_is_omitted_or_the_limit(self):
        lines = long_lines({"a": ["1", ">20"], "b": ["2", "3"]})
        omitted, put_in = read_one("above-limit: omit", lines), read_one("above-limit: limit", lines)
        assert [one.cause for one in omitted.set_aside] == ["above limit"]
        assert [row.text for row in omitted.rows] == ["1", "2", "3"]
        assert [(row.text, row.kind, row.value) for row in put_in.rows][1] == (
            ">20",
            "above limit",
            Decimal10(20, 0),
        )

    def test_missing_values_are_set_aside_with_what_stood_there(self):
        more = 'missing: omit, missing-codes: [n.d., "-"]'
        found = read_one(more, long_lines({"a": ["1", "n.d.", "2"], "b": ["-", "3", ""]}))
        assert [(one.line, one.text, one.cause, one.value) for one in found.set_aside] == [
            (3, "n.d.", "missing", None),
            (5, "-", "missing", None),
            (7, "", "missing", None),
        ]
        assert [row.line for row in found.rows] == [2, 4, 6]

    def test_a_limit_code_is_treated_as_its_limit(self):
        found = read_one(
            "below-limit: half-limit, limit-codes: {ND: 0.05}",
            long_lines({"a": ["1", "ND"], "b": ["2", "3"]}),
        )
        assert [(row.text, row.value.fraction) for row in found.rows][1] == ("ND", Fraction(1, 40))


class TestUnderEachPolicy:
    def test_every_policy_is_kept_beside_the_planned_one(self):
        found = read_one("below-limit: half-limit", LINES)
        by_policy = dict(found.under_policies)
        assert list(by_policy) == ["omit", "half-limit", "limit"]
        assert by_policy["half-limit"] is found.rows
        for policy, rows in by_policy.items():
            assert rows == read_one(f"below-limit: {policy}", LINES).rows

    def test_there_is_none_where_no_value_lies_below_a_limit(self):
        lines = long_lines({"a": ["1", ">20"], "b": ["2", "3"]})
        assert read_one("below-limit: omit, above-limit: omit", lines).under_policies == ()

    def test_half_limit_is_none_where_a_limit_is_not_above_zero(self):
        found = read_one("below-limit: limit", long_lines({"a": ["1", "<-3"], "b": ["2", "<3"]}))
        assert [policy for policy, _ in found.under_policies] == ["omit", "limit"]


def test_each_response_has_its_own_missing_values():
    plan = DataPlan("values.csv", ("content", "ash"), "lot", missing="omit")
    lines = ["lot,content,ash", "a,1,10", "a,,11", "b,3,", "b,4,13"]
    content, ash = read(replace(study_with(), data=plan), lines)
    assert [row.line for row in content.rows] == [2, 4, 5]
    assert [row.line for row in ash.rows] == [2, 3, 5]
    assert [counts.received for counts in content.flow] == [counts.received for counts in ash.flow] == [2, 2]
