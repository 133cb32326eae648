"""A run declared void keeps its place; a corrected run names what it replaces, and both say so."""

import json
import os
import subprocess

import pytest

from assayfolio.evidence.verification import verify_workspace
from assayfolio.workflow import void as workflow_void
from support.staff import actions, as_account, staffed
from support.workspaces import Bench

REASON = "The balance was out of tolerance on 4 March"
WHY = ("--reason", REASON, "--investigation", "INV-2031-014")
CORRECTED = "Measured again on the repaired balance"


@pytest.fixture(scope="module")
def history(tmp_path_factory):
    """A run, void; then a corrected run that replaces it."""
    bench = Bench(tmp_path_factory.mktemp("void") / "w")
    first = bench.run()
    before = {path: path.read_bytes() for path in first.rglob("*") if path.is_file()}
    voided = bench("void", first, *WHY, "--json")
    assert voided.code == 0, voided.err
    assert {path: path.read_bytes() for path in first.rglob("*") if path.is_file()} == before
    bench.study.write_text(bench.study.read_text())
    answer = bench("run", bench.study, "--replaces", "run-0001", "--reason", CORRECTED, "--json")
    assert answer.code == 0, answer.err
    return bench, voided.document, bench.root / answer.document["folio"]


def words_of(folio):
    text = subprocess.run(
        ["pdftotext", "-layout", folio / "data/report.pdf", "-"], capture_output=True, text=True, check=True
    ).stdout
    return " ".join(text.split())


def notes(bench, subject):
    outcomes = verify_workspace(bench.runs, None).outcomes
    return [
        note for each in outcomes if (each.number, each.subject) == ("2.2", subject) for note in each.notes
    ]


class TestTheVoidRun:
    @pytest.mark.requirement("CHANGE-4")
    def test_has_an_entry_with_reason_reference_and_seal(self, history):
        bench, document, _ = history
        [entry] = [entry for entry in bench.entries() if entry["action"] == "voided"]
        assert (entry["subject"], entry["reason"]) == ("TST-1/run-0001", REASON)
        assert entry["details"]["investigation"] == "INV-2031-014"
        assert entry["details"]["folio"] == "_laboratory/void-0001"
        assert entry["details"]["seal"] == document["seal"]

    def test_has_a_folio_that_says_why(self, history):
        bench, document, _ = history
        folio = bench.root / document["folio"]
        record = json.loads((folio / "data/void.json").read_bytes())
        assert (record["run"], record["reason"], record["investigation"]) == (
            "TST-1/run-0001",
            REASON,
            "INV-2031-014",
        )
        sealed = next(entry for entry in bench.entries() if entry["action"] == "sealed")
        assert record["run_seal"] == sealed["details"]["seal"]

    @pytest.mark.requirement("CHANGE-4")
    def test_stays_listed_as_void_and_superseded(self, history):
        bench, _, _ = history
        assert notes(bench, "TST-1/run-0001")[0].startswith("void since 20")
        assert notes(bench, "TST-1/run-0001")[0].endswith(
            f"{REASON}; investigation INV-2031-014, folio _laboratory/void-0001"
        )
        assert notes(bench, "TST-1/run-0001")[1] == "superseded by TST-1/run-0002"

    def test_is_listed_with_its_state_in_the_register_of_data(self, history):
        bench, _, _ = history
        [file] = bench("trail", "--data", "--json").document["files"]
        assert [(use["run"], use["state"], use["superseded_by"]) for use in file["runs"]] == [
            ("TST-1/run-0001", "void", "TST-1/run-0002"),
            ("TST-1/run-0002", "draft", None),
        ]
        assert "superseded by TST-1/run-0002" in bench("trail", "--data").out

    def test_and_the_workspace_verify(self, history):
        bench, document, _ = history
        assert bench("verify").code == 0
        assert bench("verify", bench.root / document["folio"]).code == 0

    def test_is_not_declared_void_twice(self, history):
        bench, _, _ = history
        answer = bench("void", "TST-1/run-0001", *WHY)
        assert answer.code == 2
        assert "TST-1/run-0001 is void already" in answer.err


class TestTheCorrectedRun:
    @pytest.mark.requirement("CHANGE-3")
    def test_has_its_own_number_and_names_what_it_replaces(self, history):
        bench, _, folio = history
        record = json.loads((folio / "data/run.json").read_bytes())
        assert (record["run"], record["replaces"]["run"]) == ("run-0002", "TST-1/run-0001")
        assert record["replaces"]["reason"] == CORRECTED
        assert record["replaces"]["void"]["investigation"] == "INV-2031-014"
        assert notes(bench, "TST-1/run-0002") == ["replaces TST-1/run-0001"]

    @pytest.mark.requirement("CHANGE-3")
    @pytest.mark.needs("pdftotext")
    def test_has_a_report_that_says_so(self, history):
        _, _, folio = history
        words = words_of(folio)
        assert words.count("Replaces TST-1/run-0001, void since") == 2
        assert f"on investigation INV-2031-014: {CORRECTED}" in words
        assert "roles are not in use in this laboratory" in words
        assert "Execution 2 on these data" in words
        assert "void: TST-1/run-0001 (investigation INV-2031-014)" in words

    def test_cannot_replace_a_run_that_was_replaced(self, history):
        bench, _, _ = history
        answer = bench(
            "run", bench.study, "--replaces", "run-0001", "--reason", "Replaced a second time over"
        )
        assert answer.code == 2
        assert "superseded by TST-1/run-0002 already" in answer.err
        assert bench.entries()[-1]["action"] == "attempt-refused"


