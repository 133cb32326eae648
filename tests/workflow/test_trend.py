"""Control charts over the lots of a study: which runs are read, what is sealed, what the command answers."""

import contextlib
import csv
import json
from unittest import mock

import pytest

from assayfolio.report.render import RenderedReport
from support import schemas
from support.resealed import writable_copy
from support.workspaces import STUDY, Bench

PLAN = """\
measurement: {lot: LOT}
trend:
  baseline: {first: 5}
  rules: [beyond-limits, range-beyond-limit]
  criteria: [{quantity: lot-mean, at-most: 50}]
"""
FAMILY = "  - {name: to gravimetric, against: gravimetric, adjust: dunnett}\nchecks:"
METHODS = ("gravimetric", "turbidimetric", "chromatographic")
MEANS = {"L-1": 48, "L-2": 48.4, "L-3": 47.9, "L-4": 48.3, "L-5": 48.1, "L-6": 52}


def definition(lot: str, text: str = STUDY) -> str:
    return text.replace("checks:", FAMILY, 1) + PLAN.replace("LOT", lot)


def data(mean: float) -> str:
    rows = [
        f"{method},{mean + step / 10:.2f}" for at, method in enumerate(METHODS) for step in (-3, at, 3 - at)
    ]
    return "\n".join(["method,sulfate", *rows]) + "\n"


@contextlib.contextmanager
def reports_not_set():
    """The reports of the runs are not set in type: no chart reads them."""
    with mock.patch("assayfolio.workflow.run.render_report", return_value=RenderedReport(b"%PDF", ())):
        yield


def run(bench: Bench, lot: str, mean: float, *options: str) -> None:
    bench.write(bench.study, definition(lot))
    bench.write(bench.data, data(mean))
    answer = bench("run", bench.study, *options)
    assert answer.code == 0, answer.err


@pytest.fixture(scope="module")
def charted(tmp_path_factory):
    """A workspace with six lots: one corrected, one run that is void, one lot that was run twice."""
    bench = Bench(tmp_path_factory.mktemp("trend") / "w")
    with reports_not_set():
        run(bench, "L-1", 48)
        run(bench, "L-2", 60)  # a wrong dilution factor
        for lot in ("L-3", "L-4", "L-5"):
            run(bench, lot, MEANS[lot])
        run(
            bench, "L-2", MEANS["L-2"], "--replaces", "run-0002", "--reason", "dilution factor of 10 left out"
        )
        run(bench, "L-9", 47)
        why = ("--reason", "the balance was out of tolerance", "--investigation", "INV-3")
        assert bench("void", bench.runs / "TST-1/run-0007", *why).code == 0
        run(bench, "L-6", 51)
        run(bench, "L-6", MEANS["L-6"])
    return bench


@pytest.fixture(scope="module")
def answer(charted, tmp_path_factory):
    table = tmp_path_factory.mktemp("csv") / "out.csv"
    found = charted("trend", charted.study, "--json", "--csv", table)
    assert found.code == 0, found.err
    return {**found.document, "table": table}


def chart(answer, quantity: str):
    return next(one for one in answer["charts"] if one["quantity"] == quantity)


def test_each_lot_stands_once_at_the_place_where_it_first_came(answer):
    assert [one["lot"] for one in answer["lots"]] == list(MEANS)
    assert [one["run"].rpartition("-")[2] for one in answer["lots"]] == [
        "0001",
        "0006",
        "0003",
        "0004",
        "0005",
        "0009",
    ]


def test_runs_that_do_not_stand_are_left_out_with_the_reason(answer):
    reasons = {one["run"]: one["reason"] for one in answer["left_out"]}
    assert set(reasons) == {"TST-1/run-0002", "TST-1/run-0007", "TST-1/run-0008"}
    assert "superseded by TST-1/run-0006" in reasons["TST-1/run-0002"]
    assert "INV-3" in reasons["TST-1/run-0007"]
    assert reasons["TST-1/run-0008"] == "TST-1/run-0009 is a later run of the same lot"
    assert not any(one["changed"] for one in answer["left_out"])


@pytest.mark.requirement("NIGHT-2")
def test_the_table_has_every_value_as_the_findings_have_it(answer, charted):
    rows = list(csv.DictReader(answer["table"].read_text("utf-8").splitlines()))
    quantities = ("lot-mean", "repeatability-sd", "difference")
    assert {row["quantity"] for row in rows} == set(quantities)
    for row in rows:
        findings = json.loads((charted.runs / row["run"] / "data/findings.json").read_bytes())
        part = findings["responses"]["sulfate"]
        if row["quantity"] == "repeatability-sd":
            assert float(row["value"]) == part["anova"]["residual_sd"]
        if row["quantity"] == "difference":
            family = next(one for one in part["comparisons"] if one["kind"] == "against")
            stored = next(one for one in family["rows"] if one["label"] == row["difference"])
            assert float(row["value"]) == stored["estimate"]
            assert [float(row["interval from"]), float(row["interval to"])] == stored["ci"]
    assert len(rows) == 6 * 4


@pytest.mark.requirement("NIGHT-2")
def test_a_lot_that_drifts_off_is_named_with_the_rule_and_fails_nothing(charted, answer):
    means = chart(answer, "lot-mean")
    assert {(one["lot"], one["rule"]) for one in means["signals"]} == {
        ("L-6", "beyond-limits"),
        ("L-6", "range-beyond-limit"),
    }
    assert means["criteria"] == [{"relation": "at most", "limit": 50, "not_met_at": ["L-6"]}]
    said = charted("trend", charted.study)
    assert said.code == 0
    assert "signal by rule beyond-limits at lot L-6 (TST-1/run-0009)" in said.out
    assert "criterion at most 50 not met at lot L-6" in said.out


