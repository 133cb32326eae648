import pytest

from assayfolio.errors import InputError
from assayfolio.evidence.entries import TrailEntry
from assayfolio.evidence.trail_filters import Period, TrailFilter, parse_period


def entry(
    seq,
    time="2026-03-02T08:15:30.250000Z",
    action="allotted",
    subject="IRON-7/run-0001",
    reason=None,
    **details,
):
    by = {"person": "M. Berg", "roles": ["runner"]}
    return TrailEntry(seq, time, "mberg", action, subject, reason, {"by": by, **details}, "0" * 64)


TRAIL = (
    entry(
        1, "2026-03-01T23:59:59.999999Z", "received", "IRON-7", path="configs/data/iron.csv", study="IRON-7"
    ),
    entry(2, reason="The data file has a blank in line 12", action="refused", subject="ZINC-1"),
    entry(
        3, "2026-03-02T08:15:59.000000Z", "trail-reviewed", run="IRON-7/run-0001", outcome="Nothing unusual"
    ),
    entry(4, "2026-04-01T00:00:00.000000Z", subject="IRON-77/run-0001"),
    TrailEntry(
        5, "2026-04-02T00:00:00.000000Z", "root", "settings", "laboratory settings", None, {}, "0" * 64
    ),
)


@pytest.mark.parametrize(
    ("wanted", "found"),
    [
        (TrailFilter(), [1, 2, 3, 4, 5]),
        (TrailFilter(who="mberg"), [1, 2, 3, 4]),
        (TrailFilter(who="m. BERG"), [1, 2, 3, 4]),
        (TrailFilter(who="runner"), [1, 2, 3, 4]),
        (TrailFilter(who="root"), [5]),
        (TrailFilter(what="allot"), [4]),
        (TrailFilter(what="iron.csv"), [1]),
        (TrailFilter(what="laboratory"), [5]),
        (TrailFilter(what="Berg"), []),
        (TrailFilter(why="blank"), [2]),
        (TrailFilter(why="unusual"), [3]),
        (TrailFilter(study="IRON-7"), [1, 3]),
        (TrailFilter(study="ZINC-1"), [2]),
        (TrailFilter(study="IRON"), []),
        (TrailFilter(who="mberg", study="IRON-7", what="received"), [1]),
        (TrailFilter(when=parse_period("2026-03-02..")), [2, 3, 4, 5]),
        (TrailFilter(when=parse_period("..2026-03-01")), [1]),
        (TrailFilter(when=parse_period("2026-03")), [1, 2, 3]),
        (TrailFilter(when=parse_period("2026-03..2026-04-01")), [1, 2, 3, 4]),
        (TrailFilter(when=parse_period("2026-03-02T08:15..2026-03-02T08:15")), [2, 3]),
        (TrailFilter(when=parse_period("2026-03-02 08:15:31Z..")), [3, 4, 5]),
        (TrailFilter(when=parse_period("2026-03-02T08:15:30.25..2026-03-02T08:15:30.250000Z")), [2]),
    ],
)
def test_entries_are_chosen_by_who_what_when_why_and_study(wanted, found):
    assert [one.seq for one in wanted.chosen(TRAIL)] == found


@pytest.mark.parametrize(
    "text", ["", "..", "March", "2026-3-1", "2026-03-01...2026-03-02", "2026-03-01T", "26-03-01"]
)
def test_what_is_no_period_is_refused_with_an_example(text):
    with pytest.raises(InputError, match=r"is no period; write FROM\.\.TO in UTC, such as"):
        parse_period(text)


def test_a_period_that_ends_before_it_begins_is_refused():
    with pytest.raises(InputError, match="ends before it begins"):
        parse_period("2026-03-02..2026-03-01")
    assert parse_period("2026-03-02..2026-03") == Period("2026-03-02", "2026-03")
