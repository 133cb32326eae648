import errno
import hashlib
import json
import os
import threading

import pytest

from assayfolio.errors import BusyError, ExitCode, InputError, MachineError
from assayfolio.evidence import files
from assayfolio.evidence.entries import parse_entry
from assayfolio.evidence.trail import TrailBrokenError, open_trail, read_trail
from evidence.laboratory import patched_system


def trail_file(laboratory):
    return laboratory.runs / "audit-trail.jsonl"


def head_file(laboratory):
    return laboratory.runs / "audit-trail.head"


def enter(laboratory, *actions):
    with laboratory.trail() as writer:
        return [writer.append(action, "workspace", None, {"step": 1}) for action in actions]


def test_an_entry_is_one_line_with_exactly_the_agreed_keys(laboratory):
    enter(laboratory, "looked")
    lines = trail_file(laboratory).read_bytes().split(b"\n")
    assert lines.pop() == b""
    for line in lines:
        keys = sorted(json.loads(line))
        assert keys == ["action", "actor", "details", "previous", "reason", "seq", "subject", "time"]


@pytest.mark.requirement("TRAIL-4")
def test_each_entry_carries_the_digest_of_the_line_before_and_the_first_one_zeros(laboratory):
    enter(laboratory, "looked", "looked again")
    lines = trail_file(laboratory).read_bytes().split(b"\n")[:-1]
    expected = ["0" * 64] + [hashlib.sha256(line).hexdigest() for line in lines[:-1]]
    assert [json.loads(line)["previous"] for line in lines] == expected
    assert [json.loads(line)["seq"] for line in lines] == [1, 2, 3]


def test_the_head_holds_number_and_digest_of_the_newest_line(laboratory):
    enter(laboratory, "looked")
    last = trail_file(laboratory).read_bytes().split(b"\n")[-2]
    head = json.loads(head_file(laboratory).read_bytes())
    assert head == {"seq": 2, "sha256": hashlib.sha256(last).hexdigest()}
    assert head_file(laboratory).read_bytes().endswith(b"}\n")


def test_what_was_entered_reads_back_as_it_was(laboratory):
    entered = enter(laboratory, "looked", 'prüfte 试验 \U0001f9ea \x7f\u2028 "\\')
    reading = read_trail(laboratory.runs)
    assert list(reading.entries[1:]) == entered
    assert [entry.line for entry in reading.entries] == list(reading.lines)
    assert reading.is_orderly
    assert [parse_entry(entry.line) for entry in entered] == entered


def test_reading_a_folder_without_a_trail_finds_nothing_and_writes_nothing(tmp_path):
    reading = read_trail(tmp_path)
    assert reading.entries == ()
    assert reading.is_orderly
    assert list(tmp_path.iterdir()) == []


def test_reading_changes_nothing_even_where_much_is_wrong(laboratory):
    trail_file(laboratory).write_bytes(trail_file(laboratory).read_bytes() + b"half a li")
    head_file(laboratory).unlink()
    before = {path.name: path.read_bytes() for path in laboratory.runs.iterdir()}
    read_trail(laboratory.runs)
    assert {path.name: path.read_bytes() for path in laboratory.runs.iterdir()} == before


def test_the_writer_knows_the_whole_trail_and_its_head(laboratory):
    with laboratory.trail() as writer:
        entry = writer.append("looked", "workspace")
        assert [each.action for each in writer.entries] == ["founded", "looked"]
        assert (writer.head.seq, writer.head.sha256) == (2, entry.sha256)


def test_a_second_writer_waits_then_is_told_who_holds_the_trail(laboratory):
    with (
        laboratory.trail(),
        pytest.raises(BusyError, match=r"m\.berg \(process \d+, since 2026.*Waited 0\.1 s") as told,
        open_trail(laboratory.runs, "k.lind", laboratory.clock, 0.1),
    ):
        pass
    assert told.value.exit_code == ExitCode.BUSY == 4
    assert len(read_trail(laboratory.runs).entries) == 1


def test_a_writer_that_waits_goes_on_when_the_first_has_ended(laboratory):
    inside, go_on = threading.Event(), threading.Event()

    def first():
        with laboratory.trail() as writer:
            inside.set()
            go_on.wait(10)
            writer.append("first", "workspace")

    thread = threading.Thread(target=first)
    thread.start()
    inside.wait(10)
    threading.Timer(0.1, go_on.set).start()
    with laboratory.trail(wait=10) as writer:
        writer.append("second", "workspace")
    thread.join()
    assert [entry.action for entry in read_trail(laboratory.runs).entries] == ["founded", "first", "second"]


