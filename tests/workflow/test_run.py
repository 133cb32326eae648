"""A run, seen from outside: what it leaves, what it says, and what it refuses to do."""

import hashlib
import json
import subprocess

import pytest

from assayfolio.errors import MachineError
from assayfolio.workflow import run as workflow_run
from support.workspaces import DATA, STUDY, Bench


@pytest.fixture(scope="module")
def bench(tmp_path_factory):
    """A workspace in which the study was run once."""
    bench = Bench(tmp_path_factory.mktemp("bench") / "w")
    bench.run()
    return bench


@pytest.mark.requirement("RECORD-2")
def test_the_folio_holds_every_promised_file(bench):
    folio = bench.runs / "TST-1/run-0001"
    names = {path.relative_to(folio).as_posix() for path in folio.rglob("*") if path.is_file()}
    promised = {
        "bagit.txt",
        "bag-info.txt",
        "manifest-sha256.txt",
        "tagmanifest-sha256.txt",
        "data/study.yaml",
        "data/inputs/values.csv",
        "data/findings.json",
        "data/run.json",
        "data/environment.json",
        "data/bom.json",
        "data/ro-crate-metadata.json",
        "data/requirements.lock",
        "data/context/lab.yaml",
        "data/context/history.json",
        "data/context/registration.json",
        "data/context/deviations.json",
        "data/trail.jsonl",
        "data/report.pdf",
        "data/READ-ME-FIRST.txt",
        "data/check_folio.py",
    }
    assert promised <= names
    assert all(name.startswith("data/figures/") for name in names - promised)
    assert any(name.endswith(".svg") for name in names)


@pytest.mark.requirement("RECORD-12")
def test_inputs_are_kept_byte_for_byte(bench):
    folio = bench.runs / "TST-1/run-0001"
    assert (folio / "data/study.yaml").read_bytes() == bench.study.read_bytes()
    assert (folio / "data/inputs/values.csv").read_bytes() == bench.data.read_bytes()


@pytest.mark.requirement("TRAIL-1")
def test_every_step_is_entered_in_order_and_the_seal_is_the_last(bench):
    entries = [entry for entry in bench.entries() if entry["subject"] == "TST-1/run-0001"]
    assert [entry["action"] for entry in entries] == [
        "allotted",
        "self-checked",
        "computed",
        "rendered",
        "staged",
        "sealed",
    ]
    assert [entry["details"]["step"] for entry in entries] == [2, 3, 4, 5, 6, 7]
    tag_manifest = (bench.runs / "TST-1/run-0001/tagmanifest-sha256.txt").read_bytes()
    assert entries[-1]["details"]["seal"] == hashlib.sha256(tag_manifest).hexdigest()


@pytest.mark.requirement("CONFIG-1")
def test_the_run_record_names_what_was_used_and_what_was_made(bench):
    folio = bench.runs / "TST-1/run-0001"
    record = json.loads((folio / "data/run.json").read_bytes())
    assert record["outcome"] == "completed"
    assert record["pre_registration"] is None
    for item in record["inputs"]:
        content = (folio / item["folio_path"]).read_bytes()
        assert item["sha256"] == hashlib.sha256(content).hexdigest()
        assert item["size"] == len(content)
    assert record["report_sha256"] == hashlib.sha256((folio / "data/report.pdf").read_bytes()).hexdigest()


@pytest.mark.requirement("RECORD-3")
def test_a_second_run_gets_the_next_number_and_leaves_the_first_untouched(tmp_path):
    bench = Bench(tmp_path / "w")
    first = bench.run()
    before = {path: path.read_bytes() for path in first.rglob("*") if path.is_file()}
    assert bench.run().name == "run-0002"
    assert {path: path.read_bytes() for path in first.rglob("*") if path.is_file()} == before
    assert bench("verify").code == 0


