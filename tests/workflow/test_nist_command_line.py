"""NIST StRD, all eleven one-way data sets, through the command line: CSV in, findings.json out.

Source: NIST/ITL Statistical Reference Datasets, analysis of variance; the files that scipy ships.
Certified are, for each set, both sums of squares, both mean squares, F, R squared and the residual standard
deviation: 77 values to 15 digits, among them SmLs07 to SmLs09 with twelve common leading digits.
"""

import json
from decimal import Decimal

import pytest

from sources.nist import NAMES, as_csv, read_dataset
from support.workspaces import Bench

STUDY = """\
study: NIST-1
title: A reference data set
data: {file: data/values.csv, response: response, factor: treatment}
alpha: 0.05
"""


@pytest.mark.slow
@pytest.mark.parametrize("name", NAMES)
def test_every_certified_value_is_met_at_its_printed_digits(name, tmp_path):
    dataset = read_dataset(name)
    bench = Bench(tmp_path / "w", STUDY, as_csv(dataset))
    found = json.loads((bench.run() / "data/findings.json").read_bytes())["responses"]["response"]["anova"]
    assert len(dataset.certified) == 7
    for quantity, certified in dataset.certified.items():
        value = found
        for key in quantity.split("."):
            value = value[key]
        digits = len(Decimal(certified).as_tuple().digits)
        assert digits == 15
        assert Decimal(f"{value:.{digits - 1}e}") == Decimal(certified), quantity
