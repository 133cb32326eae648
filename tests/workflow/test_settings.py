"""The laboratory's settings change only with an entry: what differs, why, and where needed by two persons."""

import pytest

from assayfolio.evidence.verification import verify_workspace
from support.staff import PEOPLE, actions, as_account, staffed
from support.workspaces import Bench, command

REASON = "B. Berg has passed the training TR-021"
NOTE = "note: Accredited for water\n"


@pytest.fixture
def bench(tmp_path):
    """A laboratory with people whose settings are in the trail."""
    bench = staffed(Bench(tmp_path / "w"))
    assert as_account(bench, "ann", "worksheet", bench.study).code == 2, "this study plans no order"
    assert actions(bench) == ["founded", "settings"]
    return bench


def add_to(bench, file, text):
    path = bench.root / "configs" / file
    path.write_text(path.read_text() + text)


def give_role(bench):
    path = bench.root / "configs/people.yaml"
    path.write_text(path.read_text().replace("[reviewer]", "[reviewer, runner]"))


def settings_check(bench):
    [check] = [each for each in verify_workspace(bench.runs, None).outcomes if each.number == "2.6"]
    return check


class TestTheFirstEntry:
    @pytest.mark.requirement("ROLE-5")
    def test_holds_both_files_with_their_digests(self, bench):
        details = bench.entries()[1]["details"]
        assert details["texts"] == {
            name: (bench.root / name).read_text() for name in ("configs/lab.yaml", "configs/people.yaml")
        }
        assert bench.entries()[1]["reason"] == "first seen"

    def test_is_made_when_a_workspace_is_founded(self, tmp_path):
        root = tmp_path / "lab"
        assert command("workspace", root).code == 0
        assert command("verify", "--workspace", root).code == 0
        lab = root / "configs/lab.yaml"
        lab.write_text(lab.read_text().replace("Name of your laboratory", "Invented laboratory"))
        assert command("verify", "--workspace", root).code == 0
        assert command("worksheet", root / "configs/first-study.yaml").code in (0, 2)
        shown = command("settings", "--workspace", root)
        assert shown.code == 0
        assert "settings that the workspace was founded with were filled in" in shown.out


class TestAChangeByOnePerson:
    @pytest.mark.requirement("ACCESS-2")
    def test_stops_all_writing_until_it_is_entered(self, bench):
        add_to(bench, "lab.yaml", NOTE)
        answer = as_account(bench, "ann", "run", bench.study)
        assert answer.code == 2
        assert "settings changed outside `assayfolio settings`: run it" in answer.err

    def test_is_entered_field_by_field_with_its_reason(self, bench):
        add_to(bench, "lab.yaml", NOTE)
        answer = as_account(bench, "dot", "settings", "--reason", "The scope was extended in March")
        assert answer.code == 0
        assert "note  none -> Accredited for water" in answer.out
        entry = bench.entries()[-1]
        assert entry["action"] == "settings"
        assert entry["reason"] == "The scope was extended in March"
        assert entry["details"]["differences"] == [
            {"key": "note", "old": None, "new": "Accredited for water"}
        ]
        assert entry["details"]["was"] == bench.entries()[1]["details"]["files"]
        assert as_account(bench, "ann", "worksheet", bench.study).err.find("settings changed") == -1

    @pytest.mark.requirement("ROLE-5")
    def test_shows_the_difference_and_asks_for_a_reason(self, bench):
        add_to(bench, "lab.yaml", NOTE)
        answer = as_account(bench, "dot", "settings")
        assert answer.code == 2
        assert "note  none -> Accredited for water" in answer.err
        assert "A reason is needed" in answer.err
        assert actions(bench) == ["founded", "settings"], "nothing was entered"

    @pytest.mark.parametrize("reason", ["", "    ", "changed", "see above", "..........", "n/a"])
    def test_is_refused_for_a_reason_that_says_nothing(self, bench, reason):
        add_to(bench, "lab.yaml", NOTE)
        assert as_account(bench, "dot", "settings", "--reason", reason).code == 2
        assert "settings" not in actions(bench)[2:]

    def test_is_refused_for_the_reason_of_the_change_before(self, bench):
        for text in (NOTE, "accent: '#102030'\n"):
            add_to(bench, "lab.yaml", text)
            answer = as_account(bench, "dot", "settings", "--reason", "The scope was extended in March")
        assert answer.code == 2
        assert "word for word" in answer.err

    def test_is_refused_to_who_is_no_administrator(self, bench):
        add_to(bench, "lab.yaml", NOTE)
        answer = as_account(bench, "ann", "settings", "--reason", "The scope was extended in March")
        assert answer.code == 2
        assert bench.entries()[-1]["details"]["needed"] == ["administrator"]

    def test_of_layout_alone_is_entered_too(self, bench):
        add_to(bench, "lab.yaml", "# tidied\n")
        answer = as_account(bench, "dot", "settings", "--reason", "A comment for the next administrator")
        assert answer.code == 0
        assert "only layout and comments differ" in answer.out
        assert bench.entries()[-1]["details"]["differences"] == []

    def test_of_nothing_is_not_entered(self, bench):
        before = bench.entries()
        assert as_account(bench, "dot", "settings").code == 0
        assert as_account(bench, "dot", "settings", "--reason", "The scope was extended in March").code == 2
        assert bench.entries() == before


