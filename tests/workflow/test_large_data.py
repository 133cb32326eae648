"""A run on data too large for memory: the same results as for small data, from a copy in the folio."""

import gzip
import json
from dataclasses import replace

import pytest

from assayfolio.evaluation.apply import evaluate
from assayfolio.findings_document import findings_bytes
from assayfolio.study.plan import DataPlan
from assayfolio.workflow import large_intake
from assayfolio.workflow.intake import folio_intake
from assayfolio.workflow.large_intake import streams
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
    monkeypatch.setattr(large_intake, "STREAM_FROM_LINES", 0)


def test_large_data_give_the_findings_of_small_data_apart_from_what_needs_single_values(
    tmp_path, monkeypatch
):
    small = Bench(tmp_path / "small", STUDY, DATA).run()
    monkeypatch.setattr(large_intake, "STREAM_FROM_BYTES", 0)
    large = Bench(tmp_path / "large", STUDY, DATA).run()
    one, other = (json_of(folio / "data/findings.json") for folio in (small, large))
    checks = [found["responses"]["sulfate"].pop("checks") for found in (one, other)]
    gaps = [found.pop("not_reported") for found in (one, other)]
    assert one == other
    assert gaps[0] == []
    assert [(gap["what"], gap["reason"]) for gap in gaps[1]] == [
        ("check: Brown-Forsythe test of equal variances", NEEDS_VALUES),
        ("check: Shapiro-Wilk test on residuals", NEEDS_VALUES),
    ]
    assert all(check["statistic"] is not None for check in checks[0])
    assert [check["note"] for check in checks[1]] == [f"not assessable: {NEEDS_VALUES}"] * 2


def json_of(path):
    return json.loads(path.read_text())


def test_the_folio_holds_a_copy_and_verifies_and_gives_the_same_findings_again(tmp_path, large):
    bench = Bench(tmp_path / "w", STUDY, DATA)
    folio = bench.run()
    assert (folio / "data/inputs/values.csv").read_bytes() == bench.data.read_bytes()
    assert bench("verify", folio).code == 0
    inputs = json_of(folio / "data/run.json")["inputs"]
    again = folio_intake(folio, tuple((item["role"], item["path"], item["folio_path"]) for item in inputs))
    assert again.observations[0].totals is not None
    document = findings_bytes(evaluate(again.study, again.observations))
    assert document == (folio / "data/findings.json").read_bytes()


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


def test_files_of_more_than_a_hundred_thousand_lines_stream_and_others_are_kept_whole(tmp_path):
    head, row = "method,sulfate\n", "gravimetric,48.2\n"
    plan = DataPlan("a.csv", ("sulfate",), "method")
    for name, rows in (("a.csv", 60_000), ("b.csv", 40_000)):
        (tmp_path / name).write_text(head + row * (rows - 1))
    paths = [tmp_path / "a.csv", tmp_path / "b.csv"]
    assert not streams(paths, plan, tmp_path)
    with paths[1].open("a") as file:
        file.write(row)
    assert streams(paths, plan, tmp_path)
    assert not streams(paths, replace(plan, exclusions="x.yaml"), tmp_path)


def test_the_lines_in_a_compressed_file_count(tmp_path):
    (tmp_path / "a.csv.gz").write_bytes(gzip.compress(b"m,s\n" + b"a,1.5\n" * 100_000))
    plan = DataPlan("a.csv.gz", ("s",), "m")
    assert streams([tmp_path / "a.csv.gz"], plan, tmp_path)


def test_a_file_outside_the_workspace_is_not_looked_at_to_see_how_large_it_is(tmp_path):
    outside, inside = tmp_path / "outside.csv", tmp_path / "w"
    outside.write_text("m,s\n" + "a,1.5\n" * 100_000)
    inside.mkdir()
    (inside / "a.csv").symlink_to(outside)
    plan = DataPlan("a.csv", ("s",), "m")
    assert streams([outside], plan, tmp_path)
    assert not streams([inside / "a.csv"], plan, inside)


NEEDS_ROWS = {
    "wide": "layout: wide",
    "utf-16": "encoding: utf-16",
    "half-limit": "below-limit: half-limit",
    "exclusions": "exclusions",
}


@pytest.mark.parametrize("key", NEEDS_ROWS.values(), ids=NEEDS_ROWS)
@pytest.mark.parametrize(
    ("limit", "words"),
    [
        ("MAX_BYTES", "bytes of text; `{}` needs every single row, for which 1,000 bytes of text are"),
        ("MAX_LINES", "has 1,201 lines; `{}` needs every single row, for which 1,000 lines are"),
    ],
)
def test_a_plan_that_needs_single_rows_says_why_its_large_data_cannot_be_taken(
    tmp_path, large, monkeypatch, key, limit, words
):
    monkeypatch.setattr(large_intake, limit, 1_000)
    entry = f"{key}: data/x.yaml" if key == "exclusions" else key
    bench = Bench(tmp_path / "w", STUDY.replace("unit: mg/L", f"unit: mg/L\n  {entry}"), DATA)
    answer = bench("run", bench.study)
    assert answer.code == 2
    assert words.format(key) in answer.err
    assert f"take `{key}` out of it" in answer.err


def test_a_plan_that_needs_single_rows_has_them_where_they_are_not_too_many(tmp_path, large):
    study = STUDY.replace("unit: mg/L", "unit: mg/L\n  below-limit: omit")
    folio = Bench(tmp_path / "w", study, DATA).run()
    checks = json_of(folio / "data/findings.json")["responses"]["sulfate"]["checks"]
    assert all(check["statistic"] is not None for check in checks)