class TestRefusals:
    @pytest.mark.requirement("CHANGE-4")
    @pytest.mark.parametrize(
        ("arguments", "words"),
        [
            (("TST-1/run-0001", "--reason", "bad", "--investigation", "INV-1"), "only 3 characters long"),
            (
                ("TST-1/run-0001", "--reason", REASON, "--investigation", " - "),
                "reference of the investigation is missing",
            ),
            (("TST-1/run-0007", *WHY), "has no such run"),
            (("somewhere", *WHY), "is not the folio of a run"),
        ],
    )
    def test_a_void_needs_reason_reference_and_run(self, history, arguments, words):
        bench, _, _ = history
        answer = bench("void", *arguments)
        assert answer.code == 2
        assert words in answer.err

    @pytest.mark.parametrize(
        ("arguments", "words"),
        [
            (("--replaces", "run-0002"), "The reason is missing"),
            (("--reason", CORRECTED), "name that with --replaces"),
            (("--replaces", "run-0009", "--reason", CORRECTED), "no such run to be replaced"),
        ],
    )
    def test_a_replacement_needs_run_and_reason(self, history, arguments, words):
        bench, _, _ = history
        runs = sorted((bench.runs / "TST-1").glob("run-*"))
        answer = bench("run", bench.study, *arguments)
        assert answer.code == 2
        assert words in answer.err
        assert sorted((bench.runs / "TST-1").glob("run-*")) == runs

    def test_a_failed_run_has_no_result_that_could_be_void(self, tmp_path, monkeypatch):
        bench = Bench(tmp_path / "w")

        def broken():
            raise OSError("no font")

        monkeypatch.setattr("assayfolio.workflow.run.self_check", broken)
        assert bench("run", bench.study).code == 3
        answer = bench("void", "TST-1/run-0001", *WHY)
        assert answer.code == 2
        assert "failed: it has no result" in answer.err

    def test_only_approver_or_quality_assurance_declare_a_run_void(self, tmp_path):
        bench = staffed(Bench(tmp_path / "w"))
        answer = as_account(bench, "ann", "run", bench.study, "--json")
        assert answer.code == 0, answer.err
        assert as_account(bench, "ann", "void", "TST-1/run-0001", *WHY).code == 2
        assert actions(bench)[-1] == "attempt-refused"
        assert as_account(bench, "cem", "void", "TST-1/run-0001", *WHY).code == 0


class TestKilled:
    """A killed command leaves nothing that the next one does not tell of or complete."""

    @pytest.fixture
    def bench(self, tmp_path):
        bench = Bench(tmp_path / "w")
        bench.run()
        return bench

    def kill(self, bench, monkeypatch, name):
        def killed(*_):
            raise KeyboardInterrupt

        with monkeypatch.context() as patch:
            patch.setattr(workflow_void if name == "stage_folio" else os, name, killed)
            assert bench("void", "TST-1/run-0001", *WHY).code == 3

    def test_before_the_seal_is_entered_as_interrupted(self, bench, monkeypatch):
        self.kill(bench, monkeypatch, "stage_folio")
        assert actions(bench)[-1] == "folio-allotted"
        assert bench("verify").code == 1
        assert bench("void", "TST-1/run-0001", *WHY, "--json").document["folio"].endswith("void-0002")
        assert actions(bench)[-3:] == ["interrupted", "folio-allotted", "voided"]
        assert bench("verify").code == 0

    def test_behind_the_seal_is_completed(self, bench, monkeypatch):
        self.kill(bench, monkeypatch, "rename")
        assert actions(bench)[-1] == "voided"
        assert "the rename was interrupted" in bench("verify").out
        bench.run()
        assert "rename-completed" in actions(bench)
        assert (bench.runs / "_laboratory/void-0001/data/void.json").exists()
        assert bench("verify").code == 0


def _edit(path):
    path.chmod(0o644)
    path.write_bytes(path.read_bytes().replace(b"INV-2031-014", b"INV-2031-015"))


def _remove(folio):
    subprocess.run(["rm", "-r", folio], check=True)


CHANGES = {
    "its record": (lambda folio: _edit(folio / "data/void.json"), "3.4", "changed: data/void.json"),
    "deleted": (_remove, "2.7", "missing: _laboratory/void-0001 was sealed"),
    "a file more": (lambda folio: (folio / "data/more").write_text("x"), "3.5", "extra file"),
    "another folder": (lambda folio: (folio.parent / "void-0002").mkdir(), "2.3", "extra folder"),
}


@pytest.mark.parametrize(("change", "number", "words"), CHANGES.values(), ids=CHANGES.keys())
def test_tampering_with_a_void_folio_is_found_and_named(tmp_path, change, number, words):
    bench = Bench(tmp_path / "w")
    bench.run()
    bench("void", "TST-1/run-0001", *WHY)
    change(bench.runs / "_laboratory/void-0001")
    failed = verify_workspace(bench.runs, None).with_outcome("failed")
    assert number in {each.number for each in failed}
    assert any(words in note for each in failed for note in each.notes)
