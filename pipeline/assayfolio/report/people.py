"""Who ran it, in which roles, and which run this one replaces: the facts and their words."""

from dataclasses import dataclass

NOT_IN_USE = "roles are not in use in this laboratory"
NO_RECORD = "no training record is named in the laboratory's list of people"
ONE_PERSON = "by its settings this laboratory has one person: nothing in it was checked by a second one"


@dataclass(frozen=True, slots=True)
class PersonFacts:
    """The person who started the run, as the laboratory's list has him; `in_use` says whether it has one."""

    in_use: bool
    person: str | None
    roles: tuple[str, ...]
    qualification: str | None
    one_person: bool


@dataclass(frozen=True, slots=True)
class ReplacedFacts:
    """The run that this one replaces, why, and since when and on which investigation that one is void."""

    run: str
    reason: str
    void_since: str | None
    investigation: str | None


def started_by(actor: str, host: str, person: PersonFacts | None) -> str:
    """Person and account, and the machine."""
    if person is None or person.person is None:
        return f"{actor} on {host}"
    return f"{person.person} (account {actor}) on {host}"


def roles_words(person: PersonFacts) -> str:
    """The person's roles and the reference to his training; what is missing is said."""
    if not person.in_use:
        words = NOT_IN_USE
    elif person.person is None:
        words = "none: the account is not in the laboratory's list of people"
    else:
        record = person.qualification
        words = f"{', '.join(person.roles)}; {f'training record {record}' if record else NO_RECORD}"
    return f"{words}; {ONE_PERSON}" if person.one_person else words


def replaced_words(replaced: ReplacedFacts) -> str:
    """Which run this one replaces, and why."""
    void = ""
    if replaced.void_since is not None:
        void = f", void since {replaced.void_since[:10]} on investigation {replaced.investigation}"
    return f"Replaces {replaced.run}{void}: {replaced.reason}"
