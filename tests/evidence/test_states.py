"""States of studies and runs, from entries alone, and which move is in order in which state."""

from dataclasses import replace

import pytest

from assayfolio.evidence.entries import NO_LINE, TrailEntry
from assayfolio.evidence.moves import Move, Rules, rules_of, why_not
from assayfolio.evidence.states import run_standings, standing_words, study_standing
from assayfolio.study.laboratory import Laboratory, Separation

DATA, PLAN, SEAL = "da" * 32, "b0" * 32, "5e" * 32
RUN, SECOND = "LOT-7/run-0001", "LOT-7/run-0002"
ASKED = ["author", "reviewer", "approver"]
PLAIN = rules_of(Laboratory("Invented Waters", review_before_approval=False))
STRICT = rules_of(Laboratory("Invented Waters", require=("approved-protocol",)))


class Trail:
    """A trail that is written by hand; each step adds its entries and returns the trail."""

    def __init__(self) -> None:
        self.entries: list[TrailEntry] = []

    def add(
        self, action: str, subject: str, actor: str = "ann", reason: str | None = None, **details: object
    ):
        seq = len(self.entries) + 1
        time = f"2031-03-04T09:{seq:02d}:00.000000Z"
        self.entries.append(TrailEntry(seq, time, actor, action, subject, reason, details, NO_LINE))
        return self

    def register(self, number: int = 1):
        subject = f"LOT-7/protocol-{number:04d}"
        self.add("protocol-allotted", subject, number=number, sign_off=["author", "approver"])
        return self.add("registered", subject, seal=SEAL, plan=PLAN, study_definition=PLAN, amends=None)

    def approve_protocol(self, number: int = 1):
        subject = f"LOT-7/protocol-{number:04d}"
        return self.add("signed", subject, "ann", role="author", person="A. Analyst").add(
            "signed", subject, "cem", role="approver", person="C. Cole"
        )

    def receive(self):
        return self.add("received", "LOT-7", path="data.csv", size=9, sha256=DATA, study="LOT-7")

    def allot(self, subject: str = RUN):
        details = {"number": int(subject[-4:]), "inputs": {"data.csv": DATA}, "data": ["data.csv"]}
        return self.add("allotted", subject, **details, sign_off=ASKED)

    def complete(self, subject: str = RUN):
        return self.add("sealed", subject, seal=SEAL, outcome="completed")

    def fail(self, subject: str = RUN):
        return self.add("failed", subject, reason="no font").add(
            "sealed", subject, seal=SEAL, outcome="failed"
        )

    def sign(self, role: str, account: str, subject: str = RUN):
        return self.add("signed", subject, account, role=role, person=account.title())

    def review(self, account: str, subject: str = RUN):
        return self.add("trail-reviewed", subject, account, run=subject, through_seq=1, outcome="in order")

    def void(self, subject: str = RUN):
        details = {"investigation": "INV-9", "folio": "_laboratory/void-0001", "seal": SEAL}
        return self.add("voided", subject, "cem", "the wrong calibration was used", **details)

    def replace(self, old: str = RUN, new: str = SECOND):
        self.allot(new)
        return self.add("replaces", new, reason="measured again", replaced=old)

    @property
    def run(self):
        return run_standings(self.entries)[RUN]

    @property
    def study(self):
        return study_standing(self.entries, "LOT-7")

    def why_not(
        self, kind: str, account: str = "ann", role: str | None = None, rules: Rules = PLAIN
    ) -> str | None:
        return why_not(Move(kind, account, role), self.study, self.study.run(RUN), rules)


def ended() -> Trail:
    return Trail().receive().allot().complete()


