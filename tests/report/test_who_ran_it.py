"""What a report says of the person at the computer."""

import pytest

from assayfolio.report.people import PersonFacts, roles_words, started_by


def person(name: str | None = "A. Analyst", qualification: str | None = "TR-014") -> PersonFacts:
    return PersonFacts(
        in_use=True, person=name, roles=("author", "runner"), qualification=qualification, one_person=False
    )


@pytest.mark.requirement("ROLE-3")
def test_the_reference_to_the_training_record_stands_beside_the_roles() -> None:
    assert roles_words(person()) == "author, runner; training record TR-014"


@pytest.mark.requirement("ROLE-3")
def test_a_missing_training_record_is_remarked() -> None:
    words = roles_words(person(qualification=None))
    assert words.startswith("author, runner; ")
    assert "no training record" in words


def test_the_account_stands_beside_the_name_and_alone_where_there_is_none() -> None:
    assert started_by("ann", "bench-4", person()) == "A. Analyst (account ann) on bench-4"
    assert started_by("ann", "bench-4", person(name=None)) == "ann on bench-4"
