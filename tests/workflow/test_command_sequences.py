"""Whatever order commands are given in, by whomever: no state is reached that the rules forbid.

Rendering is replaced by a few bytes; everything else is the program itself, on real folders. Signing is not
a command of this version: a stand-in asks the same rules (`evidence.moves`) and enters what signing will.
What must hold is looked up in the audit trail by this file alone. By default 100 sequences are drawn; all
thousand with `ASSAYFOLIO_SEQUENCES=1000 pytest tests/workflow/test_command_sequences.py`.
"""

import contextlib
import os
import tempfile
from collections.abc import Iterator
from functools import cache
from pathlib import Path
from unittest import mock

import pytest
from hypothesis import HealthCheck, Phase, event, given, settings
from hypothesis import strategies as st

from assayfolio.evidence.environment import environment_record
from assayfolio.evidence.history import run_histories, split_subject
from assayfolio.evidence.moves import Move, rules_of, why_not
from assayfolio.evidence.states import study_standing
from assayfolio.evidence.trail import read_trail
from assayfolio.evidence.verification import verify_workspace
from assayfolio.report.render import RenderedReport
from assayfolio.workflow.actors import actor_of
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.settings_files import standing_settings
from assayfolio.workflow.workspace import Workspace
from support.staff import ACCOUNTS, NOBODY, acting, staffed
from support.workspaces import DATA, STUDY, Bench

SEQUENCES = int(os.environ.get("ASSAYFOLIO_SEQUENCES", "100"))
ROLES = ("author", "reviewer", "approver")
SIGNED_OFF = (
    STUDY + "  - {role: reviewer, meaning: I checked it}\n  - {role: approver, meaning: I approve it}\n"
)
MAY_SIGN = {"ann": {"author"}, "ben": {"reviewer"}, "cem": {"approver"}}
LABORATORIES = (
    "",
    "require: [pre-registration]\n",
    "require: [approved-protocol]\n",
    "review-before-approval: false\n",
)
REASON = "The second balance replaced the first in April"
PDF = b"%PDF-1.7 a page that was not set\n"

accounts = st.sampled_from((*ACCOUNTS, NOBODY))
# Mostly by who may, so that sequences come far; sometimes by anybody.
author, approver, reviewer = (st.one_of(st.just(one), accounts) for one in ("ann", "cem", "ben"))
numbers = st.integers(1, 2)
COMMANDS = st.one_of(
    st.tuples(st.just("preregister"), author),
    st.tuples(st.just("edit"), st.sampled_from(["0.05", "0.01", "0.1"])),
    st.tuples(st.just("data"), st.sampled_from(["48.2", "48.4"])),
    st.tuples(st.just("amend"), author),
    st.tuples(st.just("run"), author),
    st.tuples(st.just("run"), author),
    st.tuples(st.just("replace"), author, numbers),
    st.tuples(st.just("void"), approver, numbers),
    st.tuples(st.just("review"), reviewer, numbers),
    st.tuples(st.just("sign"), accounts, st.sampled_from(ROLES), st.just("run"), numbers),
    st.tuples(st.just("sign all"), st.just("run"), numbers),
    st.tuples(st.just("sign all"), st.just("protocol"), numbers),
    st.just(("approve",)),
    st.just(("finish",)),
    st.just(("hurry",)),
    st.just(("replace", "ann", 1)),
    st.tuples(st.just("usurp"), st.sampled_from(["ben", "dot"])),
    st.just(("appoint alone",)),
    st.tuples(st.just("settings"), accounts),
    st.tuples(st.just("confirm"), accounts),
    st.tuples(st.just("give role"), st.sampled_from(["ben", "dot"])),
)


@cache
def environment() -> dict:
    """The record of this machine with few packages: how many there are is no matter of states."""
    record = environment_record()
    return {**record, "packages": record["packages"][:2]}


@contextlib.contextmanager
def without_rendering() -> Iterator[None]:
    """Nothing is set in type, and nothing waits for the disk: both are tested elsewhere."""
    stand_ins = {
        "assayfolio.workflow.run.load_renderer": None,
        "assayfolio.workflow.run.environment_record": environment(),
        "assayfolio.workflow.run.render_report": RenderedReport(PDF, ()),
        "assayfolio.workflow.run.self_check": "not made",
        "assayfolio.workflow.protocol_folio.load_renderer": None,
        "assayfolio.workflow.protocol_folio.environment_record": environment(),
        "assayfolio.workflow.protocol_folio.render_protocol": PDF,
        "os.fsync": None,
    }
    with contextlib.ExitStack() as held:
        for name, answer in stand_ins.items():
            held.enter_context(mock.patch(name, return_value=answer))
        yield


