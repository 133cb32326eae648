"""What a report says of who ran it, in which roles, and of the run that it replaces."""

import pytest

from assayfolio.report.people import (
    NO_RECORD,
    NOT_IN_USE,
    ONE_PERSON,
    PersonFacts,
    ReplacedFacts,
    replaced_words,
    roles_words,
    started_by,
)

ANALYST = PersonFacts(True, "A. Analyst", ("author", "runner"), "TR-014", False)
NOBODY = PersonFacts(False, None, (), None, False)


def test_the_person_stands_before_the_account() -> None:
    assert started_by("ann", "bench-4", ANALYST) == "A. Analyst (account ann) on bench-4"
    assert started_by("ann", "bench-4", NOBODY) == "ann on bench-4"
    assert started_by("ann", "bench-4", None) == "ann on bench-4"


@pytest.mark.parametrize(
    ("person", "words"),
    [
        (ANALYST, "author, runner; training record TR-014"),
        (PersonFacts(True, "B. Berg", ("runner",), None, False), f"runner; {NO_RECORD}"),
        (NOBODY, NOT_IN_USE),
        (PersonFacts(False, None, (), None, True), f"{NOT_IN_USE}; {ONE_PERSON}"),
    ],
)
def test_roles_come_with_the_training_record_or_the_remark_that_there_is_none(person, words) -> None:
    assert roles_words(person) == words


def test_a_corrected_run_says_what_it_replaces_and_that_it_is_void() -> None:
    replaced = ReplacedFacts("LOT-7/run-0001", "measured again", None, None)
    assert replaced_words(replaced) == "Replaces LOT-7/run-0001: measured again"
    void = ReplacedFacts("LOT-7/run-0001", "measured again", "2031-03-04T09:30:00.000000Z", "INV-9")
    assert replaced_words(void) == (
        "Replaces LOT-7/run-0001, void since 2031-03-04 on investigation INV-9: measured again"
    )
