"""Fixing the plan before the data: what is sealed, and what a run makes of it."""

import hashlib
import json
import shutil

import pytest

from assayfolio.study.canonical_plan import plan_digest
from assayfolio.study.reading import read_study
from assayfolio.workflow import protocol_folio
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.workspace import Workspace
from support.fixed_plans import PLANNED, amended, bench_without_data, measure, preregister
from support.workspaces import DATA, Bench

WITH_EVERYTHING = (
    PLANNED
    + "worksheet: {seed: 7, item: S}\npower: {difference: 1, sigma: 0.5, target: 0.9}\n"
    + "measurement: {measured-at: {column: day}}\n"
)


@pytest.fixture(scope="module")
def life(tmp_path_factory):
    """A plan registered, then measured, then run; the bench, the protocol's folio and the run's."""
    bench = bench_without_data(tmp_path_factory.mktemp("life") / "w", WITH_EVERYTHING)
    protocol = preregister(bench)
    days = "".join(f"{line},2099-01-01\n" for line in DATA.splitlines()[1:])
    measure(bench, "method,sulfate,day\n" + days)
    return bench, protocol, bench.run()


def record(folio, name):
    return json.loads((folio / "data" / name).read_bytes())


def test_a_protocol_holds_plan_power_worksheet_and_the_paper_to_sign(life):
    _, protocol, _ = life
    names = {path.relative_to(protocol / "data").as_posix() for path in protocol.glob("data/**/*.*")}
    assert names >= {
        "study.yaml",
        "plan.json",
        "power.json",
        "protocol.json",
        "protocol.pdf",
        "environment.json",
        "requirements.lock",
        "trail.jsonl",
        "context/lab.yaml",
        *(f"worksheet/worksheet.{end}" for end in ("csv", "json", "pdf", "xlsx")),
    }
    assert (protocol / "data/protocol.pdf").read_bytes().startswith(b"%PDF-1.7")


def test_the_trail_holds_the_seal_and_the_digest_of_the_plan(life):
    bench, protocol, _ = life
    entries = [entry for entry in bench.entries() if entry["subject"] == "TST-1/protocol-0001"]
    assert [entry["action"] for entry in entries] == ["protocol-allotted", "protocol-staged", "registered"]
    details = entries[-1]["details"]
    seal = hashlib.sha256((protocol / "tagmanifest-sha256.txt").read_bytes()).hexdigest()
    plan = plan_digest(read_study(bench.study.read_bytes(), "s.yaml"))
    assert (details["seal"], details["plan"], details["amends"]) == (seal, plan, None)
    assert details["plan"] == hashlib.sha256((protocol / "data/plan.json").read_bytes()).hexdigest()
    assert details["timing"] == "before data first seen"


@pytest.mark.requirement("PLAN-1")
def test_a_run_of_the_registered_plan_says_when_both_were(life):
    bench, _, run = life
    entries = {entry["action"]: entry for entry in bench.entries()}
    said = record(run, "run.json")["pre_registration"]
    assert said["protocol"] == "protocol-0001"
    assert said["registered"] == entries["registered"]["time"]
    assert said["data_first_seen"] == entries["received"]["time"]
    assert said["before_data"] is True
    families = record(run, "findings.json")["responses"]["sulfate"]["comparisons"]
    assert [family["registered"] for family in families] == [True]


def test_measurements_dated_after_the_run_are_a_deviation(life):
    _, _, run = life
    named = [one["what"] for one in record(run, "findings.json")["deviations"]]
    assert any("measured after the run that reports it began" in what for what in named)


def test_everything_can_be_verified(life):
    bench, protocol, _ = life
    answer = bench("verify")
    assert answer.code == 0, answer.out
    assert "4.11  passed  TST-1/protocol-0001" in answer.out
    assert bench("verify", protocol).code == 0


def test_a_run_of_another_plan_is_refused_with_every_difference(life):
    bench, _, _ = life
    kept = bench.study.read_bytes()
    bench.write(bench.study, amended(WITH_EVERYTHING).replace("Sulfate by", "Sulphate by"))
    try:
        answer = bench("run", bench.study)
    finally:
        bench.write(bench.study, kept)
    assert answer.code == 2
    assert "not the plan that was registered as TST-1/protocol-0001" in answer.err
    assert "study.yaml:10:1: `alpha` is 0.01; registered is 0.05" in answer.err
    assert "`title` is Sulphate by three methods" in answer.err
    assert "assayfolio amend" in answer.err
    assert bench.entries()[-1]["action"] == "refused"


def test_a_plan_that_only_looks_different_runs(life):
    bench, _, _ = life
    kept = bench.study.read_bytes()
    bench.write(bench.study, b"# tidied up\n" + kept.replace(b"alpha: 0.05", b"alpha: 0.050"))
    try:
        answer = bench("run", bench.study)
        refused = bench("preregister", bench.study)
    finally:
        bench.write(bench.study, kept)
    assert answer.code == 0, answer.err
    assert "Pre-registered" in answer.out
    assert "This very plan is registered already" in refused.err


def test_a_plan_is_registered_once_and_changes_by_amendment(life):
    bench, _, _ = life
    kept = bench.study.read_bytes()
    bench.write(bench.study, amended(WITH_EVERYTHING))
    try:
        answer = bench("preregister", bench.study)
    finally:
        bench.write(bench.study, kept)
    assert answer.code == 2
    assert "A change is an amendment: assayfolio amend" in answer.err