class Sequence:
    """One workspace, and the commands that are given in it."""

    def __init__(self, root: Path, laboratory: str) -> None:
        self.bench = staffed(Bench(root, SIGNED_OFF), laboratory)
        self.bench.runs.mkdir()
        self.workspace = Workspace(root)

    def give(self, command: tuple) -> None:
        name, *arguments = command
        code = getattr(self, name.replace(" ", "_"))(*arguments)
        assert code in (0, 1, 2), f"{command} answered {code}"
        event(f"{name}: {'done' if code != 2 else 'refused'}")

    def by(self, account: str, *arguments: object) -> int:
        with acting(account):
            return self.bench(*arguments).code

    def preregister(self, account: str) -> int:
        return self.by(account, "preregister", self.bench.study)

    def amend(self, account: str) -> int:
        return self.by(account, "amend", self.bench.study, "--reason", REASON)

    def edit(self, alpha: str) -> int:
        self.bench.study.write_text(SIGNED_OFF.replace("alpha: 0.05", f"alpha: {alpha}"))
        return 0

    def data(self, value: str) -> int:
        self.bench.data.write_text(DATA.replace("48.2", value))
        return 0

    def run(self, account: str) -> int:
        return self.by(account, "run", self.bench.study)

    def replace(self, account: str, number: int) -> int:
        old = ("--replaces", f"run-{number:04d}", "--reason", REASON)
        return self.by(account, "run", self.bench.study, *old)

    def void(self, account: str, number: int) -> int:
        why = ("--reason", REASON, "--investigation", "INV-7")
        return self.by(account, "void", f"TST-1/run-{number:04d}", *why)

    def review(self, account: str, number: int) -> int:
        return self.by(account, "trail", "--review", f"TST-1/run-{number:04d}", "--outcome", REASON)

    def settings(self, account: str) -> int:
        return self.by(account, "settings", "--reason", f"{REASON}, case {len(self.bench.entries())}")

    def confirm(self, account: str) -> int:
        return self.by(account, "settings", "--confirm")

    def give_role(self, account: str) -> int:
        people = self.bench.root / "configs/people.yaml"
        lines = people.read_text().splitlines()
        people.write_text(
            "".join(
                f"{line.replace('roles: [', 'roles: [runner, ', 1)}\n"
                if f"account: {account}," in line and "runner" not in line
                else f"{line}\n"
                for line in lines
            )
        )
        return 0

    def approve(self) -> int:
        """Register the plan, and have it signed by everybody."""
        self.preregister("ann")
        return self.sign_all("protocol", len(list((self.bench.runs / "TST-1").glob("protocol-*"))))

    def finish(self) -> int:
        """Run the study, have its trail reviewed, and have it signed by everybody."""
        if self.run("ann") == 2:
            return 2
        number = len(list((self.bench.runs / "TST-1").glob("run-*")))
        self.review("ben", number)
        return self.sign_all("run", number)

    def hurry(self) -> int:
        """Run the study, and have it signed by everybody without a review of its trail."""
        if self.run("ann") == 2:
            return 2
        return self.sign_all("run", len(list((self.bench.runs / "TST-1").glob("run-*"))))

    def usurp(self, account: str) -> int:
        """Give oneself a role by hand, and run."""
        self.give_role(account)
        return self.run(account)

    def appoint_alone(self) -> int:
        """Give oneself a role, and confirm it oneself."""
        self.give_role("dot")
        self.settings("dot")
        return self.confirm("dot")

    def sign_all(self, kind: str, number: int) -> int:
        codes = {
            self.sign(account, role, kind, number) for account, role in zip(MAY_SIGN, ROLES, strict=True)
        }
        return min(codes)

    def sign(self, account: str, role: str, kind: str, number: int) -> int:
        """What signing will do: ask the rules, then enter the signature."""
        subject = f"TST-1/{kind}-{number:04d}"
        with acting(account), trail_book(self.workspace, 1) as trail:
            study = study_standing(trail.entries, "TST-1")
            rules = rules_of(standing_settings(self.workspace).laboratory)
            registered = {entry.subject for entry in trail.entries if entry.action == "registered"}
            if kind == "protocol":
                allowed = subject in registered
            else:
                allowed = why_not(Move("sign", account, role), study, study.run(subject), rules) is None
            if not allowed or role not in MAY_SIGN.get(account, set()):
                return 2
            person = actor_of(self.workspace).person
            trail.append("signed", subject, None, {"role": role, "person": person})
        return 0


