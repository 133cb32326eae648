"""What a study definition says of the files, codes, units and facts of data as laboratories have them."""

from fractions import Fraction

import pytest

from assayfolio.errors import Place
from assayfolio.study.paths import is_pattern
from assayfolio.study.plan import DataPlan, MeasurementFact, WorksheetPlan
from study.examples import RECEIVED, SMALLEST, edited, faults_of, study_of, with_data


def test_every_part_of_data_as_received_arrives_as_a_typed_value() -> None:
    study = study_of(RECEIVED)
    assert study.data == DataPlan(
        file="data/monday.csv",
        files=("data/monday.csv", "data/tuesday.txt.gz", "data/late.XLSX"),
        encoding="windows-1252",
        sheet="Results",
        header_row=4,
        layout="long",
        response=("nitrate",),
        factor="instrument",
        unit="mg/L",
        unit_column="unit",
        convert=(("ug/L", Fraction(1, 1000)), ("g/L", Fraction(1000))),
        order="position",
        levels=("reference", "north", "south"),
        replicates=(("reference", 6), ("north", 4), ("south", 2)),
        replicate_unit="sample",
        missing="omit",
        missing_codes=("n.d.", "-"),
        below_limit="half-limit",
        limit_codes=(("ND", Fraction(1, 20)), ("trace", Fraction(1, 8))),
        above_limit="limit",
        decimal_mark="comma",
        exclusions="data/left-out.yaml",
    )
    assert study.worksheet == WorksheetPlan(
        20311201, "day", ("monday", "tuesday"), "WP", Place("plan.yaml", 35, 12)
    )


def test_a_fact_is_one_text_or_a_column_and_comes_in_the_order_of_the_keys() -> None:
    assert study_of(RECEIVED).measurement == (
        MeasurementFact("measurand", "nitrate nitrogen", None),
        MeasurementFact("method", "ISO 10304-1", None),
        MeasurementFact("method-version", "2007", None),
        MeasurementFact("item", None, "sample"),
        MeasurementFact("lot", "{column: lot}", None),
        MeasurementFact("instrument", None, "instrument"),
        MeasurementFact("operator", None, "analyst"),
        MeasurementFact("measured-at", None, "date"),
        MeasurementFact("supplied-by", "Invented Waters", None),
    )
    swapped = SMALLEST + "measurement: {operator: Somebody, measurand: mass}\n"
    assert [fact.key for fact in study_of(swapped).measurement] == ["measurand", "operator"]


def test_a_definition_knows_where_its_facts_stand() -> None:
    study = study_of(RECEIVED)
    assert study.place_of("measurement") == Place("plan.yaml", 25, 1)
    assert study.place_of("measurement.item") == Place("plan.yaml", 29, 3)
    assert study.place_of("data.convert") == Place("plan.yaml", 13, 3)


def test_one_file_is_its_own_only_source() -> None:
    assert (study_of(SMALLEST).data.files, study_of(SMALLEST).data.sources) == ((), ("values.csv",))


@pytest.mark.parametrize(
    ("typed", "sources"),
    [
        ("[a.csv]", ("a.csv",)),
        ("[b.csv, a.csv]", ("b.csv", "a.csv")),
        ('"data/run-*.csv"', ("data/run-*.csv",)),
        ('"run-?.xlsx"', ("run-?.xlsx",)),
        ("data/run-[1].csv", ("data/run-[1].csv",)),
    ],
)
def test_several_files_are_a_list_in_its_order_or_one_pattern(typed: str, sources: tuple[str, ...]) -> None:
    data = study_of(edited(SMALLEST, "values.csv", typed)).data
    assert (data.file, data.sources) == (sources[0], sources)
    assert bool(data.files) == (sources[0].startswith(("a", "b")) or is_pattern(sources[0]))


def test_one_code_is_a_list_of_one() -> None:
    data = study_of(with_data("missing: omit", "missing-codes: n/a")).data
    assert data.missing_codes == ("n/a",)


def test_a_code_may_look_like_a_number_since_it_is_compared_as_typed() -> None:
    data = study_of(with_data("missing: omit", "missing-codes: [-999, 0.00]")).data
    assert data.missing_codes == ("-999", "0.00")


@pytest.mark.parametrize("limit", ["0", "-1", "-0.5"])
def test_a_limit_that_is_not_halved_may_be_any_decimal(limit: str) -> None:
    data = study_of(with_data("below-limit: limit", f"limit-codes: {{low: {limit}}}")).data
    assert data.limit_codes == (("low", Fraction(limit)),)


@pytest.mark.parametrize("factor", ["1/1000", "0.001", "1e-3"])
def test_a_factor_is_exactly_the_number_that_was_typed(factor: str) -> None:
    data = study_of(with_data("unit: g", "unit-column: u", f"convert: {{mg: {factor}}}")).data
    assert data.convert == (("mg", Fraction(1, 1000)),)


def test_one_unit_for_every_response_may_stand_in_one_column() -> None:
    text = edited(with_data("unit: {mass: g, ash: g}", "unit-column: u"), "mass\n", "[mass, ash]\n")
    assert study_of(text).data.unit_column == "u"


def test_a_fact_may_stand_in_the_column_of_levels_or_of_repeats_or_blocks() -> None:
    text = with_data("levels: [a, b]", "replicates: 4", "replicate-unit: sample") + (
        "measurement: {instrument: {column: balance}, item: {column: sample}, operator: {column: analyst}}\n"
        "worksheet: {seed: 0, block: analyst, blocks: [one, two]}\n"
    )
    assert faults_of(text) == []


def test_a_worksheet_without_blocks_is_one_complete_shuffle() -> None:
    text = with_data("levels: [a, b]", "replicates: 5") + "worksheet: {seed: 9007199254740991}\n"
    assert study_of(text).worksheet == WorksheetPlan(2**53 - 1, None, (), None, Place("plan.yaml", 10, 12))
