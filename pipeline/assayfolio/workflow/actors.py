"""Who works here: the operating system's account, and the person and roles that it stands for."""

from collections.abc import Sequence
from contextlib import suppress
from dataclasses import dataclass

from assayfolio.canonical import Json
from assayfolio.errors import AssayfolioError
from assayfolio.evidence.settings import settings_in_force
from assayfolio.evidence.trail import TrailEntry
from assayfolio.study.laboratory import People
from assayfolio.study.people import read_people
from assayfolio.workflow import surroundings
from assayfolio.workflow.workspace import PEOPLE, Workspace, read_input


@dataclass(frozen=True, slots=True)
class Actor:
    """An account; `person` and `roles` as the laboratory's list of people has them, None and empty without.

    `qualification` is the reference to the record of his training. `in_use` says whether there is a list.
    """

    account: str
    person: str | None
    roles: tuple[str, ...]
    qualification: str | None = None
    in_use: bool = False


def actor_of(workspace: Workspace) -> Actor:
    """The actor of this process in `workspace`, as its list of people has him now.

    A list that cannot be read names nobody: what is recorded does not depend on whether it is right.
    """
    try:
        return actor_among(people_of(workspace))
    except AssayfolioError:
        return Actor(surroundings.account_name(), None, (), None, True)


def actor_among(people: People | None) -> Actor:
    """The actor of this process among `people`; None where the laboratory has no list of them."""
    account = surroundings.account_name()
    found = None if people is None else people.of(account)
    if found is None:
        return Actor(account, None, (), None, people is not None)
    return Actor(account, found.person, found.roles, found.qualification, True)


def person_in_force(workspace: Workspace, entries: Sequence[TrailEntry], account: str) -> dict[str, Json]:
    """Person and roles of `account` by the list of people that `entries` put in force.

    A list that was changed since then counts only when it has been entered; before the first settings are,
    the list as it lies counts.
    """
    known = settings_in_force(entries)
    people: People | None = None
    with suppress(AssayfolioError):
        if known is None or known.provisional:
            people = people_of(workspace)
        elif (text := known.texts[PEOPLE]) is not None:
            people = read_people(text.encode("utf-8"), PEOPLE)
    found = None if people is None else people.of(account)
    return {
        "person": None if found is None else found.person,
        "roles": [] if found is None else list(found.roles),
    }


def people_of(workspace: Workspace) -> People | None:
    """Everybody in `configs/people.yaml`, or None where there is no such file.

    Raises StudyError with all its faults, InputError where it is no file of the workspace.
    """
    if not workspace.people.exists() and not workspace.people.is_symlink():
        return None
    return read_people(read_input(workspace, workspace.people, "list of people"), PEOPLE)