STATES = {
    "at work": (Trail().receive().allot(), "draft"),
    "completed": (ended(), "draft"),
    "failed": (Trail().receive().allot().fail(), "failed"),
    "killed": (Trail().receive().allot().add("interrupted", RUN, reason="killed"), "failed"),
    "signed by one of three": (ended().sign("author", "ann"), "in review"),
    "signed by two of three": (ended().sign("author", "ann").sign("reviewer", "ben"), "in review"),
    "signed by all": (
        ended().sign("author", "ann").sign("reviewer", "ben").sign("approver", "cem"),
        "approved",
    ),
    "void": (ended().void(), "void"),
    "approved, then void": (
        ended().sign("author", "ann").sign("reviewer", "ben").sign("approver", "cem").void(),
        "void",
    ),
    "replaced by a run at work": (ended().replace(), "draft"),
    "replaced by a run that failed": (ended().replace().fail(SECOND), "draft"),
    "replaced by a completed run": (ended().replace().complete(SECOND), "superseded"),
    "void, then replaced": (ended().void().replace().complete(SECOND), "void"),
}


@pytest.mark.parametrize(("trail", "state"), STATES.values(), ids=STATES.keys())
def test_the_state_of_a_run_follows_from_its_entries(trail: Trail, state: str) -> None:
    assert trail.run.state == state


def test_a_signature_where_nobody_was_asked_for_leaves_the_approver_to_sign() -> None:
    trail = ended()
    trail.entries = [
        replace(entry, details={**entry.details, "sign_off": []}) if entry.action == "allotted" else entry
        for entry in trail.entries
    ]
    assert trail.sign("author", "ann").run.state == "in review"
    assert trail.sign("approver", "cem").run.state == "approved"


def test_both_runs_say_which_replaces_which() -> None:
    trail = ended().void().replace().complete(SECOND)
    old, new = run_standings(trail.entries).values()
    assert standing_words(old) == [
        (
            "void since 2031-03-04 (entry 4): the wrong calibration was used; investigation INV-9, folio "
            "_laboratory/void-0001"
        ),
        "superseded by LOT-7/run-0002",
    ]
    assert standing_words(new) == ["replaces LOT-7/run-0001"]


STUDIES = {
    "nothing entered": (Trail(), "draft"),
    "a registered plan": (Trail().register(), "registered"),
    "data before any plan": (Trail().receive(), "data locked"),
    "data behind the plan": (Trail().register().receive(), "data locked"),
    "a completed run": (ended(), "data locked"),
    "a run in review": (ended().sign("author", "ann"), "in review"),
    "an approved run": (
        ended().sign("author", "ann").sign("reviewer", "ben").sign("approver", "cem"),
        "approved",
    ),
    "an approved run, void": (
        ended().sign("author", "ann").sign("reviewer", "ben").sign("approver", "cem").void(),
        "data locked",
    ),
}


@pytest.mark.parametrize(("trail", "state"), STUDIES.values(), ids=STUDIES.keys())
def test_the_state_of_a_study_follows_from_its_entries(trail: Trail, state: str) -> None:
    assert trail.study.state == state


def test_a_protocol_is_approved_when_everybody_asked_has_signed_and_an_amendment_is_not() -> None:
    trail = Trail().register()
    assert not trail.study.protocol_approved
    assert trail.approve_protocol().study.protocol_approved
    assert not trail.register(2).study.protocol_approved
    assert trail.study.protocol == "protocol-0002"


