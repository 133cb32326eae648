import os
import shutil
import threading
from contextlib import contextmanager

import pytest

from assayfolio.errors import ExitCode, InputError
from assayfolio.evidence import inventory, locks
from assayfolio.evidence import verification as verification_module
from assayfolio.evidence.checks import FOLIO_CHECKS, verify_folio
from assayfolio.evidence.folio import folio_lock
from assayfolio.evidence.outcomes import CheckOutcome, Verification
from assayfolio.evidence.trail import read_trail
from assayfolio.evidence.verification import verify_lone_folios, verify_workspace
from evidence.laboratory import Laboratory


def outcome_of(verification, number, subject=None):
    [found] = [
        each for each in verification.outcomes if each.number == number and subject in (None, each.subject)
    ]
    return found


def allot(laboratory, *actions, reason=None):
    """A run that stops after these entries, as a killed process leaves it in the trail."""
    with laboratory.trail() as writer:
        details = {"step": 1, "number": 1, "inputs": {}, "data": []}
        writer.append("allotted", "LEAD-1/run-0001", None, details)
        for action in actions:
            writer.append(action, "LEAD-1/run-0001", reason, {"step": 2})


@pytest.mark.parametrize(
    ("outcomes", "code"),
    [
        ((), ExitCode.DONE),
        (("passed",), ExitCode.DONE),
        (("passed", "not checkable"), ExitCode.NOT_CHECKABLE),
        (("not checkable", "failed", "passed"), ExitCode.FINDING),
    ],
)
def test_one_finding_outweighs_what_could_not_be_checked_and_that_outweighs_what_passed(outcomes, code):
    verification = Verification(tuple(CheckOutcome("1.1", "t", "s", each, ()) for each in outcomes))
    assert verification.exit_code == code


def test_outcomes_come_in_the_order_of_their_numbers_and_runs(laboratory):
    laboratory.run("ZINC-1")
    laboratory.run()
    outcomes = verify_workspace(laboratory.runs, None).outcomes
    trail = [f"1.{n}" for n in range(1, 8)]
    folio = [check.number for check in FOLIO_CHECKS]
    assert [each.number for each in outcomes] == [
        *trail,
        *("2.1", "2.2", "2.2", "2.3", "2.4", "2.5", "2.6"),
        *folio,
        *folio,
    ]
    assert [each.subject for each in outcomes if each.number == "3.1"] == [
        "IRON-7/run-0001",
        "ZINC-1/run-0001",
    ]


def test_a_new_workspace_passes_and_says_that_nothing_was_run(tmp_path):
    verification = verify_workspace(tmp_path, None)
    assert verification.exit_code == ExitCode.DONE
    assert "nothing was ever run here" in outcome_of(verification, "1.1").notes[0]


def test_every_verification_says_that_no_witness_was_asked(laboratory):
    assert (
        "compared with no head kept elsewhere"
        in outcome_of(verify_workspace(laboratory.runs, None), "1.7").notes[0]
    )


def test_a_clock_that_was_set_back_is_noted_and_no_finding(laboratory):
    laboratory.clock.ticks = iter(range(3600 * 5, 3600 * 6))
    with laboratory.trail() as writer:
        writer.append("looked", "workspace")
    laboratory.clock.ticks = iter(range(100))
    with laboratory.trail() as writer:
        writer.append("looked", "workspace")
    times = outcome_of(verify_workspace(laboratory.runs, None), "1.6")
    assert times.outcome == "passed"
    assert "entry 3 (2026-03-02T00:00:01.000000Z) is dated before entry 2" in times.notes[0]