def test_findings_do_not_depend_on_the_order_of_the_rows(tmp_path):
    header, *rows = DATA.splitlines()
    plain = Bench(tmp_path / "a").run()
    turned = Bench(tmp_path / "b", STUDY, "\n".join([header, *reversed(rows)]) + "\n").run()
    assert (plain / "data/findings.json").read_bytes() == (turned / "data/findings.json").read_bytes()


@pytest.mark.requirement("NUMBERS-3")
def test_no_variation_within_levels_is_reported_with_its_reason(tmp_path):
    data = "method,sulfate\n" + "".join(
        f"{level},{value}\n" * 3
        for level, value in (("gravimetric", "1.0"), ("turbidimetric", "1.5"), ("chromatographic", "1.0"))
    )
    folio = Bench(tmp_path / "w", STUDY, data).run()
    findings = json.loads((folio / "data/findings.json").read_bytes())
    anova = findings["responses"]["sulfate"]["anova"]
    assert anova["f"] is None
    assert anova["verdict"] == "not assessable"
    assert anova["between"]["ss"] == 0.5
    assert [item["what"] for item in findings["not_reported"]] == [
        "F test and intervals for means",
        "comparison: all pairs of methods",
    ]


@pytest.mark.requirement("INCIDENT-1", "TRAIL-2")
def test_a_failure_after_the_number_keeps_the_number_and_says_why(tmp_path, monkeypatch):
    def fail(_):
        raise MachineError("the ink is out")

    bench = Bench(tmp_path / "w")
    with monkeypatch.context() as patched:
        patched.setattr(workflow_run, "render_report", fail)
        answer = bench("run", bench.study)
    assert answer.code == 3
    assert "the ink is out" in answer.err
    folio = bench.runs / "TST-1/run-0001"
    assert json.loads((folio / "data/run.json").read_bytes())["outcome"] == "failed"
    assert "the ink is out" in (folio / "data/failure.txt").read_text()
    assert not (folio / "data/report.pdf").exists()
    assert bench("verify").code == 0
    assert bench.run().name == "run-0002"


@pytest.mark.requirement("INCIDENT-1")
def test_an_unexpected_fault_is_kept_with_its_account(tmp_path, monkeypatch):
    def fail(*_):
        raise ZeroDivisionError("by nought")

    bench = Bench(tmp_path / "w")
    monkeypatch.setattr(workflow_run, "evaluate", fail)
    answer = bench("run", bench.study)
    assert answer.code == 3
    assert "Traceback" not in answer.err
    account = (bench.runs / "TST-1/run-0001/data/failure.txt").read_text()
    assert "Traceback" in account
    assert "by nought" in account


@pytest.mark.requirement("NUMBERS-1")
def test_an_altered_constant_stops_the_run_before_it_computes(tmp_path, monkeypatch):
    from assayfolio.workflow import selfcheck

    real = selfcheck.FUNCTIONS["f_sf"]
    monkeypatch.setitem(selfcheck.FUNCTIONS, "f_sf", lambda *a: real(*a) * (1 + 1e-9))
    bench = Bench(tmp_path / "w")
    answer = bench("run", bench.study)
    assert answer.code == 3
    assert "check before the run failed" in answer.err
    assert not (bench.runs / "TST-1/run-0001/data/findings.json").exists()


def test_a_workspace_held_by_another_writer_is_busy(tmp_path):
    from assayfolio.evidence.trail import open_trail
    from assayfolio.workflow.surroundings import utc_now

    bench = Bench(tmp_path / "w")
    bench.runs.mkdir()
    with open_trail(bench.runs, "somebody", utc_now, 1.0):
        answer = bench("run", bench.study)
    assert answer.code == 4
    assert "Traceback" not in answer.err


def test_the_data_of_a_run_cannot_be_where_a_folio_would_hide_them(tmp_path):
    study = STUDY.replace("data/values.csv", "data/values.csv/")
    bench = Bench(tmp_path / "w", study)
    assert bench("run", bench.study).code == 2