class TestMoves:
    def test_a_plan_is_registered_once_and_then_amended(self) -> None:
        assert Trail().why_not("preregister") is None
        assert "no plan of LOT-7" in Trail().why_not("amend")
        assert "registered already" in Trail().register().why_not("preregister")
        assert Trail().register().why_not("amend") is None

    def test_where_it_is_required_a_run_waits_for_an_approved_protocol(self) -> None:
        assert Trail().why_not("run") is None
        assert "not registered" in Trail().why_not("run", rules=STRICT)
        assert "not approved" in Trail().register().why_not("run", rules=STRICT)
        assert Trail().register().approve_protocol().why_not("run", rules=STRICT) is None
        assert "protocol-0002 is not approved" in Trail().register().approve_protocol().register(2).why_not(
            "run", rules=STRICT
        )

    def test_only_a_completed_run_that_is_not_void_is_declared_void(self) -> None:
        assert "no such run" in Trail().why_not("void")
        assert "at work" in Trail().receive().allot().why_not("void")
        assert "failed" in Trail().receive().allot().fail().why_not("void")
        assert ended().why_not("void") is None
        assert "void already, by entry 4" in ended().void().why_not("void")

    def test_a_run_that_has_ended_is_replaced_once(self) -> None:
        assert "no such run" in Trail().why_not("replace")
        assert "has not ended" in Trail().receive().allot().why_not("replace")
        assert Trail().receive().allot().fail().why_not("replace") is None
        assert ended().void().why_not("replace") is None
        assert ended().replace().fail(SECOND).why_not("replace") is None
        assert "superseded by LOT-7/run-0002" in ended().replace().complete(SECOND).why_not("replace")

    @pytest.mark.requirement("ORDER-1")
    def test_a_signature_needs_a_completed_run_on_locked_data(self) -> None:
        assert "only a completed run" in Trail().why_not("sign", role="author")
        assert "only a completed run" in Trail().receive().allot().fail().why_not("sign", role="author")
        assert "not entered before" in Trail().allot().receive().complete().why_not("sign", role="author")
        assert ended().why_not("sign", role="author") is None
        assert "is void" in ended().void().why_not("sign", role="author")
        assert "is superseded" in ended().replace().complete(SECOND).why_not("sign", role="author")

    def test_a_signature_needs_an_approved_protocol_where_that_is_required(self) -> None:
        trail = Trail().register().receive().allot().complete()
        assert "no approved protocol" in trail.why_not("sign", role="author", rules=STRICT)
        trail = Trail().register().approve_protocol().receive().allot().complete()
        assert trail.why_not("sign", role="author", rules=STRICT) is None

    def test_a_role_signs_once_and_only_where_it_is_asked(self) -> None:
        assert "signed as author already" in ended().sign("author", "ann").why_not("sign", role="author")
        assert "nobody is asked" in ended().why_not("sign", role="witness")

    def test_the_approver_comes_last(self) -> None:
        signed = ended().sign("author", "ann")
        assert "not signed yet as reviewer" in signed.why_not("sign", "cem", "approver")
        assert signed.sign("reviewer", "ben").why_not("sign", "cem", "approver") is None

    @pytest.mark.requirement("ROLE-2")
    def test_the_reviewer_is_not_who_ran_it_and_the_approver_not_who_signed_as_author(self) -> None:
        signed = ended().sign("author", "ann")
        assert "has to be another person" in signed.why_not("sign", "ann", "reviewer")
        signed = signed.sign("reviewer", "ben")
        assert "has to be another person" in signed.why_not("sign", "ann", "approver")

    @pytest.mark.requirement("ROLE-2")
    @pytest.mark.parametrize(
        "rules",
        [
            replace(PLAIN, one_person=True),
            replace(PLAIN, separation=Separation(False, False)),
        ],
    )
    def test_unless_the_laboratory_has_one_person_or_does_not_separate(self, rules: Rules) -> None:
        signed = ended().sign("author", "ann")
        assert signed.why_not("sign", "ann", "reviewer", rules) is None
        assert signed.sign("reviewer", "ann").why_not("sign", "ann", "approver", rules) is None

    def test_a_run_is_approved_when_its_trail_was_reviewed_by_who_did_not_run_it(self) -> None:
        rules = replace(PLAIN, review_before_approval=True)
        signed = ended().sign("author", "ann").sign("reviewer", "ben")
        assert "trail of LOT-7/run-0001 was not reviewed" in signed.why_not("sign", "cem", "approver", rules)
        assert "was not reviewed" in signed.review("ann").why_not("sign", "cem", "approver", rules)
        assert signed.review("ben").why_not("sign", "cem", "approver", rules) is None
