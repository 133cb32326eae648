"""The list of people: who works under which account, in which roles, and what is refused."""

import pytest

from assayfolio.errors import StudyError
from assayfolio.study.laboratory import PERSON_ROLES, Person
from assayfolio.study.people import read_people
from study.examples import edited

PEOPLE = """\
people:
  - {person: A. Analyst, account: aanalyst, roles: [author, runner], qualification: TR-014}
  - person: B. Berg
    account: bberg
    roles: [reviewer]
"""


def faults_of(text: str) -> list[str]:
    with pytest.raises(StudyError) as refused:
        read_people(text.encode("utf-8"), "people.yaml")
    return [str(fault).removeprefix("people.yaml:") for fault in refused.value.faults]


def test_everybody_arrives_with_account_roles_and_training_record() -> None:
    assert read_people(PEOPLE.encode(), "people.yaml").people == (
        Person("A. Analyst", "aanalyst", ("author", "runner"), "TR-014"),
        Person("B. Berg", "bberg", ("reviewer",), None),
    )


def test_a_person_is_found_by_the_account_and_nobody_else_is() -> None:
    people = read_people(PEOPLE.encode(), "people.yaml")
    assert people.of("bberg") == Person("B. Berg", "bberg", ("reviewer",))
    assert people.of("B. Berg") is None
    assert people.of("root") is None


def test_those_who_have_a_role_are_found() -> None:
    people = read_people(PEOPLE.encode(), "people.yaml")
    assert [person.account for person in people.having(("reviewer", "runner"))] == ["aanalyst", "bberg"]
    assert people.having(("approver",)) == ()


@pytest.mark.parametrize("role", PERSON_ROLES)
def test_every_role_can_be_given(role: str) -> None:
    text = edited(PEOPLE, "[reviewer]", f"[{role}]")
    assert read_people(text.encode(), "people.yaml").people[1].roles == (role,)


ONE_FAULT = {
    "an account of two persons": (
        "account: bberg",
        "account: aanalyst",
        "4:14: `people.account` holds `aanalyst` twice - expected each once; it stands on line 2",
    ),
    "a person with two accounts": (
        "person: B. Berg",
        "person: A. Analyst",
        "3:13: `people.person` holds `A. Analyst` twice - expected each once; it stands on line 2",
    ),
    "a role that is not known": (
        "[reviewer]",
        "[reviewr]",
        (
            "5:13: `people.roles` is `reviewr` - expected author, runner, reviewer, approver, "
            "quality-assurance or administrator; did you mean `reviewer`?"
        ),
    ),
    "no role": ("[reviewer]", "[]", None),
    "a person without an account": (
        "    account: bberg\n",
        "",
        "3:5: the key `people.account` is missing - add `account: ...`",
    ),
    "an account with a blank": (
        "account: bberg",
        "account: b berg",
        (
            "4:14: `people.account` is `b berg` - expected the name of an account of the operating system, "
            "such as aanalyst"
        ),
    ),
    "a misspelt key": (
        "qualification",
        "qualificaton",
        "2:70: the key `qualificaton` is not known in `people` - did you mean `qualification`?",
    ),
}


@pytest.mark.parametrize(("old", "new", "fault"), ONE_FAULT.values(), ids=ONE_FAULT.keys())
def test_what_is_wrong_is_refused_with_its_place(old: str, new: str, fault: str | None) -> None:
    found = faults_of(edited(PEOPLE, old, new))
    assert len(found) == 1
    assert fault is None or found == [fault]


def test_a_list_of_nobody_is_refused() -> None:
    assert faults_of("people: []\n")[0].startswith("1:9: `people` is an empty list")
