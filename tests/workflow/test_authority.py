"""Who may do what: by the list of people that is in force, with every refused attempt in the trail."""

import pytest

from assayfolio.study.laboratory import LABORATORY_REQUIREMENTS, PERSON_ROLES
from assayfolio.workflow.actors import Actor, actor_of
from assayfolio.workflow.authority import MAY, NotAllowedError, may, require
from assayfolio.workflow.workspace import Workspace
from support.staff import ACCOUNTS, NOBODY, PEOPLE, acting, actions, staffed
from support.workspaces import Bench

# Who may give which command, by the roles in the invented laboratory.
ALLOWED = {
    "run": {"ann"},
    "worksheet": {"ann"},
    "deviation": {"ann"},
    "preregister": {"ann"},
    "amend": {"ann"},
    "void": {"cem"},
    "trail --review": {"ben", "cem"},
    "archive --dispose": {"dot"},
    "archive --dispose --confirm": {"cem"},
    "sign": {"ann", "ben", "cem"},
    "signer enrol": {"ann", "ben", "cem"},
    "signer renew": {"ann", "ben", "cem"},
    "signer revoke": {"cem", "dot"},
    "signer --confirm": {"cem", "dot"},
    "settings": {"dot"},
    "settings --confirm": {"cem", "dot"},
}


@pytest.fixture
def bench(tmp_path):
    return staffed(Bench(tmp_path / "w"))


def test_the_table_of_commands_is_the_one_that_is_tested():
    assert set(ALLOWED) == set(MAY)


@pytest.mark.requirement("ROLE-1")
@pytest.mark.parametrize("account", [*ACCOUNTS, NOBODY])
@pytest.mark.parametrize("command", ALLOWED)
def test_only_those_with_the_role_may_give_a_command(bench, command, account):
    workspace = Workspace(bench.root)
    with acting(account):
        if account in ALLOWED[command]:
            assert require(workspace, command).account == account
            return
        with pytest.raises(NotAllowedError):
            require(workspace, command)
    refused = bench.entries()[-1]
    assert refused["action"] == "attempt-refused"
    assert refused["actor"] == account
    assert refused["details"]["command"] == command
    assert refused["details"]["needed"] == list(MAY[command])


@pytest.mark.parametrize("command", ["check", "power", "verify", "trail", "rerun"])
def test_what_writes_nothing_is_anybodys(bench, command):
    with acting(NOBODY):
        assert require(Workspace(bench.root), command) == Actor(NOBODY, None, (), None, True)


def test_a_refusal_says_in_words_what_is_missing():
    berg = Actor("ben", "B. Berg", ("reviewer",), None, in_use=True)
    assert may(berg, "run") == "B. Berg has not the role that `run` needs: runner or author"
    unknown = Actor("eve", None, (), None, in_use=True)
    assert may(unknown, "run") == "the account eve is not in the laboratory's list of people"


def test_without_a_list_of_people_everybody_may_do_everything(tmp_path):
    bench = Bench(tmp_path / "w")
    with acting(NOBODY):
        for command in MAY:
            assert require(Workspace(bench.root), command) == Actor(NOBODY, None, ())
    assert actions(bench) == ["founded", "settings"]


def test_an_account_is_mapped_to_its_person_and_roles_in_every_entry(bench):
    with acting("ann"):
        require(Workspace(bench.root), "run")
    assert {entry["actor"] for entry in bench.entries()} == {"ann"}
    for entry in bench.entries():
        assert entry["details"]["by"] == {"person": "A. Analyst", "roles": ["author", "runner"]}


@pytest.mark.requirement("ROLE-1")
def test_a_refused_run_leaves_nothing_but_its_entry(bench):
    with acting("ben"):
        answer = bench("run", bench.study)
    assert answer.code == 2
    assert "B. Berg has not the role" in answer.err
    assert actions(bench) == ["founded", "attempt-refused"], "who may not work puts no settings in force"
    assert bench.files_in_runs() == {"audit-trail.jsonl", "audit-trail.head"}


@pytest.mark.requirement("ACCESS-2")
def test_a_list_that_was_edited_by_hand_gives_nobody_a_right(bench):
    workspace = Workspace(bench.root)
    with acting("ann"):
        require(workspace, "run")
    people = bench.root / "configs/people.yaml"
    people.write_text(PEOPLE.replace("[reviewer]", "[reviewer, runner]"))
    with acting("ben"), pytest.raises(NotAllowedError, match="settings changed outside"):
        require(workspace, "run")
    assert bench.entries()[-1]["details"]["changed"] == ["configs/people.yaml"]
    people.write_text(PEOPLE)
    with acting("ann"):
        assert require(workspace, "run").person == "A. Analyst"


def test_a_list_that_was_taken_away_does_not_free_anybody(bench):
    workspace = Workspace(bench.root)
    with acting("ann"):
        require(workspace, "run")
    (bench.root / "configs/people.yaml").unlink()
    with acting(NOBODY), pytest.raises(NotAllowedError, match="settings changed outside"):
        require(workspace, "run")


def test_a_faulty_list_of_people_refuses_a_run_with_its_faults(tmp_path):
    bench = Bench(tmp_path / "w")
    (bench.root / "configs/people.yaml").write_text("people:\n  - {person: A. Analyst}\n")
    answer = bench("run", bench.study)
    assert answer.code == 2
    assert "configs/people.yaml:2:5: the key `people.account` is missing" in answer.err
    assert actions(bench) == ["founded", "refused"]


def test_a_list_that_cannot_be_read_names_nobody(tmp_path):
    bench = Bench(tmp_path / "w")
    (bench.root / "configs/people.yaml").write_bytes(b"\xff")
    with acting("ann"):
        assert actor_of(Workspace(bench.root)) == Actor("ann", None, (), None, True)


def test_a_laboratory_that_requires_people_runs_nothing_without_the_list(tmp_path):
    bench = Bench(tmp_path / "w")
    lab = bench.root / "configs/lab.yaml"
    lab.write_text(lab.read_text() + "require: [people]\n")
    answer = bench("run", bench.study)
    assert answer.code == 2
    assert "configs/people.yaml is missing, which Invented laboratory requires" in answer.err


def test_the_readme_names_every_command_with_its_roles(checkout):
    rows = (checkout / "README.md").read_text("utf-8").partition("## People, roles and settings")[2]
    for command, roles in MAY.items():
        [row] = [line for line in rows.splitlines() if line.startswith("|") and f"`{command}`" in line]
        assert row.split("|")[2].strip() == ", ".join(roles)


@pytest.mark.parametrize("word", [*LABORATORY_REQUIREMENTS, *PERSON_ROLES])
def test_the_readme_names_every_role_and_requirement_of_a_laboratory(checkout, word):
    section = (checkout / "README.md").read_text("utf-8").partition("## People, roles and settings")[2]
    assert word in section.partition("\n## ")[0]


def test_a_list_that_is_not_in_force_names_nobody_in_the_trail(bench):
    workspace = Workspace(bench.root)
    with acting("ann"):
        require(workspace, "run")
    people = bench.root / "configs/people.yaml"
    people.write_text(
        PEOPLE.replace("A. Analyst", "Dr D. Director").replace("[author, runner]", "[approver]")
    )
    with acting("ann"), pytest.raises(NotAllowedError):
        require(workspace, "run")
    assert bench.entries()[-1]["details"]["by"] == {"person": "A. Analyst", "roles": ["author", "runner"]}
