"""`assayfolio settings` as a person and a program meet it."""

from support.staff import as_account, staffed
from support.workspaces import Bench, command

NOTE = "note: Accredited for water\n"


def founded(tmp_path):
    bench = staffed(Bench(tmp_path / "w"))
    assert as_account(bench, "ann", "worksheet", bench.study).code == 2, "this study plans no order"
    return bench


def change(bench):
    lab = bench.root / "configs/lab.yaml"
    lab.write_text(lab.read_text() + NOTE)


def test_says_since_when_the_settings_are_in_force(tmp_path):
    bench = founded(tmp_path)
    answer = bench("settings")
    assert answer.code == 0
    assert answer.out.startswith("The settings are those in force: entry 2, 20")
    assert answer.out.endswith(", ann: first seen\n")


def test_answers_programs_with_every_field_that_differs(tmp_path):
    bench = founded(tmp_path)
    change(bench)
    answer = as_account(bench, "dot", "settings", "--reason", "The scope was extended in March", "--json")
    assert answer.document["state"] == "entered"
    assert answer.document["files"] == ["configs/lab.yaml"]
    assert answer.document["differences"] == [{"key": "note", "old": None, "new": "Accredited for water"}]
    assert answer.document["second_person_needed"] is False


def test_faulty_settings_are_refused_with_their_places(tmp_path):
    bench = founded(tmp_path)
    (bench.root / "configs/people.yaml").write_text("people:\n  - {person: A. Analyst, account: ann}\n")
    answer = as_account(bench, "dot", "settings", "--reason", "Everybody but the analyst has left")
    assert answer.code == 2
    assert "configs/people.yaml:2:5: the key `people.roles` is missing" in answer.err


def test_a_reason_and_a_confirmation_do_not_go_together(tmp_path):
    bench = founded(tmp_path)
    assert bench("settings", "--confirm", "--reason", "The scope was extended").code == 2
    assert "leave --reason and --second out" in bench("settings", "--confirm", "--second", "cem").err


def test_there_has_to_be_a_proposal_to_confirm(tmp_path):
    answer = as_account(founded(tmp_path), "cem", "settings", "--confirm")
    assert answer.code == 2
    assert "no change of the settings to be confirmed" in answer.err


def test_outside_a_workspace_it_says_so(tmp_path):
    assert command("settings", "--workspace", tmp_path).code == 2


def test_the_example_of_the_readme_is_a_list_of_people(checkout):
    from assayfolio.study.people import read_people

    readme = (checkout / "README.md").read_text("utf-8")
    example = (
        readme.partition("## People, roles and settings")[2].partition("```yaml\n")[2].partition("```")[0]
    )
    assert len(read_people(example.encode("utf-8"), "people.yaml").people) == 4