class Rules:
    """What must hold of each entry by those before it; kept apart from how the program derives states."""

    def __init__(self, entries: tuple, laboratory: str) -> None:
        self.entries = entries
        self.laboratory = laboratory
        self.runs = {history.subject: history for history in run_histories(entries)}
        self.received: dict[str, int] = {}
        self.protocol: str | None = None
        self.approved: set[str] = set()
        self.reviewed: set[str] = set()
        self.void: set[str] = set()
        self.signed: dict[str, dict[str, str]] = {}

    def check(self) -> None:
        for entry in self.entries:
            if entry.action in RULES:
                RULES[entry.action](self, entry)

    def has_received(self, entry) -> None:
        self.received.setdefault(entry.details["sha256"], entry.seq)

    def registered(self, entry) -> None:
        self.protocol = entry.subject

    def allotted(self, entry) -> None:
        assert may_run(entry.actor, self.entries[: entry.seq - 1]), f"{entry.actor} may not run"
        if "pre-registration" in self.laboratory or "approved-protocol" in self.laboratory:
            assert self.protocol is not None, "a run without a registered plan"
        if "approved-protocol" in self.laboratory:
            assert self.protocol in self.approved, "a run without an approved protocol"

    def trail_reviewed(self, entry) -> None:
        run = entry.details["run"]
        assert entry.actor != self.runs[run].allotted.actor, "a review of one's own run"
        self.reviewed.add(run)

    def voided(self, entry) -> None:
        assert entry.subject not in self.void, "void twice"
        assert self.runs[entry.subject].sealed.details["outcome"] == "completed"
        assert entry.details["investigation"]
        assert entry.reason
        assert entry.actor == "cem"
        self.void.add(entry.subject)

    def has_signed(self, entry) -> None:
        role = entry.details["role"]
        if split_subject(entry.subject) is None:
            if role == "approver":
                self.approved.add(entry.subject)
            return
        history = self.runs[entry.subject]
        assert history.sealed.seq < entry.seq, "signed before it was sealed"
        assert history.sealed.details["outcome"] == "completed"
        inputs = history.allotted.details["inputs"]
        for path in history.allotted.details["data"]:
            assert self.received[inputs[path]] < history.allotted.seq, "signed without locked data"
        assert entry.subject not in self.void, "signed although void"
        by_role = self.signed.setdefault(entry.subject, {})
        assert role not in by_role, "signed twice in one role"
        by_role[role] = entry.actor
        assert role != "reviewer" or entry.actor != history.allotted.actor
        if role == "approver":
            assert set(by_role) == set(ROLES), "approved before the others signed"
            assert by_role["approver"] != by_role["author"]
            if "review-before-approval: false" not in self.laboratory:
                assert entry.subject in self.reviewed, "approved without a review of its trail"


RULES = {
    "received": Rules.has_received,
    "registered": Rules.registered,
    "allotted": Rules.allotted,
    "trail-reviewed": Rules.trail_reviewed,
    "voided": Rules.voided,
    "signed": Rules.has_signed,
}


def check_rules(bench: Bench, laboratory: str) -> None:
    """What must hold of the trail whatever was done, and of the folders as verification sees them."""
    entries = read_trail(bench.runs).entries
    rules = Rules(entries, laboratory)
    rules.check()
    for subject, by_role in rules.signed.items():
        event(f"signed by {len(by_role)}{', void' if subject in rules.void else ''}")
    check_replacements(rules.runs)
    check_settings(entries)
    check_folders(bench, entries, rules.void)


def may_run(account: str, before: list) -> bool:
    """Whether the list of people that was in force gave the account a role to run."""
    texts = [entry.details["texts"] for entry in before if entry.action == "settings"]
    lines = texts[-1]["configs/people.yaml"].splitlines()
    [line] = [line for line in lines if f"account: {account}," in line] or [""]
    return "runner" in line or "author" in line


def check_replacements(runs: dict) -> None:
    """A completed run replaces one run of its study, and no run is replaced by two."""
    replaced = [
        entry.details["replaced"]
        for history in runs.values()
        for entry in history.entries
        if entry.action == "replaces" and history.sealed.details["outcome"] == "completed"
    ]
    assert len(replaced) == len(set(replaced))
    assert set(replaced) <= set(runs)


def check_settings(entries: tuple) -> None:
    """A change of people was proposed by an administrator and confirmed by another."""
    proposals = {entry.seq: entry for entry in entries if entry.action == "settings-proposed"}
    for entry in [entry for entry in entries if entry.action == "settings"][1:]:
        proposal = proposals[entry.details["proposed"]["seq"]]
        assert proposal.actor == "dot"
        assert entry.actor == "cem"
        assert proposal.details["files"] == entry.details["files"]


def check_folders(bench: Bench, entries: tuple, void: set[str]) -> None:
    """Verification finds nothing, settings that were edited aside; no run is lost, void ones among them."""
    failed = verify_workspace(bench.runs, None).with_outcome("failed")
    assert [each for each in failed if each.number != "2.6"] == []
    folders = {f"TST-1/{path.name}" for path in (bench.runs / "TST-1").glob("run-*")}
    allotted = [entry.subject for entry in entries if entry.action == "allotted"]
    assert folders == set(allotted)
    assert allotted == [f"TST-1/run-{number:04d}" for number in range(1, len(allotted) + 1)]
    assert void <= folders


@pytest.mark.requirement("ORDER-1")
@pytest.mark.slow
@settings(
    max_examples=SEQUENCES,
    deadline=None,
    phases=(Phase.explicit, Phase.reuse, Phase.generate),  # a sequence is short enough to be read as it is
    suppress_health_check=[HealthCheck.too_slow, HealthCheck.data_too_large],
)
@given(laboratory=st.sampled_from(LABORATORIES), commands=st.lists(COMMANDS, min_size=5, max_size=14))
def test_no_order_of_commands_breaks_the_rules(laboratory: str, commands: list[tuple]) -> None:
    with tempfile.TemporaryDirectory() as folder, without_rendering():
        sequence = Sequence(Path(folder).resolve() / "w", laboratory)
        for command in commands:
            sequence.give(command)
        check_rules(sequence.bench, laboratory)