class TestARun:
    def test_at_work_is_not_checkable_now(self, laboratory):
        laboratory.run()
        allot(laboratory)
        with folio_lock(laboratory.runs / "LEAD-1", "run-0001"):
            (laboratory.runs / "LEAD-1" / "run-0001.unsealed").mkdir()
            verification = verify_workspace(laboratory.runs, None)
        assert verification.exit_code == ExitCode.NOT_CHECKABLE == 5
        run = outcome_of(verification, "2.2", "LEAD-1/run-0001")
        assert (run.outcome, run.notes) == ("not checkable", ("running now",))

    def test_between_seal_and_name_is_not_checkable_now(self, laboratory):
        folio = laboratory.run()
        folio.rename(folio.with_name("run-0001.unsealed"))
        with folio_lock(folio.parent, "run-0001"):
            verification = verify_workspace(laboratory.runs, None)
        assert verification.exit_code == ExitCode.NOT_CHECKABLE
        assert "running now" in outcome_of(verification, "2.2").notes[0]

    @pytest.mark.requirement("INCIDENT-1")
    def test_that_was_killed_is_a_finding_until_it_is_entered(self, laboratory):
        allot(laboratory, "computed")
        killed = outcome_of(verify_workspace(laboratory.runs, None), "2.2")
        assert killed.outcome == "failed"
        assert killed.notes[0].startswith("interrupted; not yet entered in the audit trail")
        laboratory.settle()
        verification = verify_workspace(laboratory.runs, None)
        assert verification.exit_code == ExitCode.DONE
        assert "the process ended early" in outcome_of(verification, "2.2").notes[0]

    def test_that_failed_and_was_killed_before_its_folio_tells_both(self, laboratory):
        allot(laboratory, "failed", reason="a font was missing")
        killed = outcome_of(verify_workspace(laboratory.runs, None), "2.2")
        assert "interrupted after it had failed (a font was missing)" in killed.notes[0]

    def test_that_failed_and_was_sealed_passes_with_its_reason(self, laboratory):
        laboratory.run(failing=True)
        verification = verify_workspace(laboratory.runs, None)
        assert verification.exit_code == ExitCode.DONE
        assert outcome_of(verification, "2.2").notes == ("the run failed: a font was missing",)

    def test_whose_rename_was_interrupted_is_told_from_a_deleted_one(self, laboratory):
        folio = laboratory.run()
        folio.rename(folio.with_name("run-0001.unsealed"))
        run = outcome_of(verify_workspace(laboratory.runs, None), "2.2")
        assert run.outcome == "failed"
        assert "the rename was interrupted" in run.notes[0]
        laboratory.settle()
        assert verify_workspace(laboratory.runs, None).exit_code == ExitCode.DONE

    def test_whose_staging_folder_is_not_what_was_sealed_is_a_missing_one(self, laboratory):
        folio = laboratory.run()
        (folio / "data" / "report.pdf").unlink()
        folio.rename(folio.with_name("run-0001.unsealed"))
        run = outcome_of(verify_workspace(laboratory.runs, None), "2.2")
        assert "missing: IRON-7/run-0001 was sealed, and its folio is gone" in run.notes[0]
        assert "it is not what was sealed" in run.notes[1]

    def test_that_is_there_without_a_seal_was_put_there_by_other_means(self, laboratory):
        allot(laboratory)
        (laboratory.runs / "LEAD-1" / "run-0001").mkdir(parents=True)
        run = outcome_of(verify_workspace(laboratory.runs, None), "2.2")
        assert "has no seal of it" in run.notes[0]


class TestWhatAnInterruptedRunLeft:
    @pytest.fixture
    def leftover(self, laboratory):
        allot(laboratory)
        folder = laboratory.runs / "LEAD-1" / "run-0001.unsealed"
        (folder / "data").mkdir(parents=True)
        (folder / "data" / "study.yaml").write_bytes(b"study: LEAD-1\n")
        laboratory.settle()
        return folder

    def test_passes_as_long_as_it_is_as_it_was_found(self, laboratory, leftover):
        verification = verify_workspace(laboratory.runs, None)
        assert verification.exit_code == ExitCode.DONE

    @pytest.mark.parametrize("content", [b"study: LEAD-2\n", b""])
    def test_is_a_finding_when_it_changes(self, laboratory, leftover, content):
        (leftover / "data" / "study.yaml").write_bytes(content)
        run = outcome_of(verify_workspace(laboratory.runs, None), "2.2")
        assert run.outcome == "failed"
        assert "changed: LEAD-1/run-0001.unsealed is not as entry 3 found it" in run.notes[0]

    def test_is_a_finding_when_it_is_gone(self, laboratory, leftover):
        (leftover / "data" / "study.yaml").unlink()
        (leftover / "data").rmdir()
        leftover.rmdir()
        run = outcome_of(verify_workspace(laboratory.runs, None), "2.2")
        assert "missing: LEAD-1/run-0001.unsealed, which entry 3 found" in run.notes[0]

    def test_is_a_finding_when_it_appears_where_nothing_was_left(self, laboratory):
        allot(laboratory)
        laboratory.settle()
        (laboratory.runs / "LEAD-1" / "run-0001.unsealed").mkdir(parents=True)
        run = outcome_of(verify_workspace(laboratory.runs, None), "2.2")
        assert run.outcome == "failed"


