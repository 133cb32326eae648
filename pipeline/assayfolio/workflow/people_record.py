"""What a run's record says of the person who started it, and of how the laboratory separates duties."""

from collections.abc import Mapping
from typing import Any

from assayfolio.canonical import Json
from assayfolio.report.people import PersonFacts, ReplacedFacts
from assayfolio.study.laboratory import Laboratory
from assayfolio.workflow.actors import Actor


def person_record(actor: Actor, laboratory: Laboratory) -> dict[str, Json]:
    """The person behind the account, his roles and the reference to his training; null without any."""
    return {
        "roles_in_use": actor.in_use,
        "person": actor.person,
        "roles": list(actor.roles),
        "qualification": actor.qualification,
        "one_person": laboratory.one_person,
    }


def person_facts(record: Mapping[str, Any]) -> PersonFacts | None:
    """What a report prints of the person, from the run's record; None where that does not say it."""
    kept = record.get("person")
    if kept is None:
        return None
    return PersonFacts(
        in_use=kept["roles_in_use"],
        person=kept["person"],
        roles=tuple(kept["roles"]),
        qualification=kept["qualification"],
        one_person=kept["one_person"],
    )


def replaced_facts(record: Mapping[str, Any]) -> ReplacedFacts | None:
    """What a report prints of the run that it replaces; None where it replaces none."""
    kept = record.get("replaces")
    if kept is None:
        return None
    void = kept["void"]
    return ReplacedFacts(
        run=kept["run"],
        reason=kept["reason"],
        void_since=None if void is None else void["time"],
        investigation=None if void is None else void["investigation"],
    )