def test_the_record_is_sealed_and_verifies(charted, answer):
    record = charted.root / answer["record"]
    files = {path.relative_to(record / "data").as_posix() for path in (record / "data").rglob("*.*")}
    assert {"trend.pdf", "trend.csv", "trend.json", "study.yaml", "environment.json", "trail.jsonl"} <= files
    assert "figures/chart-1.svg" in files
    assert (record / "data/trend.csv").read_bytes() == answer["table"].read_bytes()
    assert (record / "data/trend.pdf").read_bytes().startswith(b"%PDF")
    assert charted("verify", record).code == 0


def test_the_trail_tells_of_it_as_its_schema_says(charted, answer):
    entries = [one for one in charted.entries() if "trend-" in one["subject"]]
    assert [one["action"] for one in entries[:2]] == ["folio-allotted", "record-sealed"]
    schema = schemas.load(schemas.TRAIL_ENTRY)
    for entry in entries:
        assert schemas.faults(schema, entry) == []
    details = entries[1]["details"]
    assert (details["study"], details["lots"], details["signals"]) == ("TST-1", 6, 2)


@pytest.fixture
def bench(charted, tmp_path):
    """A copy that can be changed."""
    copy = object.__new__(Bench)
    root = writable_copy(charted.root, tmp_path / "w")
    for name, value in {
        "root": root,
        "study": root / "configs/study.yaml",
        "data": root / "configs/data/values.csv",
        "runs": root / "runs",
    }.items():
        object.__setattr__(copy, name, value)
    return copy


@pytest.mark.parametrize(
    "path",
    [
        "data/findings.json",
        "data/run.json",
        "data/study.yaml",
        "manifest-sha256.txt",
        "tagmanifest-sha256.txt",
    ],
)
def test_a_folio_that_was_changed_is_left_out_and_said_so(bench, path):
    file = bench.runs / "TST-1/run-0003" / path
    file.write_bytes(file.read_bytes().replace(b"1", b"2"))
    answer = bench("trend", bench.study, "--json")
    assert answer.code == 1
    assert [one["lot"] for one in answer.document["lots"]] == ["L-1", "L-2", "L-4", "L-5", "L-6"]
    (left,) = (one for one in answer.document["left_out"] if one["changed"])
    assert left["run"] == "TST-1/run-0003"
    assert "changed" in left["reason"]


def test_a_folio_that_is_gone_is_left_out_and_said_so(bench):
    (bench.runs / "TST-1/run-0003").rename(bench.root / "elsewhere")
    answer = bench("trend", bench.study, "--json")
    assert answer.code == 1
    assert any("missing" in one["reason"] for one in answer.document["left_out"])


def test_a_trail_that_is_not_in_order_vouches_for_no_run(bench):
    trail = bench.runs / "audit-trail.jsonl"
    trail.write_bytes(
        trail.read_bytes().replace(b'"L-', b'"M-', 1).replace(b"TST-1/run-0001", b"TST-1/run-0099", 1)
    )
    answer = bench("trend", bench.study)
    assert answer.code == 1
    assert "verify" in answer.err


def test_a_study_that_plans_no_charts_is_refused_in_words(bench):
    bench.write(bench.study, STUDY)
    answer = bench("trend", bench.study)
    assert answer.code == 2
    assert "the key `trend` is missing" in answer.err


def test_a_study_without_runs_is_refused_in_words(tmp_path):
    bench = Bench(tmp_path / "w", definition("L-1"))
    answer = bench("trend", bench.study)
    assert answer.code == 2
    assert "There is no run of TST-1 to chart." in answer.err


def test_without_a_lot_in_plan_or_record_a_run_is_charted_by_its_number(tmp_path):
    text = definition("L-1").replace("measurement: {lot: L-1}\n", "")
    bench = Bench(tmp_path / "w", text, data(48))
    with reports_not_set():
        bench.run()
    assert [one["lot"] for one in bench("trend", bench.study, "--json").document["lots"]] == ["run-0001"]


def test_a_lot_that_stands_in_a_column_of_the_data_is_found_there(tmp_path):
    text = definition("L-1").replace("{lot: L-1}", "{lot: {column: batch}}")
    rows = data(48).splitlines()
    content = "\n".join([f"{rows[0]},batch", *(f"{row},B-77" for row in rows[1:])]) + "\n"
    bench = Bench(tmp_path / "w", text, content)
    with reports_not_set():
        bench.run()
    found = bench("trend", bench.study, "--json").document
    assert [one["lot"] for one in found["lots"]] == ["B-77"]
    assert chart(found, "lot-mean")["limits"] is None


def test_a_lot_that_looks_like_a_formula_is_no_formula_in_the_table(tmp_path):
    bench = Bench(tmp_path / "w", definition("'=1+1'"), data(48))
    with reports_not_set():
        bench.run()
    table = tmp_path / "t.csv"
    assert bench("trend", bench.study, "--csv", table).code == 0
    assert {row["lot"] for row in csv.DictReader(table.read_text("utf-8").splitlines())} == {"'=1+1"}
