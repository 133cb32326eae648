"""The trail as people use it: who and when in every entry, filters, tables, reviews, what was read."""

import csv
import io
import json
import os
import pwd
import time
from datetime import UTC, datetime

import pytest

from assayfolio.canonical import sha256_hex
from assayfolio.workflow import clock as clock_module
from assayfolio.workflow import surroundings
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.clock import EntryClock, clock_is_synchronised
from assayfolio.workflow.workspace import Workspace
from support.workspaces import Bench

PEOPLE = """\
people:
  - {person: A. Runner, account: arunner, roles: [author, runner], qualification: TR-001}
  - {person: B. Reader, account: breader, roles: [reviewer], qualification: TR-002}
  - {person: C. Clerk, account: cclerk, roles: [runner], qualification: TR-003}
"""
OUTCOME = "Entries read one by one; the exclusion has a cause, the clock was kept"


@pytest.fixture
def bench(tmp_path):
    return Bench(tmp_path / "w")


@pytest.fixture
def act(monkeypatch):
    """Be another account of the operating system."""
    return lambda account: monkeypatch.setattr(surroundings, "account_name", lambda: account)


def allot(bench, action="allotted"):
    """A run in the trail, without the minute that a real one takes."""
    with trail_book(Workspace(bench.root), 1.0) as trail:
        for each in (action, "staged"):
            trail.append(each, "TST-1/run-0001", None, {"number": 1, "inputs": {}, "data": []})


@pytest.fixture
def people(bench, act):
    (bench.root / "configs" / "people.yaml").write_text(PEOPLE)
    act("arunner")
    allot(bench)
    return bench


def refusals(bench):
    return [entry["reason"] for entry in bench.entries() if entry["action"] == "attempt-refused"]


class TestEveryEntry:
    @pytest.mark.requirement("TRAIL-7")
    def test_says_who_in_which_roles_and_when_by_which_clock(self, people):
        for entry in people.entries():
            assert entry["actor"] == "arunner"
            assert entry["details"]["by"] == {"person": "A. Runner", "roles": ["author", "runner"]}
            at = entry["details"]["at"]
            assert set(at) == {"local", "boot", "monotonic_us", "synchronised"}
            assert at["synchronised"] in (True, False, None)

    def test_gives_the_same_moment_twice_and_counts_on(self, people):
        entries = people.entries()
        for entry in entries:
            assert entry["details"]["at"]["local"].startswith(entry["time"][:11])
        counters = [entry["details"]["at"]["monotonic_us"] for entry in entries]
        assert counters == sorted(counters)

    def test_names_the_account_alone_where_there_is_no_list_of_people(self, bench):
        allot(bench)
        account = pwd.getpwuid(os.geteuid()).pw_name
        assert bench.entries()[0]["actor"] == account
        assert bench.entries()[0]["details"]["by"] == {"person": None, "roles": []}

    def test_names_nobody_where_the_list_cannot_be_read(self, people):
        (people.root / "configs" / "people.yaml").write_text("people: [")
        allot(people)
        assert people.entries()[-1]["details"]["by"] == {"person": None, "roles": []}


class TestTheClock:
    @pytest.mark.requirement("TRAIL-12")
    def test_that_stands_behind_the_last_entry_says_by_how_much(self, bench):
        with trail_book(Workspace(bench.root), 1.0) as trail:
            last = trail.append("looked", "workspace")
        clock = EntryClock()
        clock.now()
        future = type(last)(
            **{**{k: getattr(last, k) for k in last.__slots__}, "time": "2999-01-01T00:00:00.000000Z"}
        )
        assert clock.at(future)["behind_seconds"] > 3e10
        assert "behind_seconds" not in clock.at(last)

    @pytest.mark.requirement("TRAIL-12")
    def test_tells_the_two_hours_apart_that_the_end_of_summer_time_makes_one(self, monkeypatch):
        monkeypatch.setenv("TZ", "CET-1CEST,M3.5.0,M10.5.0/3")
        time.tzset()
        try:
            clock = EntryClock()
            told = []
            for hour in (0, 1):
                clock._moment = datetime(2026, 10, 25, hour, 30, tzinfo=UTC)
                told.append(clock.at(None)["local"])
        finally:
            monkeypatch.undo()
            time.tzset()
        assert told == ["2026-10-25T02:30:00.000000+02:00", "2026-10-25T02:30:00.000000+01:00"]

    @pytest.mark.requirement("TRAIL-12")
    @pytest.mark.parametrize(("answer", "kept"), [(0, True), (1, True), (4, True), (5, False), (-1, None)])
    def test_is_kept_or_not_as_the_kernel_says(self, monkeypatch, answer, kept):
        class Kernel:
            @staticmethod
            def adjtimex(_buffer):
                return answer

        monkeypatch.setattr(clock_module.ctypes, "CDLL", lambda *_, **__: Kernel)
        assert clock_is_synchronised() is kept

    def test_is_not_known_to_be_kept_where_the_system_cannot_be_asked(self, monkeypatch):
        monkeypatch.setattr(clock_module.ctypes, "CDLL", lambda *_, **__: object())
        assert clock_is_synchronised() is None


