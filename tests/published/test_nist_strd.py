"""NIST's Statistical Reference Datasets, one-way analysis: all certified values to the last printed digit.

Source: NIST/ITL Statistical Reference Datasets, eleven one-way files (AtmWtAg, SiRstv, SmLs01 to SmLs09),
read from where scipy ships them. SmLs07 to SmLs09 carry thirteen common leading digits.
"""

import pytest

from assayfolio.exact import Root, to_double
from sources.nist import NAMES, read_dataset
from support.reference import analysed

CERTIFIED = ("between.ss", "between.ms", "f", "within.ss", "within.ms", "r_squared", "residual_sd")


def test_there_are_seventy_seven_certified_values():
    assert sum(len(read_dataset(name).certified) for name in NAMES) == 77


@pytest.mark.requirement("NUMBERS-1")
@pytest.mark.parametrize("name", NAMES)
def test_certified_values_are_equal_after_rounding_to_their_printed_digits(name):
    dataset = read_dataset(name)
    analysis = analysed(dataset.groups)
    computed = {
        "between.ss": analysis.ss_between,
        "between.ms": analysis.ms_between,
        "f": analysis.f,
        "within.ss": analysis.ss_within,
        "within.ms": analysis.ms_within,
        "r_squared": analysis.r_squared,
        "residual_sd": Root.of(analysis.ms_within),
    }
    printed = {key: f"{to_double(value):.14E}" for key, value in computed.items() if value is not None}
    assert printed == {key: dataset.certified[key] for key in CERTIFIED}


@pytest.mark.parametrize("name", NAMES)
def test_certified_degrees_of_freedom(name):
    dataset = read_dataset(name)
    analysis = analysed(dataset.groups)
    stated = dataset.degrees_of_freedom
    assert (analysis.df_between, analysis.df_within) == (stated["between"], stated["within"])
    assert analysis.n_total == dataset.stated_observations
