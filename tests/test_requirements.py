"""Every requirement is met by a test that says so, or it is told why not yet or not here."""

import re
import subprocess
import sys

import pytest

from support.requirements import (
    TESTS,
    WITH,
    Requirement,
    faults,
    marked_tests,
    marks_of,
    read_requirements,
    requirements,
)

PACKAGE = TESTS.parent / "pipeline/assayfolio"


@pytest.mark.requirement("TRACE-1")
def test_list_and_tests_agree() -> None:
    assert faults(requirements(), marked_tests()) == []


def test_where_a_requirement_is_met_there_is_a_file() -> None:
    places = {place for each in requirements() for place in each.where}
    missing = [
        place for place in places if not (PACKAGE / place).exists() and not (TESTS.parent / place).exists()
    ]
    assert missing == []


def test_identifiers_have_one_form() -> None:
    strange = [each.id for each in requirements() if not re.fullmatch(r"[A-Z]+-[1-9][0-9]*", each.id)]
    assert strange == []


def requirement(status: str, **more: object) -> Requirement:
    """A requirement that lacks nothing."""
    told = {WITH.get(status, "reason"): ("a.py",) if status == "met" else "told", **more}
    return Requirement("A-1", "demand", ("clause",), "text", status, **told)  # type: ignore[arg-type]


TESTED = {"A-1": ["test_a.py::test_b"]}


@pytest.mark.parametrize("status", ["planned", "organisational", "not-applicable"])
def test_what_is_not_met_needs_no_test(status: str) -> None:
    assert faults([requirement(status)], {}) == []


@pytest.mark.requirement("TRACE-1")
@pytest.mark.parametrize(
    ("listed", "marked", "told"),
    [
        ([requirement("met")], {}, "no test is marked with it"),
        ([requirement("met")], {**TESTED, "B-2": ["test_a.py::test_c"]}, "B-2, which is no requirement"),
        ([requirement("met"), requirement("met")], TESTED, "twice"),
        ([requirement("organisational")], TESTED, "is organisational, and yet"),
        ([requirement("planned", part="")], {}, "planned without 'part'"),
        ([requirement("not-applicable", reason="")], {}, "not-applicable without 'reason'"),
        ([requirement("met", where=())], TESTED, "met without 'where'"),
        ([requirement("perhaps")], {}, "has the status 'perhaps'"),
    ],
)
def test_a_gap_in_the_trace_is_told(
    listed: list[Requirement], marked: dict[str, list[str]], told: str
) -> None:
    [found] = faults(listed, marked)
    assert told in found


def test_marks_are_found_on_functions_and_in_classes() -> None:
    source = (
        '@pytest.mark.requirement("A-1", "B-2")\ndef test_a(): ...\n'
        'class TestC:\n    @pytest.mark.requirement("A-1")\n    def test_d(self): ...\n'
    )
    assert marks_of({"test_x.py": source}) == {
        "A-1": ["test_x.py::test_a", "test_x.py::TestC::test_d"],
        "B-2": ["test_x.py::test_a"],
    }


def test_an_unknown_key_of_the_list_is_refused() -> None:
    with pytest.raises(ValueError, match="colour"):
        read_requirements("requirements: [{id: A-1, colour: blue}]")


@pytest.mark.requirement("TRACE-1")
def test_the_table_has_a_row_for_every_requirement_and_names_its_tests() -> None:
    command = [sys.executable, str(TESTS / "generate/trace_requirements.py")]
    table = subprocess.run(command, capture_output=True, text=True, check=True).stdout
    rows = {
        line.split(" | ")[0].removeprefix("| "): line for line in table.splitlines() if line.startswith("| ")
    }
    for each in requirements():
        assert each.status in rows[each.id]
        assert all(source in rows[each.id] for source in each.source)
    for identifier, tests in marked_tests().items():
        assert all(test in rows[identifier] for test in tests)