class TestShowing:
    @pytest.mark.requirement("TRAIL-9")
    def test_only_what_is_asked_for_and_how_many_of_how_many(self, people):
        answer = people("trail", "--what", "staged", "--who", "a. runner", "--when", "2000..")
        assert answer.code == 0
        assert "A. Runner (arunner)  staged  TST-1/run-0001" in answer.out
        assert "allotted" not in answer.out
        assert "Shown: 1 of 2 entries" in answer.out
        assert people("trail", "--study", "TST-2", "--json").document["entries"] == []

    def test_a_period_that_is_none_is_refused(self, people):
        answer = people("trail", "--when", "March")
        assert (answer.code, "write FROM..TO in UTC" in answer.err) == (2, True)

    @pytest.mark.requirement("TRAIL-9")
    def test_a_table_holds_every_entry_with_who_when_what_and_why(self, people, tmp_path):
        table = tmp_path / "trail.csv"
        answer = people("trail", "--csv", table)
        assert answer.code == 0
        assert sha256_hex(table.read_bytes()) in answer.out
        rows = list(csv.DictReader(io.StringIO(table.read_text("utf-8"), newline="")))
        entries = people.entries()
        assert [int(row["seq"]) for row in rows] == [entry["seq"] for entry in entries]
        for row, entry in zip(rows, entries, strict=True):
            assert row["person"] == "A. Runner"
            assert row["time"] == entry["time"]
            assert row["local time"] == entry["details"]["at"]["local"]
            own = {key: value for key, value in entry["details"].items() if key not in ("by", "at")}
            assert json.loads(row["details"]) == own
            assert row["previous"] == entry["previous"]
        assert [row["sha256"] for row in rows][:-1] == [entry["previous"] for entry in entries][1:]

    def test_a_table_never_replaces_a_file(self, people, tmp_path):
        (tmp_path / "there.csv").write_text("x")
        answer = people("trail", "--csv", tmp_path / "there.csv")
        assert (answer.code, "is there already" in answer.err) == (2, True)
        assert (tmp_path / "there.csv").read_text() == "x"

    def test_a_table_starts_no_formula(self, bench, tmp_path):
        with trail_book(Workspace(bench.root), 1.0) as trail:
            trail.append("refused", "=1+1", '=HYPERLINK("x")')
        bench("trail", "--csv", tmp_path / "t.csv")
        [row] = csv.DictReader(io.StringIO((tmp_path / "t.csv").read_text("utf-8"), newline=""))
        assert (row["subject"], row["reason"]) == ("'=1+1", '\'=HYPERLINK("x")')

    @pytest.mark.requirement("TRAIL-10")
    def test_exceptions_come_first_and_everything_else_after_them(self, people):
        with trail_book(Workspace(people.root), 1.0) as trail:
            trail.append("refused", "TST-1", "the data file is empty")
        answer = people("trail", "--exceptions")
        lines = answer.out.splitlines()
        assert lines[0] == "Failures and refusals: 1"
        assert "the data file is empty" in lines[2]
        assert lines[3] == "All other entries: 2"
        document = people("trail", "--exceptions", "--json").document
        assert [each["seq"] for each in document["exceptions"]] == [3]
        assert document["entries"] == people.entries()

    @pytest.mark.parametrize(
        "options",
        [
            ("--data", "--who", "x"),
            ("--data", "--exceptions"),
            ("--outcome", OUTCOME),
            ("--review", "TST-1/run-0001"),
        ],
    )
    def test_options_that_do_not_go_together_are_refused(self, people, options):
        assert people("trail", *options).code == 2


