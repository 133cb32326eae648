import pytest

from assayfolio.evidence.entries import TrailEntry
from assayfolio.evidence.history import (
    next_number,
    run_histories,
    run_name,
    runs_not_closed,
    split_subject,
    trail_extract,
    unallotted,
)


def trail(*events):
    """Entries from (action, subject) pairs."""
    return [
        TrailEntry(seq, "2026-03-02T08:00:00.000000Z", "m.berg", action, subject, None, {}, "0" * 64)
        for seq, (action, subject) in enumerate(events, start=1)
    ]


def test_a_run_number_has_four_digits_and_more_when_it_needs_them():
    assert [run_name(number) for number in (1, 9999, 10000)] == ["run-0001", "run-9999", "run-10000"]


@pytest.mark.parametrize(
    ("subject", "run"),
    [
        ("IRON-7/run-0012", ("IRON-7", 12)),
        ("A/run-10000", ("A", 10000)),
        ("IRON-7/run-012", None),
        ("IRON-7/run-00012", None),
        ("iron/run-0001", None),
        ("IRON-7", None),
        ("IRON-7/run-0001/x", None),
        ("IRON-7/run-0001\n", None),
        ("IRON-7/run-٠٠٠١", None),
    ],
)
def test_only_a_runs_own_subject_is_one(subject, run):
    assert split_subject(subject) == run


def test_each_study_counts_its_own_runs():
    entries = trail(
        ("founded", "workspace"),
        ("allotted", "A/run-0001"),
        ("refused", "A"),
        ("allotted", "B/run-0001"),
        ("allotted", "A/run-0002"),
    )
    assert [next_number(entries, study) for study in ("A", "B", "C")] == [3, 2, 1]


def test_an_interrupted_run_keeps_its_number():
    entries = trail(("allotted", "A/run-0001"), ("interrupted", "A/run-0001"))
    assert next_number(entries, "A") == 2


def test_histories_come_by_study_and_number_with_their_own_entries():
    entries = trail(
        ("allotted", "B/run-0001"),
        ("allotted", "A/run-0001"),
        ("computed", "B/run-0001"),
        ("sealed", "A/run-0001"),
    )
    a, b = run_histories(entries)
    assert (a.subject, [entry.action for entry in a.entries]) == ("A/run-0001", ["allotted", "sealed"])
    assert (b.subject, [entry.action for entry in b.entries]) == ("B/run-0001", ["allotted", "computed"])
    assert (b.study, b.number, b.name, b.allotted.seq) == ("B", 1, "run-0001", 1)


@pytest.mark.parametrize(
    ("actions", "ended", "closed"),
    [
        (["computed"], None, False),
        (["computed", "failed"], "failed", False),
        (["failed", "staged", "sealed"], "sealed", True),
        (["staged", "sealed", "rename-completed"], "sealed", True),
        (["interrupted"], "interrupted", True),
        (["failed", "interrupted"], "interrupted", True),
    ],
)
def test_how_a_run_ended(actions, ended, closed):
    entries = trail(*[(action, "A/run-0001") for action in ("allotted", *actions)])
    [run] = run_histories(entries)
    assert (run.ended.action if run.ended else None) == ended
    assert run.is_closed == closed
    assert [each.subject for each in runs_not_closed(entries)] == ([] if closed else ["A/run-0001"])


@pytest.mark.requirement("TRAIL-3")
def test_what_a_folio_keeps_of_the_trail_ends_with_its_staging():
    entries = trail(
        *[
            (action, "A/run-0001")
            for action in ("allotted", "computed", "staged", "sealed", "rename-completed")
        ]
    )
    [run] = run_histories(entries)
    assert [entry.action for entry in run.to_be_staged] == ["allotted", "computed", "staged"]
    assert trail_extract(run.to_be_staged) == b"".join(entry.line + b"\n" for entry in entries[:3])


def test_a_run_that_is_staged_again_after_its_staging_failed_keeps_both_attempts():
    actions = ("allotted", "staged", "failed", "staged", "sealed")
    [run] = run_histories(trail(*[(action, "A/run-0001") for action in actions]))
    assert [entry.action for entry in run.to_be_staged] == list(actions[:-1])


def test_entries_about_a_run_that_was_never_allotted_are_found():
    entries = trail(("sealed", "A/run-0001"), ("allotted", "A/run-0001"), ("computed", "A/run-0001"))
    assert [entry.seq for entry in unallotted(entries)] == [1]
    [run] = run_histories(entries)
    assert run.allotted.seq == 2