def add_witness(bench):
    folder = bench.root.parent / "witness"
    folder.mkdir()
    add_to(bench, "lab.yaml", f"witnesses: [{{folder: {folder}}}]\n")


OF_TWO_PERSONS = {
    "a role": give_role,
    "one person": lambda bench: add_to(bench, "lab.yaml", "one-person: true\n"),
    "separation": lambda bench: add_to(bench, "lab.yaml", "separation: {reviewer-is-not-runner: false}\n"),
    "a witness": add_witness,
}


class TestAChangeByTwoPersons:
    @pytest.mark.parametrize("change", OF_TWO_PERSONS.values(), ids=OF_TWO_PERSONS.keys())
    def test_is_proposed_by_one_and_in_force_when_another_confirms(self, bench, change):
        change(bench)
        proposed = as_account(bench, "dot", "settings", "--reason", REASON)
        assert proposed.code == 0
        assert actions(bench)[-1] == "settings-proposed"
        assert as_account(bench, "ann", "run", bench.study).code == 2
        assert as_account(bench, "cem", "settings", "--confirm").code == 0
        entry = bench.entries()[-1]
        assert (entry["action"], entry["actor"], entry["reason"]) == ("settings", "cem", REASON)
        assert entry["details"]["proposed"]["actor"] == "dot"
        assert settings_check(bench).outcome == "passed"

    @pytest.mark.requirement("ACCESS-2")
    def test_is_not_confirmed_by_who_proposed_it(self, bench):
        give_role(bench)
        as_account(bench, "dot", "settings", "--reason", REASON)
        answer = as_account(bench, "dot", "settings", "--confirm")
        assert answer.code == 2
        assert "proposed under the same account" in answer.err
        assert actions(bench)[-1] == "attempt-refused"

    def test_is_not_confirmed_by_a_role_that_the_change_itself_gives(self, bench):
        path = bench.root / "configs/people.yaml"
        path.write_text(PEOPLE.replace("[reviewer]", "[reviewer, administrator]"))
        as_account(bench, "dot", "settings", "--reason", REASON)
        assert as_account(bench, "ben", "settings", "--confirm").code == 2
        assert as_account(bench, "cem", "settings", "--confirm").code == 0

    def test_is_confirmed_by_the_person_who_was_named(self, bench):
        path = bench.root / "configs/people.yaml"
        path.write_text(PEOPLE.replace("[reviewer]", "[reviewer, administrator]"))
        as_account(bench, "dot", "settings", "--reason", REASON)
        as_account(bench, "cem", "settings", "--confirm")
        give = path.read_text().replace("administrator]}", "administrator, runner]}")
        path.write_text(give)
        as_account(bench, "dot", "settings", "--reason", "D. Dorn also runs studies now", "--second", "ben")
        assert as_account(bench, "cem", "settings", "--confirm").code == 2
        assert as_account(bench, "ben", "settings", "--confirm").code == 0

    def test_is_not_confirmed_when_the_files_have_changed_since(self, bench):
        give_role(bench)
        as_account(bench, "dot", "settings", "--reason", REASON)
        add_to(bench, "lab.yaml", NOTE)
        answer = as_account(bench, "cem", "settings", "--confirm")
        assert answer.code == 2
        assert "propose it again" in answer.err

    def test_needs_none_where_the_laboratory_has_one_person(self, tmp_path):
        bench = staffed(Bench(tmp_path / "one"), "one-person: true\n")
        as_account(bench, "eve", "run", bench.study)
        give_role(bench)
        assert as_account(bench, "dot", "settings", "--reason", REASON).code == 0
        assert actions(bench)[-1] == "settings"

    def test_cannot_be_spared_by_claiming_one_person_in_the_same_change(self, bench):
        give_role(bench)
        add_to(bench, "lab.yaml", "one-person: true\n")
        as_account(bench, "dot", "settings", "--reason", REASON)
        assert actions(bench)[-1] == "settings-proposed"


class TestVerification:
    def test_names_each_setting_that_was_edited_by_hand(self, bench):
        give_role(bench)
        add_to(bench, "lab.yaml", NOTE)
        check = settings_check(bench)
        assert check.outcome == "failed"
        words = "\n".join(check.notes)
        assert "changed: configs/people.yaml is not as entry 2 has it in force" in words
        assert "people.ben.roles: reviewer in force, reviewer, runner in the file" in words
        assert "note: none in force, Accredited for water in the file" in words

    def test_names_a_file_that_is_missing_and_one_that_is_new(self, bench, tmp_path):
        (bench.root / "configs/people.yaml").unlink()
        assert settings_check(bench).notes[0] == "missing: configs/people.yaml, which entry 2 has in force"
        other = Bench(tmp_path / "other")
        other.run()
        staffed(other)
        assert settings_check(other).notes[0] == "extra file: configs/people.yaml: by entry 2 there is none"

    def test_says_that_a_proposed_change_waits(self, bench):
        give_role(bench)
        as_account(bench, "dot", "settings", "--reason", REASON)
        check = settings_check(bench)
        assert check.outcome == "failed"
        assert check.notes == ("configs/people.yaml: as entry 3 proposes, which nobody has confirmed yet",)

    def test_passes_a_trail_of_an_earlier_version_with_a_remark(self, tmp_path):
        bench = Bench(tmp_path / "w")
        bench.runs.mkdir()
        assert settings_check(bench).outcome == "passed"
        assert "not entered yet" in settings_check(bench).notes[0]
