"""What a reviewer of the trail sees first: every seeded anomaly, and nothing of an ordinary day."""

import pytest

from assayfolio.evidence import trail_exceptions as kinds
from assayfolio.evidence.trail import read_trail
from assayfolio.evidence.trail_exceptions import KINDS, trail_exceptions


def found(laboratory):
    return [(each.kind, each.entry.action, each.words) for each in trail_exceptions(entries(laboratory))]


def entries(laboratory):
    return read_trail(laboratory.runs).entries


def enter(laboratory, action, subject="IRON-7", reason=None, **details):
    with laboratory.trail() as writer:
        return writer.append(action, subject, reason, details)


def test_an_ordinary_run_is_no_exception(laboratory):
    laboratory.run()
    assert found(laboratory) == []


def test_a_second_run_on_the_same_data_is_one(laboratory):
    laboratory.run()
    laboratory.run()
    assert found(laboratory) == [(kinds.REPEATED, "allotted", "execution 2 of 2 on these data")]


def test_a_failed_run_is_one_with_its_reason(laboratory):
    laboratory.run(failing=True)
    assert found(laboratory) == [(kinds.FAILURES, "failed", "a font was missing")]


def test_a_run_with_exclusions_is_one(laboratory):
    enter(
        laboratory, "allotted", "LEAD-1/run-0001", number=1, inputs={}, data=[], exclusions="configs/out.yaml"
    )
    assert found(laboratory) == [(kinds.EXCLUSIONS, "allotted", "exclusions in configs/out.yaml")]


def register(laboratory, number, amends=None, reason=None):
    digests = {"seal": "1" * 64, "plan": "2" * 64, "study_definition": "3" * 64}
    subject = f"IRON-7/protocol-{number:04d}"
    enter(laboratory, "registered", subject, reason, amends=amends, **digests)


def test_a_plan_registered_or_amended_before_the_data_is_none_and_after_them_it_is_one(laboratory):
    register(laboratory, 1)
    register(laboratory, 2, amends=1, reason="the margin of the customer")
    laboratory.run()
    register(laboratory, 3, amends=2, reason="a level was mistyped")
    [(kind, _, words)] = found(laboratory)
    assert kind == kinds.LATE_PLANS
    assert words == "amended after entry 4, by which the data were first seen: a level was mistyped"


def test_data_that_come_after_the_first_run_are_one(laboratory):
    laboratory.run()
    enter(laboratory, "received", path="late.csv", size=3, sha256="9" * 64, study="IRON-7")
    assert found(laboratory) == [
        (kinds.LATE_DATA, "received", "late.csv came after entry 3, a run of IRON-7")
    ]


def test_settings_that_replace_others_are_one_and_the_first_ones_are_none(laboratory):
    change = {"key": "people.mberg.roles", "old": ["runner"], "new": ["approver"]}
    enter(laboratory, "settings", "laboratory settings", "first seen", was=None, differences=[])
    enter(laboratory, "settings", "laboratory settings", "new roles", was={}, differences=[change])
    assert found(laboratory) == [(kinds.SETTINGS_CHANGED, "settings", "people.mberg.roles")]


@pytest.mark.parametrize(
    ("action", "kind"),
    [
        ("refused", kinds.FAILURES),
        ("attempt-refused", kinds.FAILURES),
        ("interrupted", kinds.FAILURES),
        ("deviation-recorded", kinds.DEVIATIONS),
        ("voided", kinds.WITHDRAWN),
        ("replaces", kinds.WITHDRAWN),
        ("settings-proposed", kinds.SETTINGS_CHANGED),
        ("head-restored", kinds.REPAIRS),
        ("torn-line-set-aside", kinds.REPAIRS),
        ("rename-completed", kinds.REPAIRS),
        ("witness-not-reached", kinds.REPAIRS),
        ("witness-behind", kinds.REPAIRS),
    ],
)
def test_these_events_are_always_exceptions(laboratory, action, kind):
    enter(laboratory, action, reason="as it was")
    assert found(laboratory) == [(kind, action, "as it was")]


def test_a_clock_that_was_set_back_is_one(laboratory):
    laboratory.clock = lambda: "2026-03-01T08:00:00.000000Z"
    enter(laboratory, "looked")
    [(kind, _, words)] = found(laboratory)
    assert kind == kinds.CLOCK
    assert "the clock was set back" in words


def test_they_come_by_kind_failures_first_and_within_a_kind_in_their_order(laboratory):
    laboratory.run()
    enter(laboratory, "voided", "IRON-7/run-0001", "wrong balance")
    laboratory.run()
    laboratory.run(failing=True)
    enter(laboratory, "attempt-refused", "assayfolio run", "not in the list")
    exceptions = trail_exceptions(entries(laboratory))
    places = [KINDS.index(each.kind) for each in exceptions]
    assert places == sorted(places)
    assert [each.entry.action for each in exceptions][:2] == ["failed", "attempt-refused"]
    assert {each.kind for each in exceptions} == {kinds.FAILURES, kinds.REPEATED, kinds.WITHDRAWN}