class TestReviewing:
    @pytest.mark.requirement("TRAIL-10")
    def test_is_entered_with_outcome_and_how_far(self, people, act):
        act("breader")
        answer = people("trail", "--review", "TST-1/run-0001", "--outcome", OUTCOME, "--json")
        assert answer.code == 0, answer.err
        entry = people.entries()[-1]
        assert (entry["action"], entry["subject"], entry["actor"]) == (
            "trail-reviewed",
            "TST-1/run-0001",
            "breader",
        )
        assert entry["details"]["through_seq"] == entry["seq"] - 1
        assert (entry["details"]["run"], entry["details"]["outcome"]) == ("TST-1/run-0001", OUTCOME)
        assert answer.document["seq"] == entry["seq"]

    def test_may_name_the_folio_by_its_path(self, people, act):
        act("breader")
        assert people("trail", "--review", people.runs / "TST-1" / "run-0001", "--outcome", OUTCOME).code == 0

    @pytest.mark.requirement("TRAIL-10")
    def test_by_who_ran_it_is_refused_and_the_attempt_entered(self, people, act):
        act("arunner")
        (people.root / "configs" / "people.yaml").write_text(
            PEOPLE.replace("author, runner", "runner, reviewer")
        )
        answer = people("trail", "--review", "TST-1/run-0001", "--outcome", OUTCOME)
        assert answer.code == 2
        [reason] = refusals(people)
        assert reason == "A. Runner took part in TST-1/run-0001; its trail is reviewed by another person"

    def test_by_somebody_without_the_role_is_refused_and_the_attempt_entered(self, people, act):
        act("cclerk")
        assert people("trail", "--review", "TST-1/run-0001", "--outcome", OUTCOME).code == 2
        assert "C. Clerk has not the role" in refusals(people)[0]

    def test_by_the_only_person_is_allowed_where_the_laboratory_has_one(self, bench):
        with (bench.root / "configs" / "lab.yaml").open("a") as settings:
            settings.write("one-person: true\n")
        allot(bench)
        assert bench("trail", "--review", "TST-1/run-0001", "--outcome", OUTCOME).code == 0

    @pytest.mark.requirement("TRAIL-10")
    @pytest.mark.parametrize("outcome", ["", "   ", "ok", "no remarks", "see report", "xxxxxxxxxxxxxxx"])
    def test_needs_an_outcome_that_says_something(self, people, act, outcome):
        act("breader")
        answer = people("trail", "--review", "TST-1/run-0001", "--outcome", outcome)
        assert (answer.code, "The outcome is" in answer.err) == (2, True)
        assert "trail-reviewed" not in [entry["action"] for entry in people.entries()]

    @pytest.mark.parametrize("run", ["TST-1/run-0002", "TST-1", "configs/study.yaml", "../x"])
    def test_needs_a_run_that_the_trail_knows(self, people, act, run):
        act("breader")
        answer = people("trail", "--review", run, "--outcome", OUTCOME)
        assert (answer.code, "There is no trail to review" in answer.err) == (2, True)

    def test_shows_the_reviewer_the_exceptions_of_the_study(self, people, act):
        with trail_book(Workspace(people.root), 1.0) as trail:
            trail.append("refused", "TST-1", "the data file is empty")
            trail.append("refused", "LEAD-1", "another study")
        act("breader")
        out = people("trail", "--review", "TST-1/run-0001", "--outcome", OUTCOME).out
        assert "the data file is empty" in out
        assert "another study" not in out


