"""Trail heads stamped by a time-stamp authority: RFC 3161, by `openssl ts` on the loopback address."""

import base64
import json
import subprocess

import pytest

from assayfolio.canonical import canonical_bytes
from assayfolio.evidence.entries import TrailHead
from assayfolio.evidence.time_stamps import StampError, StampWitness, read_stamp
from assayfolio.evidence.trail import read_trail
from evidence.signing.stamps import NAME, StampHouse, serving

pytestmark = pytest.mark.needs("openssl")


@pytest.fixture(scope="module")
def house(tmp_path_factory):
    return StampHouse(tmp_path_factory.mktemp("stamps"))


@pytest.fixture
def stamped(laboratory, house):
    """A trail that was opened twice, its authority no longer reached."""
    with serving(house.answer) as address:
        laboratory.witnesses = (StampWitness(address, laboratory.runs),)
        for _ in range(2):
            enter(laboratory)
    return laboratory


def enter(laboratory, count=2):
    with laboratory.trail() as writer:
        for _ in range(count):
            writer.append("looked", "workspace")


def check(laboratory):
    [found] = [each for each in laboratory.verify().outcomes if each.number == "1.7"]
    return found


def lines(laboratory):
    content = (laboratory.runs / "audit-trail.stamps.jsonl").read_bytes()
    return [json.loads(line) for line in content.splitlines()]


def rewrite(laboratory, stamps):
    content = b"".join(canonical_bytes(stamp) + b"\n" for stamp in stamps)
    (laboratory.runs / "audit-trail.stamps.jsonl").write_bytes(content)


def test_the_head_is_stamped_when_the_trail_is_closed_not_at_every_entry(stamped):
    digests = read_trail(stamped.runs).digests
    assert [(each["seq"], each["sha256"]) for each in lines(stamped)] == [(3, digests[2]), (5, digests[4])]


def test_opening_the_trail_without_an_entry_asks_for_no_stamp(stamped):
    with stamped.trail():
        pass
    assert len(lines(stamped)) == 2


def test_any_program_for_time_stamps_can_check_one_against_the_line_of_the_entry(stamped, house, tmp_path):
    line, kept = read_trail(stamped.runs).lines[4], lines(stamped)[1]
    (tmp_path / "line").write_bytes(line)
    (tmp_path / "answer").write_bytes(base64.b64decode(kept["answer"]))
    arguments = ["-data", tmp_path / "line", "-in", tmp_path / "answer", "-CAfile", house.folder / "root.pem"]
    done = subprocess.run(["openssl", "ts", "-verify", *arguments], capture_output=True, check=False)
    assert done.returncode == 0, done.stderr


def test_verification_compares_them_without_the_network_and_says_who_signed_and_when(stamped):
    found = check(stamped)
    assert found.outcome == "passed"
    assert "entry 5 was there at 20" in found.notes[0]
    assert "2 heads agree, up to entry 5 of 5" in found.notes[1]
    assert f"signed by Common Name: {NAME} (certificate SHA-256 " in found.notes[1]
    assert "could be cut off together with theirs" in found.notes[1]


def test_the_file_of_stamps_is_no_stranger_among_the_folios(stamped):
    [found] = [each for each in stamped.verify().outcomes if each.number == "2.3"]
    assert (found.outcome, found.notes) == ("passed", ())


def test_an_authority_out_of_reach_stops_nothing_and_is_entered(stamped):
    enter(stamped)
    actions = [entry.action for entry in read_trail(stamped.runs).entries]
    assert actions[5:] == ["looked", "looked", "witness-not-reached"]
    assert check(stamped).outcome == "passed"


@pytest.mark.requirement("TRAIL-11")
def test_a_trail_built_anew_is_not_the_one_that_was_stamped(stamped):
    from evidence.test_witnesses import forge

    forge(stamped.runs, 2, subject="something else")
    found = check(stamped)
    assert found.outcome == "failed"
    assert "entry 3 and 1 of the later ones is not the one that the witness was told of" in found.notes[0]