def test_a_data_file_whose_name_no_folio_can_hold_is_refused(tmp_path):
    bench = Bench(tmp_path / "w", STUDY.replace("values.csv", "50%25.csv"), None)
    (bench.data.parent / "50%25.csv").write_text(DATA)
    answer = bench("run", bench.study)
    assert answer.code == 2
    assert "rename the file" in answer.err


def test_a_failure_while_staging_leaves_no_digest_of_a_report_that_is_not_there(tmp_path, monkeypatch):
    real = workflow_run.stage_folio
    calls = []

    def fail_once(*arguments):
        calls.append(arguments)
        if len(calls) == 1:
            raise MachineError("no space left")
        return real(*arguments)

    bench = Bench(tmp_path / "w")
    monkeypatch.setattr(workflow_run, "stage_folio", fail_once)
    assert bench("run", bench.study).code == 3
    record = json.loads((bench.runs / "TST-1/run-0001/data/run.json").read_bytes())
    assert record["outcome"] == "failed"
    assert "report_sha256" not in record
    assert bench("verify").code == 0


def test_a_run_that_is_stopped_seals_its_folio_and_says_where(tmp_path, monkeypatch):
    def stop(*_):
        raise KeyboardInterrupt

    bench = Bench(tmp_path / "w")
    monkeypatch.setattr(workflow_run, "evaluate", stop)
    answer = bench("run", bench.study)
    assert answer.code == 3
    assert "Stopped by the person" in answer.err
    assert "run-0001" in answer.err
    assert bench("verify").code == 0


def test_a_folder_that_may_not_be_written_to_is_left_as_it_is(tmp_path, monkeypatch):
    from assayfolio.evidence import locks

    bench = Bench(tmp_path / "w")
    bench.run()
    before = {path: path.read_bytes() for path in bench.runs.rglob("*") if path.is_file()}
    monkeypatch.setattr(locks.os, "access", lambda path, mode, **_: path != bench.runs)
    answer = bench("run", bench.study)
    assert answer.code == 3
    assert "may not write" in answer.err
    assert {path: path.read_bytes() for path in bench.runs.rglob("*") if path.is_file()} == before


def test_an_unreadable_data_file_is_the_machines_fault_and_is_recorded(tmp_path, monkeypatch):
    from assayfolio.workflow import workspace

    real = workspace.Path.read_bytes

    def refuse(path):
        if path.name == "values.csv":
            raise PermissionError(13, "Permission denied")
        return real(path)

    bench = Bench(tmp_path / "w")
    monkeypatch.setattr(workspace.Path, "read_bytes", refuse)
    answer = bench("run", bench.study)
    assert answer.code == 3
    assert bench.entries()[-1]["action"] == "refused"


def test_a_report_without_planned_signatures_says_so(tmp_path):
    bench = Bench(tmp_path / "w", STUDY[: STUDY.index("sign-off")])
    answer = bench("run", bench.study)
    assert answer.code == 0
    assert "No signatures are planned" in answer.out


def test_what_is_said_at_the_end_names_the_folio_as_the_person_can_reach_it(tmp_path, monkeypatch):
    bench = Bench(tmp_path / "my lab")
    answer = bench("run", bench.study)
    assert f"verify '{bench.runs / 'TST-1/run-0001'}'" in answer.out
    monkeypatch.chdir(bench.root)
    assert "verify runs/TST-1/run-0002" in bench("run", bench.study).out


@pytest.mark.needs("pdftotext")
def test_a_later_report_says_how_many_runs_came_before(tmp_path):
    bench = Bench(tmp_path / "w")
    texts = [
        subprocess.run(
            ["pdftotext", bench.run() / "data/report.pdf", "-"], capture_output=True, text=True, check=True
        ).stdout
        for _ in range(2)
    ]
    assert "none of this study" in texts[0]
    assert "earlier runs of this study" not in texts[0]
    assert "earlier runs of this study: 1" in texts[1]
