"""Heads that are kept outside the workspace: told of every entry, compared by verification."""

import json
import os

import pytest

from assayfolio.canonical import canonical_bytes, sha256_hex
from assayfolio.errors import ExitCode
from assayfolio.evidence import witnesses as witnesses_module
from assayfolio.evidence.entries import TrailHead
from assayfolio.evidence.trail import read_trail
from assayfolio.evidence.witnesses import FileWitness, FolderWitness, PrintedHead


def enter(laboratory, *actions):
    with laboratory.trail() as writer:
        return [writer.append(action, "workspace") for action in actions]


def check(laboratory, number="1.7"):
    [found] = [each for each in laboratory.verify().outcomes if each.number == number]
    return found


def actions(laboratory):
    return [entry.action for entry in read_trail(laboratory.runs).entries]


@pytest.fixture(params=["file", "folder"])
def witness(request, tmp_path):
    if request.param == "file":
        return FileWitness(tmp_path / "elsewhere.jsonl")
    (tmp_path / "elsewhere").mkdir()
    return FolderWitness(tmp_path / "elsewhere")


@pytest.fixture
def watched(laboratory, witness):
    laboratory.witnesses = (witness,)
    enter(laboratory, "looked", "looked again")
    return laboratory


def reach(witness, possible):
    """Take the place away, or put it back as it was."""
    aside = witness.path.with_name("aside")
    if not possible:
        witness.path.rename(aside)
        witness.path.symlink_to("nowhere")
    else:
        witness.path.unlink()
        aside.rename(witness.path)


class TestAWitness:
    def test_is_told_of_every_entry_with_its_digest(self, watched, witness):
        digests = read_trail(watched.runs).digests
        assert witness.kept().digests == {2: digests[1], 3: digests[2]}

    @pytest.mark.requirement("TRAIL-11")
    def test_that_agrees_passes_and_says_how_far_and_who_could_alter_it(self, watched, witness):
        found = check(watched)
        assert found.outcome == "passed"
        assert f"{witness.name}: 2 heads agree, up to entry 3 of 3" in found.notes[0]
        assert "this account can alter it" in found.notes[0]
        assert "this account can write to the audit trail" in found.notes[1]

    def test_that_is_out_of_reach_is_not_checkable(self, watched, witness):
        reach(witness, possible=False)
        found = check(watched)
        assert found.outcome == "not checkable"
        assert f"{witness.name}: not reached, so not compared" in found.notes[0]

    def test_that_is_out_of_reach_stops_nothing_and_is_entered_once(self, watched, witness):
        reach(witness, possible=False)
        enter(watched, "went on", "and on")
        enter(watched, "still")
        assert actions(watched)[3:] == ["went on", "witness-not-reached", "and on", "still"]
        entry = read_trail(watched.runs).entries[4]
        assert entry.details == {"witness": witness.name, "from_seq": 4}
        assert "could not" in entry.reason

    def test_that_is_reached_again_is_told_what_it_missed_and_verification_knows_why(self, watched, witness):
        reach(witness, possible=False)
        enter(watched, "went on", "and on")
        reach(witness, possible=True)
        watched.clock.ticks = iter(range(3600, 7200))
        enter(watched, "later")
        assert actions(watched)[-2:] == ["later", "witness-reached"]
        assert read_trail(watched.runs).entries[-1].details == {
            "witness": witness.name,
            "from_seq": 4,
            "through_seq": 6,
        }
        found = check(watched)
        assert found.outcome == "passed"
        assert f"{witness.name}: not told of entries 4 to 6, as the audit trail says" in found.notes

    def test_out_of_reach_is_left_alone_for_a_minute(self, watched, witness, monkeypatch):
        reach(witness, possible=False)
        enter(watched, "went on")
        tried = []
        monkeypatch.setattr(type(witness), "tell", lambda *told: tried.append(told))
        enter(watched, *["more"] * 20)
        assert tried == []

    @pytest.mark.requirement("TRAIL-11")
    def test_names_the_first_entry_that_is_another_one(self, watched, witness):
        forge(watched.runs, 2, subject="something else")
        found = check(watched)
        assert found.outcome == "failed"
        assert "entry 2 and 1 of the later ones is not the one that the witness was told of" in found.notes[0]
        assert "changed or built anew from there on" in found.notes[0]

    @pytest.mark.requirement("TRAIL-11")
    @pytest.mark.requirement("TRAIL-11")
    def test_shows_a_trail_cut_back_together_with_its_head(self, watched):
        cut(watched.runs, 2)
        assert read_trail(watched.runs).is_orderly
        found = check(watched)
        assert found.outcome == "failed"
        assert "it was told of entry 3, the audit trail has 2: it was cut back" in found.notes[0]

    def test_shows_entries_that_were_added_by_other_means(self, watched, witness):
        told = watched.witnesses
        watched.witnesses = ()
        enter(watched, "forged", "forged too")
        watched.witnesses = told
        found = check(watched)
        assert found.outcome == "failed"
        assert "it lacks the heads of entries 4, 5, and the audit trail does not say why" in found.notes[0]
        enter(watched, "went on")
        assert actions(watched)[-2:] == ["witness-behind", "went on"]
        assert check(watched).outcome == "failed"

    def test_that_misses_the_last_entry_of_a_killed_command_is_told_by_the_next(self, watched, witness):
        told = watched.witnesses
        watched.witnesses = ()
        enter(watched, "the last before the end")
        watched.witnesses = told
        found = check(watched)
        assert found.outcome == "not checkable"
        assert "not told of the last entry, 4" in found.notes[0]
        enter(watched, "went on")
        assert actions(watched)[-2:] == ["witness-behind", "went on"]
        assert check(watched).outcome == "passed"

    def test_that_keeps_nothing_yet_is_not_checkable(self, laboratory, tmp_path):
        place = tmp_path / "new.jsonl"
        place.write_bytes(b"")
        laboratory.witnesses = (FileWitness(place),)
        assert "it keeps no head yet" in check(laboratory).notes[0]
        assert laboratory.verify().exit_code == ExitCode.NOT_CHECKABLE