def test_entries_after_the_last_stamp_are_named(stamped):
    rewrite(stamped, lines(stamped)[:1])
    found = check(stamped)
    assert found.outcome == "not checkable"
    assert "not told of entries from 4 on" in found.notes[0]


def test_no_stamps_at_all_where_the_settings_name_an_authority_is_not_checkable(stamped):
    (stamped.runs / "audit-trail.stamps.jsonl").unlink()
    assert "it keeps no head yet; signed by nobody" in check(stamped).notes[0]


def test_entries_dated_after_their_stamp_are_a_finding(laboratory, house):
    laboratory.clock = lambda: "2199-01-01T00:00:00.000000Z"
    with serving(house.answer) as address:
        laboratory.witnesses = (StampWitness(address, laboratory.runs),)
        enter(laboratory)
    found = check(laboratory)
    assert found.outcome == "failed"
    assert "entry 3 is dated 2199-01-01 00:00:00 UTC, its time stamp says 20" in found.notes[0]
    assert "this computer's clock was ahead" in found.notes[0]


def altered(stamp, place):
    content = bytearray(base64.b64decode(stamp["answer"]))
    content[place] ^= 1
    return stamp | {"answer": base64.b64encode(content).decode()}


def test_every_byte_of_a_stamp_that_counts_is_signed(stamped):
    """A changed byte either spoils the stamp or changes nothing of what it says."""
    kept = lines(stamped)[1]
    whole = base64.b64decode(kept["answer"])
    head = TrailHead(kept["seq"], kept["sha256"])
    said = read_stamp(whole, head, None)
    spoilt = 0
    for place in range(0, len(whole), 7):
        content = bytearray(whole)
        content[place] ^= 1
        try:
            assert read_stamp(bytes(content), head, None).time == said.time
        except StampError:
            spoilt += 1
    assert spoilt > len(whole) // 7 * 0.5


@pytest.mark.parametrize(
    ("change", "words"),
    [
        (lambda stamp: altered(stamp, -5), "the time stamp of entry 3 is not valid"),
        (lambda stamp: stamp | {"sha256": "ab" * 32}, "is not valid: it is for something else"),
        (lambda stamp: stamp | {"answer": "%%"}, "the time stamp of entry 3 is not valid"),
        (lambda stamp: stamp | {"answer": ""}, "is not valid: it cannot be understood"),
        (lambda stamp: stamp | {"seq": "3"}, "line 1 is no kept time stamp"),
        (lambda stamp: {"url": stamp["url"]}, "line 1 is no kept time stamp"),
    ],
)
def test_an_altered_stamp_is_named(stamped, change, words):
    first, second = lines(stamped)
    rewrite(stamped, [change(first), second])
    found = check(stamped)
    assert found.outcome == "not checkable"
    assert words in found.notes[0]


@pytest.mark.parametrize(
    ("answer", "words"),
    [
        (lambda _query: b"no stamp", "it cannot be understood"),
        (lambda _query: b"", "it cannot be understood"),
        (lambda _query: bytes.fromhex("30053003020102"), "the authority answered rejection"),
    ],
)
def test_an_answer_that_is_no_stamp_is_entered_and_nothing_is_kept(laboratory, answer, words):
    with serving(answer) as address:
        laboratory.witnesses = (StampWitness(address, laboratory.runs),)
        enter(laboratory)
    last = read_trail(laboratory.runs).entries[-1]
    assert last.action == "witness-not-reached"
    assert words in last.reason
    assert not (laboratory.runs / "audit-trail.stamps.jsonl").exists()


def test_an_answer_to_another_question_is_no_stamp(stamped, house):
    kept = base64.b64decode(lines(stamped)[0]["answer"])
    head = read_trail(stamped.runs).digests[2]
    with pytest.raises(StampError, match="it answers another question"):
        read_stamp(kept, TrailHead(3, head), 12345)
    with pytest.raises(StampError, match="it is for something else"):
        read_stamp(kept, TrailHead(3, "00" * 32), None)