@pytest.mark.requirement("PLAN-2")
def test_a_plan_that_was_never_registered_runs_and_is_exploratory(tmp_path):
    bench = Bench(tmp_path / "w", PLANNED)
    run = bench.run()
    assert record(run, "run.json")["pre_registration"] is None
    families = record(run, "findings.json")["responses"]["sulfate"]["comparisons"]
    assert [family["registered"] for family in families] == [False]


@pytest.mark.requirement("PLAN-1")
def test_registering_after_the_data_were_seen_is_said_with_both_times(tmp_path):
    bench = Bench(tmp_path / "w", PLANNED)
    bench.write(bench.data, "not a table")
    assert bench("run", bench.study).code == 2
    measure(bench)
    answer = bench("preregister", bench.study)
    assert "After data of this study were first seen" in answer.out
    folio = bench.run()
    said = record(folio, "run.json")["pre_registration"]
    assert said["before_data"] is False
    families = record(folio, "findings.json")["responses"]["sulfate"]["comparisons"]
    assert [family["registered"] for family in families] == [False]
    deviations = [one["what"] for one in record(folio, "findings.json")["deviations"]]
    assert any("values.csv was changed after it was first seen" in what for what in deviations)


def test_data_that_lay_there_unseen_are_named_in_protocol_and_findings(tmp_path):
    bench = Bench(tmp_path / "w", PLANNED)
    protocol = preregister(bench)
    there = record(protocol, "protocol.json")["data_present"]
    assert there == [
        {"path": "configs/data/values.csv", "sha256": hashlib.sha256(bench.data.read_bytes()).hexdigest()}
    ]
    deviations = [one["what"] for one in record(bench.run(), "findings.json")["deviations"]]
    assert deviations == ["configs/data/values.csv lay in its place when protocol-0001 was registered"]


@pytest.mark.parametrize("requirement", ["pre-registration", "approved-protocol"])
def test_a_laboratory_can_require_that_the_plan_was_fixed(tmp_path, requirement):
    bench = Bench(tmp_path / "w", PLANNED)
    lab = bench.root / "configs/lab.yaml"
    lab.write_text(lab.read_text() + f"require: [{requirement}]\n")
    answer = bench("run", bench.study)
    assert answer.code == 2
    assert f"Invented laboratory requires {requirement} of every study" in answer.err
    assert "preregister" in answer.err
    preregister(bench)
    answer = bench("run", bench.study)
    if requirement == "approved-protocol":
        assert "protocol-0001 is not approved" in answer.err
    else:
        assert answer.code == 0, answer.err


def test_a_faulty_plan_is_not_registered_and_gets_no_number(tmp_path):
    bench = bench_without_data(tmp_path / "w", PLANNED.replace("tukey-kramer", "tukey"))
    answer = bench("preregister", bench.study)
    assert answer.code == 2
    assert not [entry for entry in bench.entries() if entry["action"].startswith("protocol")]


def test_a_registered_protocol_that_was_changed_stops_the_run_that_needs_it(tmp_path):
    bench = bench_without_data(tmp_path / "w")
    protocol = preregister(bench)
    measure(bench)
    shutil.rmtree(protocol)
    bench.write(bench.study, amended())
    answer = bench("run", bench.study)
    assert answer.code == 1
    assert "protocol-0001: the registered protocol is gone or not as it was sealed" in answer.err
    assert "missing: TST-1/protocol-0001 was registered, and its folio is gone" in bench("verify").out


def test_a_failure_keeps_the_number_and_says_why(tmp_path, monkeypatch):
    bench = bench_without_data(tmp_path / "w")
    with monkeypatch.context() as patched:

        def fail(_):
            raise OSError("the ink is out")

        patched.setattr(protocol_folio, "render_protocol", fail)
        answer = bench("preregister", bench.study)
    assert answer.code == 3
    assert "TST-1/protocol-0001 was not registered; its number is kept" in answer.err
    assert bench.entries()[-1]["action"] == "failed"
    assert preregister(bench).name == "protocol-0002"
    assert bench("verify").code == 0


def test_a_rename_that_was_interrupted_is_completed_by_the_next_command(tmp_path, monkeypatch):
    bench = bench_without_data(tmp_path / "w")
    with monkeypatch.context() as patched:

        def killed(_):
            raise KeyboardInterrupt

        patched.setattr("assayfolio.evidence.folio.StagedFolio.publish", killed)
        answer = bench("preregister", bench.study)
    assert answer.code == 3
    assert "registered but not in its place" in answer.err
    assert "the rename was interrupted" in bench("verify").out
    measure(bench)
    assert record(bench.run(), "run.json")["pre_registration"]["protocol"] == "protocol-0001"
    assert (bench.runs / "TST-1/protocol-0001/data/protocol.pdf").exists()
    assert bench("verify").code == 0


def test_a_registration_that_was_killed_is_told_by_the_next_command(tmp_path):
    bench = bench_without_data(tmp_path / "w")
    with trail_book(Workspace(bench.root), 1.0) as trail:
        trail.append("founded", "workspace", "for a test")
        trail.append("protocol-allotted", "TST-1/protocol-0001", None, {"number": 1})
    assert "interrupted; not yet entered" in bench("verify").out
    assert preregister(bench).name == "protocol-0002"
    told = [entry for entry in bench.entries() if entry["action"] == "interrupted"]
    assert [entry["subject"] for entry in told] == ["TST-1/protocol-0001"]
    assert bench("verify").code == 0