class TestATornLine:
    @pytest.fixture
    def aside(self, laboratory):
        with (laboratory.runs / "audit-trail.jsonl").open("ab") as trail:
            trail.write(b'{"action":"loo')
        before = outcome_of(verify_workspace(laboratory.runs, None), "1.1")
        assert before.outcome == "failed"
        assert "14 bytes after the last whole line 1 have no line end" in before.notes[0]
        laboratory.settle()
        return laboratory.runs / "audit-trail.torn-2"

    def test_passes_with_a_note_once_it_is_set_aside(self, laboratory, aside):
        verification = verify_workspace(laboratory.runs, None)
        assert verification.exit_code == ExitCode.DONE
        assert (
            "an append was interrupted here; entry 2 tells of it" in outcome_of(verification, "2.4").notes[0]
        )

    def test_is_kept_as_it_was(self, laboratory, aside):
        aside.write_bytes(b"something else")
        assert (
            "changed: audit-trail.torn-2"
            in outcome_of(verify_workspace(laboratory.runs, None), "2.4").notes[0]
        )
        aside.unlink()
        assert (
            "missing: audit-trail.torn-2"
            in outcome_of(verify_workspace(laboratory.runs, None), "2.4").notes[0]
        )


class TestNamedFolios:
    def test_are_checked_alone_with_the_whole_trail(self, laboratory):
        folio = laboratory.run()
        (laboratory.run() / "data" / "report.pdf").unlink()
        verification = verify_workspace(laboratory.runs, [folio])
        assert verification.exit_code == ExitCode.DONE
        assert {each.subject for each in verification.outcomes} == {"audit trail", "IRON-7/run-0001"}
        assert verify_workspace(laboratory.runs, None).exit_code == ExitCode.FINDING

    def test_may_be_named_from_the_folder_one_stands_in(self, laboratory, monkeypatch):
        folio = laboratory.run()
        for place, name in [(folio.parent, "run-0001"), (folio, "."), (folio / "data", "..")]:
            monkeypatch.chdir(place)
            verification = verify_workspace(laboratory.runs, [laboratory.runs.__class__(name)])
            assert verification.exit_code == ExitCode.DONE

    @pytest.mark.requirement("TRAIL-3")
    def test_that_were_deleted_are_findings_not_wrong_names(self, laboratory):
        folio = laboratory.run()
        folio.rename(laboratory.runs.parent / "elsewhere")
        verification = verify_workspace(laboratory.runs, [folio])
        assert verification.exit_code == ExitCode.FINDING
        assert outcome_of(verification, "2.2").notes[0].startswith("missing: IRON-7/run-0001 was sealed")

    @pytest.mark.parametrize(
        ("name", "words"),
        [
            ("absent", "absent is not there"),
            ("runs/audit-trail.jsonl", "is a file, not a folio's folder"),
            ("runs/IRON-7", "IRON-7 is not a folio: it has neither bagit.txt nor"),
            ("link", "link is a symbolic link; name the folio itself"),
        ],
    )
    def test_that_are_no_folios_are_refused_in_plain_words(self, laboratory, name, words):
        folio = laboratory.run()
        (laboratory.runs.parent / "link").symlink_to(folio)
        with pytest.raises(InputError, match=words) as told:
            verify_workspace(laboratory.runs, [laboratory.runs.parent / name])
        assert told.value.exit_code == ExitCode.INPUT == 2

    def test_need_a_workspace_that_is_there(self, tmp_path):
        with pytest.raises(InputError, match="is not a folder, so there is nothing to verify"):
            verify_workspace(tmp_path / "absent", None)