@pytest.mark.requirement("RERUN-7")
def test_many_writers_at_once_leave_one_whole_chain(laboratory):
    def work():
        for _ in range(5):
            with laboratory.trail(wait=30) as writer:
                writer.append("looked", "workspace")

    threads = [threading.Thread(target=work) for _ in range(6)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    reading = read_trail(laboratory.runs)
    assert reading.is_orderly
    assert len(reading.entries) == 31


@pytest.mark.requirement("TRAIL-4")
def test_every_byte_is_made_durable_before_the_next_step(laboratory):
    calls = []
    with laboratory.trail() as writer, patched_system(lambda name, _: calls.append(name)):
        writer.append("looked", "workspace")
        order = list(calls)
    # Trail line, then the new head beside the old one, then the rename, then the folder.
    assert order == ["write", "fsync", "open", "write", "fsync", "replace", "open", "fsync"]


def test_an_append_reads_nothing_of_the_trail(laboratory, monkeypatch):
    with laboratory.trail() as writer:
        monkeypatch.setattr(os, "read", None)
        monkeypatch.setattr(files, "read_regular", None)
        writer.append("looked", "workspace")
    assert len(trail_file(laboratory).read_bytes().splitlines()) == 2


@pytest.mark.parametrize(
    ("number", "words"),
    [
        (errno.ENOSPC, "the disk is full"),
        (errno.EACCES, "permission denied"),
        (errno.EROFS, "the disk is read-only"),
        (errno.EIO, "input/output error"),
    ],
)
def test_a_disk_that_refuses_is_told_with_its_path_in_plain_words(laboratory, monkeypatch, number, words):
    def refuse(*_):
        raise OSError(number, "as the system says it")

    with laboratory.trail() as writer:
        monkeypatch.setattr(os, "write", refuse)
        with pytest.raises(MachineError, match=rf"audit-trail\.jsonl: could not .*{words}") as told:
            writer.append("looked", "workspace")
    assert told.value.exit_code == ExitCode.MACHINE == 3


def test_after_a_failed_append_the_same_writer_adds_no_more_and_the_next_one_recovers(
    laboratory, monkeypatch
):
    write = os.write
    with laboratory.trail() as writer:
        with monkeypatch.context() as full:
            full.setattr(os, "write", lambda descriptor, content: write(descriptor, bytes(content)[:20]))
            with pytest.raises(MachineError, match="only 20 of"):
                writer.append("looked", "workspace")
        with pytest.raises(MachineError, match="an append failed before"):
            writer.append("looked again", "workspace")
    enter(laboratory, "went on")
    reading = read_trail(laboratory.runs)
    assert [entry.action for entry in reading.entries] == ["founded", "torn-line-set-aside", "went on"]
    assert reading.is_orderly


@pytest.mark.requirement("RERUN-7")
def test_a_disk_that_fills_between_line_and_head_leaves_a_trail_that_recovers(laboratory, monkeypatch):
    def refuse(*_):
        raise OSError(errno.ENOSPC, "full")

    with laboratory.trail() as writer, monkeypatch.context() as full:
        full.setattr(os, "replace", refuse)
        with pytest.raises(
            MachineError, match=r"audit-trail\.head: could not replace the file: the disk is full"
        ):
            writer.append("looked", "workspace")
    enter(laboratory, "went on")
    actions = [entry.action for entry in read_trail(laboratory.runs).entries]
    assert actions == ["founded", "looked", "head-restored", "went on"]


def test_a_file_changed_behind_the_writers_back_is_noticed_at_the_next_append(laboratory):
    with laboratory.trail() as writer:
        with trail_file(laboratory).open("ab") as file:
            file.write(b"{}\n")
        with pytest.raises(TrailBrokenError, match="another program changed it"):
            writer.append("looked", "workspace")


def test_text_that_is_no_utf8_is_refused_in_words_and_nothing_is_entered(laboratory):
    with laboratory.trail() as writer:
        for arguments in (
            ("looked", "data\udcff.csv"),
            ("looked", "x", None, {"inputs": {"d\udcff.csv": "1"}}),
        ):
            with pytest.raises(InputError, match=r"\\udcff.*no UTF-8"):
                writer.append(*arguments)
        writer.append("looked", "workspace")
    assert len(read_trail(laboratory.runs).entries) == 2


@pytest.mark.parametrize(
    "time", ["2026-03-02T08:00:00Z", "2026-03-02T08:00:00.000000+00:00", "yesterday", ""]
)
def test_a_time_of_another_form_is_not_entered(laboratory, time):
    with laboratory.trail() as writer:
        writer._now = lambda: time
        with pytest.raises(ValueError, match="not a UTC time with microseconds"):
            writer.append("looked", "workspace")
    assert len(read_trail(laboratory.runs).entries) == 1


class TestALineTornByAPowerCut:
    @pytest.fixture
    def torn(self, laboratory):
        """The trail with its third line cut after any number of bytes, the head still at the second."""
        enter(laboratory, "looked")
        head = head_file(laboratory).read_bytes()
        before = trail_file(laboratory).read_bytes()
        enter(laboratory, "looked again")
        line = trail_file(laboratory).read_bytes()[len(before) :]

        def cut(length, filler=b""):
            (laboratory.runs / "audit-trail.torn-3").unlink(missing_ok=True)
            trail_file(laboratory).write_bytes(before + line[:length] + filler)
            head_file(laboratory).write_bytes(head)
            return line[:length] + filler

        cut.length = len(line)
        return cut

    @pytest.mark.requirement("TRAIL-5")
    def test_is_set_aside_wherever_it_was_cut(self, laboratory, torn):
        for length in range(1, torn.length):
            bytes_left = torn(length)
            [entry] = enter(laboratory, "went on")
            reading = read_trail(laboratory.runs)
            aside = reading.entries[2]
            assert (aside.action, entry.seq) == ("torn-line-set-aside", 4)
            assert aside.details == {
                "file": "audit-trail.torn-3",
                "sha256": hashlib.sha256(bytes_left).hexdigest(),
                "size": length,
            }
            assert (laboratory.runs / "audit-trail.torn-3").read_bytes() == bytes_left
            assert reading.is_orderly

    def test_may_end_in_the_zeros_that_a_file_system_leaves(self, laboratory, torn):
        bytes_left = torn(10, b"\0" * 500)
        enter(laboratory, "went on")
        assert (laboratory.runs / "audit-trail.torn-3").read_bytes() == bytes_left

    def test_does_not_overwrite_another_one_set_aside_before(self, laboratory, torn):
        torn(30)
        (laboratory.runs / "audit-trail.torn-3").write_bytes(b"an earlier one")
        enter(laboratory, "went on")
        assert (laboratory.runs / "audit-trail.torn-3").read_bytes() == b"an earlier one"
        details = [entry.details for entry in read_trail(laboratory.runs).entries if "torn" in entry.action]
        assert [each["file"] for each in details] == ["audit-trail.torn-3", "audit-trail.torn-3-2"]

    def test_is_a_broken_trail_when_the_head_knows_it_already(self, laboratory, torn):
        head = head_file(laboratory).read_bytes()
        torn(torn.length - 1)
        head_file(laboratory).write_bytes(head)
        with pytest.raises(TrailBrokenError, match=r"2 whole lines; the last line has no line end"):
            enter(laboratory, "went on")


class TestAnythingElseWrong:
    @pytest.mark.parametrize(
        ("spoil", "words"),
        [
            (
                lambda text: text.replace(b'"looked"', b'"booked"'),
                "line 3: it does not carry the SHA-256 of line 2",
            ),
            (lambda text: text.replace(b'"actor":', b'"actor": ', 1), "line 1: it is not in canonical form"),
            (lambda text: text.replace(b"\n", b"\r\n", 1), "line 1: it ends with a carriage return"),
            (lambda text: text.replace(b"\n", b"\n\n", 1), "line 2: the line is empty"),
            (lambda text: b"\xef\xbb\xbf" + text, "line 1: it is not JSON at character 1"),
            (
                lambda text: text.replace(b'"step":1', b'"step":1,"step":1', 1),
                'line 2: the key "step" stands twice',
            ),
            (lambda text: text.replace(b'"step":1', b'"step":1.0', 1), "line 2: it is not in canonical form"),
            (
                lambda text: text.replace(b'"step":1', b'"step":' + b"1" * 30, 1),
                "line 2: the integer 1+ is beyond",
            ),
            (lambda text: text.replace(b'"step":1', b'"step":NaN', 1), "line 2: NaN is no JSON number"),
            (lambda text: text.replace(b'"step":1', b'"step":' + b"[" * 9000, 1), "line 2: "),
            (
                lambda text: text.replace(b'"action":"looked",', b"", 1),
                "line 2: keys missing or unknown: action",
            ),
            (lambda text: text.replace(b'"reason":null', b'"reason":3', 1), '"reason" is neither'),
            (lambda text: text.replace(b'"seq":2', b'"seq":true', 1), '"seq" is not a whole number'),
            (lambda text: text.replace(b'"seq":2', b'"seq":0', 1), '"seq" is not a whole number from 1'),
            (lambda text: text.replace(b".000000Z", b"Z", 1), '"time" is not a UTC time'),
            (lambda text: text.replace(b"2026-03-02", b"2026-02-30", 1), '"time" is not a UTC time'),
            (lambda text: text.replace(b'"m.berg"', b"7", 1), '"actor", "action" or "subject" is not a text'),
            (lambda text: text.replace(b'{"step":1}', b"[]", 1), '"details" is not an object'),
            (lambda text: text.replace(b'"' + b"0" * 64 + b'"', b"null", 1), '"previous" is not a text'),
            (lambda text: text.replace(b"0" * 64, b"0" * 63, 1), '"previous" is not 64 zeros'),
            (lambda text: b"[]\n" + text, "line 1: it is not an object"),
            (
                lambda text: text.replace(b'"step":1', b'"step":1e999', 1),
                "line 2: it is not in canonical form",
            ),
            (lambda text: b" " + text, "line 1: blanks stand around it"),
            (lambda text: text.replace(b"m.berg", b"m.b\xffrg", 1), "line 1: byte .* is not UTF-8"),
            (
                lambda text: text.replace(b'"seq":2', b'"seq":5', 1),
                "line 2: it has the number 5 where 2 should",
            ),
            (lambda text: text.split(b"\n", 1)[1], "line 1: it has the number 2 where 1"),
            (lambda text: text + text.splitlines(keepends=True)[-1], "line 4: it has the number 3 where 4"),
            (
                lambda text: text[: text.index(b"\n") + 1],
                "it stands at entry 3, but audit-trail.jsonl has 1 whole",
            ),
            (lambda text: b"", "it stands at entry 3, but audit-trail.jsonl has 0 whole"),
        ],
    )
    def test_is_named_and_refused_and_nothing_is_added(self, laboratory, spoil, words):
        enter(laboratory, "looked", "looked again")
        spoilt = spoil(trail_file(laboratory).read_bytes())
        assert spoilt != trail_file(laboratory).read_bytes()
        trail_file(laboratory).write_bytes(spoilt)
        with pytest.raises(TrailBrokenError, match=r"the audit trail is broken.*assayfolio verify"):
            enter(laboratory, "went on")
        with pytest.raises(TrailBrokenError, match=words):
            enter(laboratory, "went on")
        assert trail_file(laboratory).read_bytes() == spoilt

    @pytest.mark.parametrize(
        ("content", "words"),
        [
            (None, "it is missing, but audit-trail.jsonl has 3 lines"),
            (b"", "not a head as written here: the line end is missing"),
            (b"{}\n", "it does not hold"),
            (b'{"seq":0,"sha256":"' + b"0" * 64 + b'"}\n', '"seq" is not a whole number from 1'),
            (b'{"seq":3,"sha256":"' + b"0" * 64 + b'"}\n', "it does not carry the SHA-256 of line 3"),
            (b'{"seq":9,"sha256":"' + b"0" * 64 + b'"}\n', "it stands at entry 9, but .* has 3 whole lines"),
            (b'{"seq":3,"sha256":"x"}\n', '"sha256" is not a SHA-256'),
        ],
    )
    def test_also_in_the_head(self, laboratory, content, words):
        enter(laboratory, "looked", "looked again")
        head_file(laboratory).unlink()
        if content is not None:
            head_file(laboratory).write_bytes(content)
        with pytest.raises(TrailBrokenError, match=words):
            enter(laboratory, "went on")

    def test_a_head_put_back_by_more_than_one_entry_is_not_taken_for_an_interrupted_append(self, laboratory):
        head = head_file(laboratory).read_bytes()
        enter(laboratory, "looked", "looked again")
        head_file(laboratory).write_bytes(head)
        with pytest.raises(TrailBrokenError, match=r"it stands at entry 1, but .* 3 lines: lines were added"):
            enter(laboratory, "went on")

    def test_a_trail_that_is_gone_is_not_begun_anew_beside_its_folios(self, laboratory):
        laboratory.run()
        trail_file(laboratory).unlink()
        head_file(laboratory).unlink()
        with pytest.raises(TrailBrokenError, match=r"missing or empty, although .*run-0001 is there"):
            enter(laboratory, "went on")

    def test_a_link_in_the_place_of_the_trail_is_not_followed(self, laboratory, tmp_path):
        trail_file(laboratory).rename(tmp_path / "elsewhere")
        trail_file(laboratory).symlink_to(tmp_path / "elsewhere")
        with pytest.raises(MachineError, match="it is a symbolic link"):
            enter(laboratory, "went on")