def forge(runs, seq, **changes):
    """Change one entry and make chain and head right again from there on."""
    trail = runs / "audit-trail.jsonl"
    entries = [json.loads(line) for line in trail.read_bytes().splitlines()]
    entries[seq - 1] |= changes
    rewrite(runs, entries)


def cut(runs, count):
    rewrite(
        runs, [json.loads(line) for line in (runs / "audit-trail.jsonl").read_bytes().splitlines()][:count]
    )


def rewrite(runs, entries):
    previous, lines = "0" * 64, []
    for number, entry in enumerate(entries, start=1):
        lines.append(canonical_bytes(entry | {"seq": number, "previous": previous}))
        previous = sha256_hex(lines[-1])
    (runs / "audit-trail.jsonl").write_bytes(b"".join(line + b"\n" for line in lines))
    head = canonical_bytes({"seq": len(lines), "sha256": previous}) + b"\n"
    (runs / "audit-trail.head").write_bytes(head)


class TestWhatAWitnessKeeps:
    def test_in_a_file_is_a_line_a_head(self, tmp_path):
        witness = FileWitness(tmp_path / "heads.jsonl")
        witness.tell(TrailHead(7, "ab" * 32), "2026-03-02T08:00:00.000000Z")
        assert json.loads(witness.path.read_text()) == {
            "seq": 7,
            "sha256": "ab" * 32,
            "time": "2026-03-02T08:00:00.000000Z",
        }

    def test_in_a_folder_is_never_replaced(self, tmp_path):
        witness = FolderWitness(tmp_path)
        witness.tell(TrailHead(7, "ab" * 32), "2026-03-02T08:00:00.000000Z")
        witness.tell(TrailHead(7, "ab" * 32), "2026-03-02T09:00:00.000000Z")
        with pytest.raises(Exception, match="it holds another head of entry 7 already"):
            witness.tell(TrailHead(7, "cd" * 32), "2026-03-02T09:00:00.000000Z")
        assert witness.kept().digests == {7: "ab" * 32}

    @pytest.mark.parametrize("line", [b"x", b"{}", b"[1]", b'{"seq":0,"sha256":"00"}', b'{"seq":true}'])
    def test_and_is_no_head_is_named_and_the_rest_compared(self, watched, witness, line):
        if isinstance(witness, FileWitness):
            with witness.path.open("ab") as file:
                file.write(line + b"\n")
        else:
            (witness.path / "00000009.json").write_bytes(line)
        found = check(watched)
        assert found.outcome == "not checkable"
        assert "torn or altered" in found.notes[0]
        assert any("2 heads agree" in note for note in found.notes)

    def test_twice_for_one_entry_is_named(self, tmp_path):
        witness = FileWitness(tmp_path / "heads.jsonl")
        for digest in ("ab", "cd"):
            witness.tell(TrailHead(2, digest * 32), "2026-03-02T08:00:00.000000Z")
        assert witness.kept().troubles == ("line 2 has another head for entry 2 than a line before it",)
        assert witness.kept().digests == {2: "ab" * 32}

    def test_is_not_made_where_its_folder_is_missing(self, laboratory, tmp_path):
        laboratory.witnesses = (FileWitness(tmp_path / "not mounted" / "heads.jsonl"),)
        enter(laboratory, "looked")
        assert actions(laboratory) == ["founded", "looked", "witness-not-reached"]


class TestWhoCouldAlterIt:
    def test_is_nobody_of_this_account_where_it_may_not_write(self, watched, witness, monkeypatch):
        monkeypatch.setattr(os, "access", lambda *_: False)
        notes = check(watched).notes
        assert "this account cannot alter it" in notes[0]
        assert notes[-1] == "this account cannot write to the audit trail"

    def test_is_told_apart_for_a_file_that_can_only_grow(self, tmp_path, monkeypatch):
        witness = FileWitness(tmp_path / "heads.jsonl")
        witness.tell(TrailHead(7, "ab" * 32), "2026-03-02T08:00:00.000000Z")
        flags = {"append": 0x20, "none": 0x10}
        for name, words in (("append", "can only grow"), ("none", "this account can alter it")):
            answer = flags[name].to_bytes(8, "little")
            monkeypatch.setattr(witnesses_module.fcntl, "ioctl", lambda *_, kept=answer: kept)
            assert words in witness.kept().guard


def test_a_head_from_an_archived_report_shows_a_cut(laboratory):
    enter(laboratory, "looked", "looked again")
    head = read_trail(laboratory.runs).last
    laboratory.witnesses = (PrintedHead(head),)
    assert check(laboratory).outcome == "passed"
    cut(laboratory.runs, 2)
    assert "it was told of entry 3, the audit trail has 2" in check(laboratory).notes[0]


def test_two_witnesses_are_each_told_and_each_judged(laboratory, tmp_path):
    one, other = FileWitness(tmp_path / "one.jsonl"), FileWitness(tmp_path / "missing" / "other.jsonl")
    laboratory.witnesses = (one, other)
    enter(laboratory, "looked")
    # What is entered about the one out of reach is told to the other.
    assert sorted(one.kept().digests) == [2, 3]
    found = check(laboratory)
    assert found.outcome == "not checkable"
    assert any(note.startswith(f"{one.name}: 2 heads agree") for note in found.notes)