class TestAFolioOutsideAnyWorkspace:
    @pytest.fixture
    def archived(self, laboratory, tmp_path):
        return laboratory.run().rename(tmp_path / "run-0001")

    @pytest.mark.requirement("RECORD-2")
    def test_passes_by_itself_and_says_what_could_not_be_checked(self, archived):
        outcomes = {each.number: each for each in verify_folio(archived, None)}
        not_checkable = {number for number, each in outcomes.items() if each.outcome == "not checkable"}
        assert not_checkable == {"3.9", "3.10", "3.11", "3.12"}
        assert {each.outcome for each in outcomes.values()} == {"passed", "not checkable"}
        assert "outside any workspace" in outcomes["3.10"].notes[0]

    def test_still_shows_a_changed_file(self, archived):
        (archived / "data" / "report.pdf").chmod(0o644)
        (archived / "data" / "report.pdf").write_bytes(b"x")
        failed = {each.number for each in verify_folio(archived, None) if each.outcome == "failed"}
        assert failed == {"3.4", "3.6", "3.8"}

    def test_may_have_another_name_but_then_its_number_is_not_checkable(self, archived):
        outcomes = verify_folio(archived.rename(archived.with_name("copy of iron")), None)
        [place] = [each for each in outcomes if each.number == "3.7"]
        assert place.outcome == "not checkable"

    def test_is_held_against_the_trail_of_the_workspace_that_is_named_with_it(self, laboratory, tmp_path):
        copy = tmp_path / "on a stick" / "any name"
        shutil.copytree(laboratory.run(), copy)
        assert verify_workspace(laboratory.runs, [copy]).exit_code == ExitCode.DONE

    def test_is_unknown_to_the_trail_of_another_workspace(self, archived, tmp_path):
        other = Laboratory(tmp_path / "other" / "runs")
        other.found()
        verification = verify_workspace(other.runs, [archived])
        assert verification.exit_code == ExitCode.FINDING
        assert outcome_of(verification, "3.10").notes == ("the audit trail knows no run IRON-7/run-0001",)

    def test_needs_no_workspace_at_all(self, archived):
        verification = verify_lone_folios([archived])
        assert verification.exit_code == ExitCode.NOT_CHECKABLE
        assert [each.number for each in verification.outcomes] == [check.number for check in FOLIO_CHECKS]
        with pytest.raises(InputError, match="absent is not there"):
            verify_lone_folios([archived.with_name("absent")])

    @pytest.mark.requirement("RECORD-4")
    def test_is_checked_against_a_trail_that_is_given(self, laboratory):
        folio = laboratory.run()
        outcomes = verify_folio(folio, read_trail(laboratory.runs))
        assert {each.outcome for each in outcomes} == {"passed"}


@contextmanager
def refusing(monkeypatch, *names):
    """A disk that refuses to open files of these names, as it does to somebody without the right."""
    plain = os.open

    def opened(path, *arguments, **named):
        if os.fsdecode(path).endswith(names):
            raise PermissionError(13, "Permission denied", os.fsdecode(path))
        return plain(path, *arguments, **named)

    with monkeypatch.context() as patch:
        patch.setattr(os, "open", opened)
        yield


class TestWhatCannotBeRead:
    @pytest.mark.parametrize(
        ("name", "numbers"),
        [
            ("findings.json", {"3.4", "3.6", "3.8"}),
            ("dots.svg", {"3.4", "3.6"}),
            ("run.json", {"3.4", "3.6", "3.7", "3.8", "3.11", "3.12"}),
            ("trail.jsonl", {"3.4", "3.6", "3.9"}),
            ("bagit.txt", {"3.1", "3.2", "3.6"}),
            ("bag-info.txt", {"3.2", "3.6"}),
            ("run-0001/manifest-sha256.txt", {"3.2", "3.3", "3.4", "3.5", "3.6"}),
            ("tagmanifest-sha256.txt", {"3.2", "3.6", "3.10"}),
        ],
    )
    def test_of_a_folio_is_not_checkable_and_named_with_the_reason(
        self, laboratory, monkeypatch, name, numbers
    ):
        laboratory.run()
        names = [name] if name != "trail.jsonl" else ["data/trail.jsonl"]
        with refusing(monkeypatch, *names):
            verification = verify_workspace(laboratory.runs, None)
        assert verification.exit_code == ExitCode.NOT_CHECKABLE
        open_questions = verification.with_outcome("not checkable")
        assert {each.number for each in open_questions} == numbers
        reasons = [note for each in open_questions for note in each.notes]
        assert any(name.rpartition("/")[2] in note and "permission denied" in note for note in reasons)

    def test_does_not_hide_another_finding(self, laboratory, monkeypatch):
        (laboratory.run() / "data" / "report.pdf").unlink()
        with refusing(monkeypatch, "dots.svg"):
            verification = verify_workspace(laboratory.runs, None)
        assert verification.exit_code == ExitCode.FINDING
        payload = outcome_of(verification, "3.4")
        assert payload.notes[0].startswith("missing: data/report.pdf")
        assert "permission denied" in payload.notes[1]

    def test_of_the_trail_leaves_the_folios_checkable_by_themselves(self, laboratory, monkeypatch):
        laboratory.run()
        with refusing(monkeypatch, "runs/audit-trail.jsonl"):
            verification = verify_workspace(laboratory.runs, None)
        assert verification.exit_code == ExitCode.NOT_CHECKABLE
        assert outcome_of(verification, "1.4").outcome == "not checkable"
        assert "permission denied" in outcome_of(verification, "1.4").notes[0]
        assert outcome_of(verification, "3.4").outcome == "passed"
        assert "the audit trail cannot be read" in outcome_of(verification, "3.10").notes[0]

    def test_may_be_a_folder_of_the_folio(self, laboratory, monkeypatch):
        laboratory.run()
        scandir = os.scandir

        def listed(path):
            if os.fspath(path).endswith("inputs"):
                raise PermissionError(13, "Permission denied")
            return scandir(path)

        monkeypatch.setattr(inventory.os, "scandir", listed)
        verification = verify_workspace(laboratory.runs, None)
        extras = outcome_of(verification, "3.5")
        assert (extras.outcome, extras.notes) == (
            "not checkable",
            ("data/inputs could not be listed: permission denied",),
        )
        assert outcome_of(verification, "3.4").outcome == "not checkable"