class TestReading:
    def shown(self, bench):
        return [
            (entry["details"]["command"], entry["details"]["arguments"])
            for entry in bench.entries()
            if entry["action"] == "read"
        ]

    @pytest.mark.requirement("TRAIL-6")
    def test_is_not_entered_by_default(self, people):
        people("trail")
        people("verify")
        assert self.shown(people) == []

    @pytest.mark.requirement("TRAIL-6")
    def test_is_entered_before_anything_is_shown_where_the_settings_say_so(self, bench):
        with (bench.root / "configs" / "lab.yaml").open("a") as settings:
            settings.write("log-reading: true\n")
        answer = bench("trail", "--who", "x", "--json")
        assert answer.document["of"] == len(bench.entries())
        bench("trail", "--data")
        bench("verify")
        bench("check", bench.study)
        assert self.shown(bench) == [
            ("trail", ["--who=x"]),
            ("trail", ["--data"]),
            ("verify", []),
            ("check", [str(bench.study)]),
        ]

    def test_of_a_broken_trail_goes_on_and_says_that_it_was_not_entered(self, bench):
        with (bench.root / "configs" / "lab.yaml").open("a") as settings:
            settings.write("log-reading: true\n")
        bench("trail")
        trail = bench.runs / "audit-trail.jsonl"
        trail.write_bytes(trail.read_bytes().replace(b'"read"', b'"lead"'))
        answer = bench("verify")
        assert answer.code == 1
        assert "could not be entered in the audit trail" in answer.err
        assert "1.5   failed" in answer.out


class TestWitnesses:
    @pytest.mark.requirement("TRAIL-11")
    def test_of_the_settings_are_told_and_compared(self, bench, tmp_path):
        heads = tmp_path / "heads.jsonl"
        with (bench.root / "configs" / "lab.yaml").open("a") as settings:
            settings.write(f"witnesses:\n  - {{file: {heads}}}\n")
        allot(bench)
        assert [json.loads(line)["seq"] for line in heads.read_bytes().splitlines()] == [1, 2]
        [check] = [each for each in bench("verify", "--json").document["checks"] if each["number"] == "1.7"]
        assert check["outcome"] == "passed"
        assert f"file: {heads}: 2 heads agree" in check["notes"][0]

    def test_that_lost_their_first_heads_are_a_finding_by_the_settings(self, bench, tmp_path):
        heads = tmp_path / "heads.jsonl"
        with (bench.root / "configs" / "lab.yaml").open("a") as settings:
            settings.write(f"witnesses:\n  - {{file: {heads}}}\n")
        bench("worksheet", bench.study)
        heads.unlink()
        allot(bench)
        answer = bench("verify")
        assert answer.code == 1
        assert "it lacks the head of entry" in answer.out
        assert "and the audit trail does not say why" in answer.out

    @pytest.mark.requirement("TRAIL-11")
    def test_may_be_named_by_the_one_who_verifies(self, bench, tmp_path):
        allot(bench)
        head = json.loads((bench.runs / "audit-trail.head").read_bytes())
        (tmp_path / "mine.jsonl").write_text(json.dumps(head, separators=(",", ":")) + "\n")
        for options in (
            ("--witness", tmp_path / "mine.jsonl"),
            ("--head", f"{head['seq']}:{head['sha256']}"),
        ):
            document = bench("verify", *options, "--json").document
            [check] = [each for each in document["checks"] if each["number"] == "1.7"]
            assert check["outcome"] == "passed"
            assert "agree" in check["notes"][0]
        other = bench("verify", "--head", f"1:{'ab' * 32}")
        assert "is not the one that the witness was told of" in other.out

    @pytest.mark.parametrize(
        "options",
        [("--head", "1"), ("--head", "0:" + "ab" * 32), ("--head", "1:xy"), ("--witness", "absent")],
    )
    def test_that_are_none_are_refused(self, bench, options):
        assert bench("verify", *options).code == 2

    def test_stay_in_force_until_the_change_is_entered(self, bench, tmp_path):
        heads = tmp_path / "heads.jsonl"
        lab = bench.root / "configs" / "lab.yaml"
        before = lab.read_text()
        lab.write_text(f"{before}witnesses:\n  - {{file: {heads}}}\n")
        bench("worksheet", bench.study)  # enters the settings
        told = len(heads.read_bytes().splitlines())
        lab.write_text(before)
        bench("worksheet", bench.study)
        assert bench.entries()[-1]["action"] == "attempt-refused"
        assert len(heads.read_bytes().splitlines()) == told + 1
