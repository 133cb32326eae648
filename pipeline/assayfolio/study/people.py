"""Reading `people.yaml` from bytes: who works here, under which account, in which roles."""

import re

from assayfolio.study.faults import Faults, listed
from assayfolio.study.fields import (
    Fields,
    Reader,
    UnreadableError,
    Value,
    choice,
    distinct,
    label,
    list_of,
    matching,
    report_repeats,
)
from assayfolio.study.laboratory import (
    PEOPLE_FILE_KEYS,
    PERSON_KEYS,
    PERSON_ROLES,
    People,
    Person,
    PersonRole,
)
from assayfolio.study.root import root_fields

_role: Reader[PersonRole] = choice(PERSON_ROLES)
_roles = distinct(list_of(_role, f"a list of {listed(PERSON_ROLES)}"))
_account = matching(
    re.compile(r"[^\s:/\x00-\x1f\x7f]{1,64}"),
    "the name of an account of the operating system, such as aanalyst",
)


def read_people(content: bytes, file: str) -> People:
    """Everybody in `content`, in the order of the file; `file` is its name in messages.

    Raises StudyError with every fault of the file, each with line and column; among them are an account or a
    person that stands there twice.
    """
    faults = Faults(file)
    fields = root_fields(content, PEOPLE_FILE_KEYS, faults)
    people = None if fields is None else fields.required("people", list_of(_person, _ENTRIES))
    value = None if fields is None else fields.value("people")
    if value is not None:
        for key in ("person", "account"):
            report_repeats(value.under(key))
    faults.raise_if_any("the list of people")
    assert people is not None, "a file without faults is complete"
    return People(people)


_ENTRIES = "a list of entries, each beginning with a hyphen"


def _person(value: Value) -> Person:
    fields = Fields.of(value, PERSON_KEYS)
    person = fields.required("person", label)
    account = fields.required("account", _account)
    roles = fields.required("roles", _roles)
    qualification = fields.optional("qualification", label)
    if person is None or account is None or roles is None:
        raise UnreadableError
    return Person(person, account, roles, qualification)