class TestWhileAWriterIsAtWork:
    def test_an_append_in_progress_is_waited_for(self, laboratory):
        """The line is there, the head is not yet: a moment of every append."""
        head = laboratory.runs / "audit-trail.head"
        before = head.read_bytes()
        with laboratory.trail() as writer:
            writer.append("looked", "workspace")
        after = head.read_bytes()
        head.write_bytes(before)
        descriptor = locks.take_lock(locks.lock_path(laboratory.runs, "writer"), 0)
        finishing = threading.Timer(0.2, lambda: (head.write_bytes(after), os.close(descriptor)))
        finishing.start()
        verification = verify_workspace(laboratory.runs, None)
        finishing.join()
        assert verification.exit_code == ExitCode.DONE

    def test_a_run_that_ends_after_the_trail_was_read_is_looked_at_again(self, laboratory, monkeypatch):
        runs_to_come = iter([laboratory.run])

        def read_just_before_a_run(runs):
            reading = read_trail(runs)
            next(runs_to_come, lambda: None)()
            return reading

        monkeypatch.setattr(verification_module, "read_trail", read_just_before_a_run)
        verification = verify_workspace(laboratory.runs, None)
        assert verification.exit_code == ExitCode.DONE
        assert outcome_of(verification, "3.10").subject == "IRON-7/run-0001"

    def test_runs_that_begin_and_end_meanwhile_are_no_findings(self, laboratory):
        stop = threading.Event()

        def work():
            while not stop.is_set():
                laboratory.run()

        worker = threading.Thread(target=work)
        worker.start()
        try:
            codes = {verify_workspace(laboratory.runs, None).exit_code for _ in range(15)}
        finally:
            stop.set()
            worker.join()
        assert ExitCode.FINDING not in codes


def test_a_forged_trail_whose_details_have_odd_types_is_judged_without_stumbling(laboratory):
    laboratory.run()
    with laboratory.trail() as writer:
        writer.append("torn-line-set-aside", "audit trail", None, {"file": ["x"], "sha256": {}})
        writer.append("allotted", "IRON-7/run-0002", None, {"number": [2], "inputs": [["x"]]})
        writer.append("allotted", "IRON-7/run-0003", None, {"inputs": {"x": {}}, "data": ["x", ["x"]]})
        writer.append("received", "IRON-7", None, {"path": {}, "size": True, "sha256": [], "study": 7})
        writer.append("sealed", "IRON-7/run-0002", None, {"seal": {"a": 1}, "outcome": []})
        writer.append("interrupted", "LEAD-1/run-0001", None, {"found": 7})
    verification = verify_workspace(laboratory.runs, None)
    assert {each.number for each in verification.with_outcome("failed")} == {"2.1", "2.2", "2.4", "2.5"}
    laboratory.settle()


@pytest.mark.requirement("RECORD-4")
def test_verification_writes_nothing(laboratory):
    laboratory.run()
    before = {path: path.stat().st_mtime_ns for path in laboratory.runs.rglob("*")}
    verify_workspace(laboratory.runs, None)
    assert {path: path.stat().st_mtime_ns for path in laboratory.runs.rglob("*")} == before
