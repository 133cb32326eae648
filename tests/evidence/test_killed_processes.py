import itertools

import pytest

from assayfolio.evidence.trail import read_trail
from assayfolio.evidence.verification import verify_workspace
from evidence.laboratory import Laboratory, killed_at

EXPLANATIONS = (
    "have no line end: an append was interrupted",
    "either an append was interrupted before the head moved",
    "a torn line set aside and not yet entered",
    "interrupted; not yet entered in the audit trail (the next run enters it)",
    "interrupted after it had failed",
    "the rename was interrupted",
)


def every_moment(tmp_path, prepare, work, tear):
    """A fresh workspace for each moment at which `work` was killed, as it was left."""
    for moment in itertools.count(1):
        laboratory = Laboratory(tmp_path / f"{moment}" / "runs")
        prepare(laboratory)
        if not killed_at(moment, tear, lambda laboratory=laboratory: work(laboratory)):
            assert moment > 5, "the work consists of more steps than this"
            return
        yield laboratory


def assert_explained(laboratory):
    """Verification finds nothing, or what it finds says that a process was interrupted."""
    for outcome in verify_workspace(laboratory.runs, None).with_outcome("failed"):
        for note in outcome.notes:
            if note.startswith("compared with no head kept elsewhere"):
                continue
            assert any(words in note for words in EXPLANATIONS), (outcome.number, note)


def assert_recovers(laboratory):
    """The next command enters what it found, works, and leaves nothing for verification to find.

    The numbers of the runs stay gapless. Returns the actions in the trail.
    """
    laboratory.settle()
    laboratory.run()
    reading = read_trail(laboratory.runs)
    assert reading.is_orderly
    assert verify_workspace(laboratory.runs, None).with_outcome("failed") == ()
    allotted = [entry.details["number"] for entry in reading.entries if entry.action == "allotted"]
    assert allotted == list(range(1, len(allotted) + 1))
    return [entry.action for entry in reading.entries]


@pytest.mark.parametrize("tear", [False, True], ids=["between calls", "amid a write"])
def test_a_run_killed_at_any_moment_is_explained_and_the_next_one_works(tmp_path, tear):
    seen = set()
    for laboratory in every_moment(tmp_path, Laboratory.found, Laboratory.run, tear):
        assert_explained(laboratory)
        seen.update(assert_recovers(laboratory))
    assert seen >= {"interrupted", "head-restored", "rename-completed"}
    assert ("torn-line-set-aside" in seen) == tear


@pytest.mark.requirement("TRAIL-1")
def test_a_failing_run_killed_at_any_moment_is_explained(tmp_path):
    def work(laboratory):
        laboratory.run(failing=True)

    for laboratory in every_moment(tmp_path, Laboratory.found, work, False):
        assert_explained(laboratory)
        assert_recovers(laboratory)


@pytest.mark.parametrize("tear", [False, True], ids=["between calls", "amid a write"])
def test_the_founding_entry_itself_may_be_interrupted(tmp_path, tear):
    for laboratory in every_moment(tmp_path, lambda _: None, Laboratory.found, tear):
        if laboratory.runs.is_dir():
            assert_explained(laboratory)
        assert_recovers(laboratory)


def leave_a_torn_line_and_a_head_behind(laboratory):
    """The worst that one killed writer after another leaves: both marks at once."""
    laboratory.found()
    head = laboratory.runs / "audit-trail.head"
    kept = head.read_bytes()
    with laboratory.trail() as writer:
        writer.append("looked", "workspace")
    head.write_bytes(kept)
    with (laboratory.runs / "audit-trail.jsonl").open("ab") as trail:
        trail.write(b'{"action":"loo')


@pytest.mark.parametrize("tear", [False, True], ids=["between calls", "amid a write"])
def test_the_recovery_may_be_interrupted_as_well(tmp_path, tear):
    for laboratory in every_moment(tmp_path, leave_a_torn_line_and_a_head_behind, Laboratory.settle, tear):
        assert_explained(laboratory)
        actions = assert_recovers(laboratory)
        assert actions[:2] == ["founded", "looked"]
        assert "head-restored" in actions
        assert "torn-line-set-aside" in actions


@pytest.mark.requirement("TRAIL-5")
@pytest.mark.parametrize("tear", [False, True], ids=["between calls", "amid a write"])
def test_no_torn_byte_is_lost_however_often_the_recovery_is_interrupted(tmp_path, tear):
    for laboratory in every_moment(tmp_path, leave_a_torn_line_and_a_head_behind, Laboratory.settle, tear):
        for again in range(1, 40, 3):
            killed_at(again, tear, laboratory.settle)
        assert_recovers(laboratory)
        aside = [path.read_bytes() for path in laboratory.runs.glob("audit-trail.torn-*")]
        assert b'{"action":"loo' in aside


def test_completing_a_rename_may_be_interrupted_as_well(tmp_path):
    def sealed_without_a_name(laboratory):
        laboratory.found()
        folio = laboratory.run()
        folio.rename(folio.with_name("run-0001.unsealed"))

    for laboratory in every_moment(tmp_path, sealed_without_a_name, Laboratory.settle, False):
        assert_explained(laboratory)
        assert_recovers(laboratory)
        assert (laboratory.runs / "IRON-7" / "run-0001" / "data" / "report.pdf").is_file()
