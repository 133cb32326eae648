"""The laboratory's settings as one document of fields, and which changes of it need a second person."""

from collections.abc import Iterable, Mapping

from assayfolio.canonical import Json
from assayfolio.errors import StudyError
from assayfolio.study.differences import Difference, differences
from assayfolio.study.laboratory import Laboratory, People
from assayfolio.study.laboratory_file import read_laboratory
from assayfolio.study.people import read_people

LABORATORY_FILE = "configs/lab.yaml"
PEOPLE_FILE = "configs/people.yaml"
SETTINGS_FILES = (LABORATORY_FILE, PEOPLE_FILE)
# Who may do what, who has to be another person, who is told of the trail, how long records are kept, and how
# signatures are made: changed by two persons.
_OF_TWO_PERSONS = ("people", "separation", "one-person", "witnesses", "retention", "signatures")

Texts = Mapping[str, str | None]
"""The text of each settings file by its path in the workspace; None for a file that is not there."""


def settings_of(texts: Texts) -> tuple[Laboratory, People | None]:
    """What the two files say; the people are None where there is no such file.

    Raises StudyError with every fault of the first file that has any.
    """
    laboratory = read_laboratory((texts[LABORATORY_FILE] or "").encode("utf-8"), LABORATORY_FILE)
    people = texts.get(PEOPLE_FILE)
    return laboratory, None if people is None else read_people(people.encode("utf-8"), PEOPLE_FILE)


def settings_document(laboratory: Laboratory, people: People | None) -> Mapping[str, Json]:
    """Every setting by its key, with what a profile fixes filled in, and the people by their accounts."""
    return {
        "laboratory": laboratory.name,
        "address": list(laboratory.address),
        "note": laboratory.note,
        "accent": laboratory.accent,
        "paper": laboratory.paper,
        "wait-seconds": laboratory.wait_seconds,
        "profile": laboratory.profile,
        "require": list(laboratory.require),
        "one-person": laboratory.one_person,
        "log-reading": laboratory.log_reading,
        "review-before-approval": laboratory.review_before_approval,
        "separation": {
            "reviewer-is-not-runner": laboratory.separation.reviewer_is_not_runner,
            "approver-is-not-author": laboratory.separation.approver_is_not_author,
        },
        "witnesses": [f"{witness.kind}: {witness.target}" for witness in laboratory.witnesses],
        "retention": None
        if laboratory.retention is None
        else {"class": laboratory.retention.name, "years": laboratory.retention.years},
        "signatures": {
            "time-stamp": laboratory.signatures.time_stamp,
            "time-stamp-certificate": laboratory.signatures.time_stamp_certificate,
            "long-term": laboratory.signatures.long_term,
            "lock-minutes": laboratory.signatures.lock_minutes,
            "policy": laboratory.signatures.policy,
        },
        "people": {
            person.account: {
                "person": person.person,
                "roles": list(person.roles),
                "qualification": person.qualification,
            }
            for person in (people.people if people is not None else ())
        },
    }


def settings_differences(old: Texts, new: Texts) -> tuple[Difference, ...]:
    """Every setting that differs, by its key; none where only layout and comments do.

    Where one of the two cannot be read, for instance by this version, the texts of the files themselves.
    """
    try:
        before, after = (settings_document(*settings_of(texts)) for texts in (old, new))
    except StudyError:
        files = [file for file in SETTINGS_FILES if old.get(file) != new.get(file)]
        return tuple(Difference(file, old.get(file), new.get(file)) for file in files)
    return differences(before, after)


def needs_second_person(changes: Iterable[Difference]) -> bool:
    """Whether one of the changes is about roles, separation, one-person, witnesses, retention or signatures.

    Changes that are only known as those of a whole file count as such.
    """
    return any(
        change.key in SETTINGS_FILES
        or change.key.partition(".")[0].removesuffix(" (order)") in _OF_TWO_PERSONS
        for change in changes
    )
