"""Units: a value has the unit of the plan, or is converted by an exact factor that the plan gives."""

from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.errors import DataError
from assayfolio.exact import Decimal10
from assayfolio.observations.units import UnitConversion, UnitError
from assayfolio.study.plan import DataPlan
from support.received import read, read_one, study_with

UNITS = "unit: mg/L, unit-column: unit"
CONVERTED = f"{UNITS}, convert: {{ug/L: 1/1000, g/L: 1000, grain: 64799/1000}}"


def lines(*rows: str) -> list[str]:
    return ["lot,content,unit", *rows]


def faults_of(more: str, given_lines: list[str], parts: str = "") -> list[str]:
    with pytest.raises(DataError) as caught:
        read(study_with(more, parts), given_lines)
    return [str(fault) for fault in caught.value.faults]


def test_values_in_the_unit_of_the_plan_are_taken_as_they_are():
    found = read_one(UNITS, lines("a,1.50,mg/L", "a,2.5, mg/L ", "b,3,mg/L"))
    assert [row.value for row in found.rows] == [Decimal10(150, -2), Decimal10(25, -1), Decimal10(3, 0)]


@pytest.mark.requirement("SOURCE-3")
def test_another_unit_is_refused_with_its_place():
    (fault,) = faults_of(UNITS, lines("a,1,mg/L", "a,2,ug/L", "b,3,mg/L"))
    assert fault.startswith("values.csv:3:5: column `unit` holds `ug/L`; the study has `mg/L`")
    assert "`convert: {ug/L: ...}`" in fault


@pytest.mark.parametrize("unit", ["MG/L", "mg / L", "mg/l"])
def test_a_unit_that_is_only_alike_is_another_unit(unit):
    assert len(faults_of(UNITS, lines("a,1,mg/L", f"a,2,{unit}", "b,3,mg/L"))) == 1


@pytest.mark.requirement("SOURCE-5")
def test_a_blank_unit_is_refused():
    (fault,) = faults_of(CONVERTED, lines("a,1,mg/L", "a,2, ", "b,3,mg/L"))
    assert fault.startswith("values.csv:3:5: column `unit` is blank")


def test_conversion_is_exact_and_the_text_stays():
    found = read_one(CONVERTED, lines("a,412,ug/L", "a,0.00150,g/L", "b,3,grain", "b,1.1,mg/L"))
    assert [row.text for row in found.rows] == ["412", "0.00150", "3", "1.1"]
    assert [row.value.fraction for row in found.rows] == [
        Fraction(412, 1000),
        Fraction(3, 2),
        Fraction(194397, 1000),
        Fraction(11, 10),
    ]


def test_a_limit_is_converted_as_a_value_is_and_a_declared_one_stands_in_the_plans_unit():
    more = f"{CONVERTED}, below-limit: limit, limit-codes: {{ND: 0.05}}"
    found = read_one(more, lines("a,<50,ug/L", "a,ND,ug/L", "b,3,mg/L", "b,4,mg/L"))
    assert [row.value.fraction for row in found.rows[:2]] == [Fraction(1, 20), Fraction(1, 20)]


def test_a_missing_value_needs_no_unit():
    found = read_one(f"{UNITS}, missing: omit", lines("a,1,mg/L", "a,,", "b,3,mg/L", "b,4,mg/L"))
    assert [one.line for one in found.set_aside] == [3]


@given(
    st.integers(-(10**12), 10**12),
    st.integers(-8, 4),
    st.fractions(min_value=Fraction(1, 10**6), max_value=10**6, max_denominator=10**6),
)
def test_whatever_the_factor_no_digit_is_lost(mantissa, exponent, factor):
    plan = DataPlan("d.csv", ("y",), "g", unit="mg/L", unit_column="unit", convert=(("x", factor),))
    found = UnitConversion(plan, "y").factor("x")
    assert found == factor
    value = Decimal10(mantissa, exponent)
    assert value.times(factor).fraction == value.fraction * factor


def test_nothing_is_converted_that_the_plan_does_not_convert():
    plan = DataPlan("d.csv", ("y",), "g", unit="mg/L", unit_column="unit")
    conversion = UnitConversion(plan, "y")
    assert conversion.factor("mg/L") is None
    with pytest.raises(UnitError):
        conversion.factor("mg/dL")


class TestMeasurementFacts:
    """Columns that the plan takes facts of the measurements from are filled in on every row."""

    PARTS = "measurement: {method: ISO 10304-1, operator: {column: analyst}, item: {column: sample}}\n"

    def test_blanks_are_told_row_by_row(self):
        given_lines = ["lot,content,analyst,sample", "a,1,AA,s1", "a,2,,s2", "b,3,BB, ", "b,4,,"]
        assert [fault.split(" - ")[0] for fault in faults_of("", given_lines, self.PARTS)] == [
            "values.csv:3:5: column `analyst` is blank",
            "values.csv:4:8: column `sample` is blank",
            "values.csv:5:5: column `analyst` is blank",
            "values.csv:5:6: column `sample` is blank",
        ]

    def test_filled_columns_are_carried_along(self):
        given_lines = ["lot,content,analyst,sample", "a,1,AA,s1", "a,2,AA,s2", "b,3,BB,s3", "b,4,BB,s4"]
        found = read_one("", given_lines, parts=self.PARTS)
        assert found.extra_columns == ("analyst", "sample")
        assert found.rows[2].extras == ("BB", "s3")
