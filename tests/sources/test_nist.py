"""The reader of the published reference files finds all that they certify."""

import re

import pytest

from assayfolio.exact import parse_decimal
from assayfolio.observations.reading import read_observations
from assayfolio.study.plan import DataPlan
from sources.nist import NAMES, all_datasets, as_csv, read_dataset


def test_eleven_files_certify_77_values_of_15_digits() -> None:
    datasets = all_datasets()
    printed = [value for dataset in datasets for value in dataset.certified.values()]
    assert len(datasets) == 11
    assert len(printed) == 77
    assert all(re.fullmatch(r"\d\.\d{14}E[+-]\d{2}", value) for value in printed)


@pytest.mark.parametrize("name", NAMES)
def test_every_row_that_the_file_states_is_read(name: str) -> None:
    dataset = read_dataset(name)
    degrees = dataset.degrees_of_freedom
    assert len(dataset.rows) == dataset.stated_observations
    assert len(dataset.groups) == degrees["between"] + 1
    assert len(dataset.rows) == degrees["between"] + degrees["within"] + 1


def test_a_value_is_the_decimal_that_was_printed() -> None:
    assert read_dataset("AtmWtAg").rows[0] == ("1", "107.8681568")
    assert read_dataset("AtmWtAg").certified["f"] == "1.59467335677930E+01"
    assert read_dataset("SmLs09").rows[0] == ("1", "1000000000000.4")


@pytest.mark.parametrize("name", NAMES)
def test_the_rows_come_back_exactly_through_a_data_file(name: str) -> None:
    dataset = read_dataset(name)
    plan = DataPlan("values.csv", ("response",), "treatment")
    observations = read_observations(as_csv(dataset), plan, "values.csv")
    assert [(row.level, row.text) for row in observations.rows] == list(dataset.rows)
    for level, values in dataset.groups.items():
        assert observations.values_of(level) == tuple(parse_decimal(value) for value in values)
