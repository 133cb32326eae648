"""A run on data too large for memory: the same results as for small data, from a copy in the folio."""

import json

import pytest

from assayfolio.workflow import large_intake
from assayfolio.workflow.rerender import rerender
from support.workspaces import STUDY, Bench

ROWS = "".join(
    f"{method},{48 + (at * 7919 + shift) % 100 / 50:.2f}\n"
    for at in range(400)
    for shift, method in enumerate(("gravimetric", "turbidimetric", "chromatographic"))
)
DATA = f"method,sulfate\n{ROWS}"
NEEDS_VALUES = "it needs every single value, and 1,200 are too many to be kept one by one"


@pytest.fixture
def large(monkeypatch):
    """Every file counts as large."""
    monkeypatch.setattr(large_intake, "STREAM_FROM_BYTES", 0)


def test_large_data_give_the_findings_of_small_data_apart_from_what_needs_single_values(
    tmp_path, monkeypatch
):
    small = Bench(tmp_path / "small", STUDY, DATA).run()
    monkeypatch.setattr(large_intake, "STREAM_FROM_BYTES", 0)
    large = Bench(tmp_path / "large", STUDY, DATA).run()
    one, other = (json_of(folio / "data/findings.json") for folio in (small, large))
    checks = [found["responses"]["sulfate"].pop("checks") for found in (one, other)]
    assert one == other
    assert all(check["statistic"] is not None for check in checks[0])
    assert [check["note"] for check in checks[1]] == [f"not assessable: {NEEDS_VALUES}"] * 2


def json_of(path):
    return json.loads(path.read_text())


def test_the_folio_holds_a_copy_and_verifies_and_renders_again(tmp_path, large):
    bench = Bench(tmp_path / "w", STUDY, DATA)
    folio = bench.run()
    assert (folio / "data/inputs/values.csv").read_bytes() == bench.data.read_bytes()
    assert bench("verify", folio).code == 0
    assert rerender(folio).is_identical


def test_the_record_says_what_the_second_route_did_not_compare(tmp_path, large):
    record = json_of(Bench(tmp_path / "w", STUDY, DATA).run() / "data/run.json")
    left_out = record["second_route"]["sulfate"]["not_compared"]
    assert {"quantity": "means, sums of squares and F", "reason": NEEDS_VALUES} in left_out
    assert all(agreement["holds"] for agreement in record["second_route"]["sulfate"]["agreements"])


def test_a_fault_of_large_data_is_named_with_line_and_column(tmp_path, large):
    bench = Bench(tmp_path / "w", STUDY, DATA.replace("48.38", "n/a", 1))
    answer = bench("run", bench.study)
    line = bench.data.read_text().splitlines().index("gravimetric,n/a") + 1
    assert answer.code == 2
    assert f"configs/data/values.csv:{line}:13: column `sulfate` holds `n/a`" in answer.err


def test_a_plan_that_needs_single_rows_says_why_its_large_data_cannot_be_taken(tmp_path, large, monkeypatch):
    monkeypatch.setattr(large_intake, "MAX_BYTES", 1_000)
    study = STUDY.replace("unit: mg/L", "unit: mg/L\n  below-limit: omit")
    bench = Bench(tmp_path / "w", study, DATA)
    answer = bench("run", bench.study)
    assert answer.code == 2
    assert "with `below-limit: omit` in the plan 1,000 are the most" in answer.err
