"""What entries say of person and clock, and what verification makes of it."""

import pytest

from assayfolio.evidence.entries import TrailEntry
from assayfolio.evidence.stamps import clock_remarks, local_time_of, own_details, person_of, roles_of
from assayfolio.evidence.trail import read_trail


def entry(seq, seconds, counter=None, boot="one", **at):
    """An entry this many seconds after eight, by a clock that knows its counter."""
    time = f"2026-03-02T08:{seconds // 60:02d}:{seconds % 60:02d}.000000Z"
    local = f"2026-03-02T09:{seconds // 60:02d}:{seconds % 60:02d}.000000+01:00"
    told = {"local": local, "boot": boot, "synchronised": True}
    if counter is not None:
        told["monotonic_us"] = counter * 1_000_000
    return TrailEntry(seq, time, "m.berg", "looked", "x", None, {"step": 1, "at": told | at}, "0" * 64)


def words(*entries):
    return [(remark.words, remark.impossible) for remark in clock_remarks(entries)]


def test_a_clock_that_goes_as_the_counter_does_needs_no_remark():
    assert words(entry(1, 0, 100), entry(2, 7, 107), entry(3, 7, 107), entry(4, 12, 110)) == []


def test_a_clock_set_back_or_forward_is_told_by_how_much():
    back = words(entry(1, 600, 100), entry(2, 10, 110, behind_seconds=590))
    between = "entries 1 and 2 (2026-03-02T08:10:00.000000Z, 2026-03-02T08:00:10.000000Z)"
    assert back == [(f"the clock was set back by 600 s between {between}", False)]
    [(forward, impossible)] = words(entry(1, 0, 100), entry(2, 600, 110))
    assert forward.startswith("the clock was set forward by 590 s between entries 1 and 2")
    assert not impossible


def test_over_a_new_start_only_a_clock_that_stands_behind_can_be_told():
    assert words(entry(1, 600, 100), entry(2, 900, 5, boot="two")) == []
    [(told, impossible)] = words(entry(1, 600, 100), entry(2, 10, 5, boot="two", behind_seconds=590.0))
    assert "is dated before entry 1" in told
    assert "the clock was set back" in told
    assert not impossible


@pytest.mark.parametrize(
    ("entries", "what"),
    [
        ((entry(1, 600, 100), entry(2, 10, 110)), "does not say so"),
        ((entry(1, 600), entry(2, 10)), "does not say so"),
        ((entry(1, 0, 100), entry(2, 5, 90)), "the counter of entry 2 runs behind that of entry 1"),
        ((entry(1, 0, local="2026-03-02T09:30:00.000000+01:00"),), "gives two different times"),
        ((entry(1, 0, local="yesterday"),), "no local time that can be understood"),
        ((entry(1, 0, local="2026-03-02T09:00:00"),), "no local time that can be understood"),
    ],
)
def test_what_no_clock_does_was_made_up(entries, what):
    [(told, impossible)] = words(*entries)
    assert what in told
    assert impossible


def test_entries_of_an_earlier_version_say_nothing_of_either():
    plain = TrailEntry(
        1, "2026-03-02T08:00:00.000000Z", "m.berg", "looked", "x", None, {"by": 3, "at": []}, ""
    )
    assert (person_of(plain), roles_of(plain), local_time_of(plain), own_details(plain)) == (
        None,
        (),
        None,
        {},
    )
    assert words(plain) == []


class TestAStamp:
    def test_goes_into_the_details_of_every_entry_also_of_those_that_mend(self, laboratory):
        laboratory.stamp = lambda last: {"by": {"person": "M. Berg"}, "at": {"last": last.seq if last else 0}}
        with (laboratory.runs / "audit-trail.jsonl").open("ab") as trail:
            trail.write(b"torn")
        with laboratory.trail() as writer:
            entry = writer.append("looked", "workspace", None, {"step": 1})
        assert entry.details == {"step": 1, "by": {"person": "M. Berg"}, "at": {"last": 2}}
        [aside] = [one for one in read_trail(laboratory.runs).entries if one.action == "torn-line-set-aside"]
        assert person_of(aside) == "M. Berg"

    def test_is_not_for_the_event_to_give(self, laboratory):
        laboratory.stamp = lambda _last: {"by": {}}
        with laboratory.trail() as writer, pytest.raises(ValueError, match="name what every entry carries"):
            writer.append("looked", "workspace", None, {"by": "somebody else"})
        assert len(read_trail(laboratory.runs).entries) == 1


@pytest.mark.parametrize(
    ("said", "outcome"), [({"behind_seconds": 3600}, "passed"), ({"behind_seconds": None}, "failed")]
)
def test_verification_notes_a_clock_set_back_and_refuses_an_entry_that_does_not_say_so(
    laboratory, said, outcome
):
    laboratory.clock = lambda: "2026-03-01T08:00:00.000000Z"
    laboratory.stamp = lambda _last: {"at": {"boot": "b", **said}}
    with laboratory.trail() as writer:
        writer.append("looked", "workspace")
    [times] = [each for each in laboratory.verify().outcomes if each.number == "1.6"]
    assert times.outcome == outcome
    assert "entry 2 (2026-03-01T08:00:00.000000Z) is dated before entry 1" in times.notes[0]
