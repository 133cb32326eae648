"""An error says what is wrong, where, and what to do, and which exit code answers it."""

import pytest

from assayfolio import errors
from assayfolio.errors import (
    AssayfolioError,
    BusyError,
    DataError,
    ExitCode,
    Fault,
    InputError,
    MachineError,
    Place,
    RenderingError,
    StudyError,
)


@pytest.mark.parametrize(
    ("place", "text"),
    [
        (Place("study.yaml"), "study.yaml"),
        (Place("study.yaml", 3), "study.yaml:3"),
        (Place("study.yaml", 3, 7), "study.yaml:3:7"),
        (Place("study.yaml", None, 7), "study.yaml"),
    ],
)
def test_a_place_is_told_as_far_as_it_is_known(place: Place, text: str) -> None:
    assert str(place) == text


def test_a_fault_is_one_line_with_place_finding_and_advice() -> None:
    place = Place("d.csv", 3, 7)
    assert str(Fault(place, "a blank value", "give it")) == "d.csv:3:7: a blank value - give it"
    assert str(Fault(place, "a blank value")) == "d.csv:3:7: a blank value"


def test_an_input_error_lists_its_faults_and_counts_those_it_hides() -> None:
    faults = (Fault(Place("d.csv", 3), "x"), Fault(Place("d.csv", 9), "y", "do z"))
    assert str(DataError("d.csv cannot be used", faults, hidden=4)) == (
        "d.csv cannot be used\n  d.csv:3: x\n  d.csv:9: y - do z\n  and 4 more"
    )
    assert str(DataError("d.csv cannot be used", faults)).endswith("do z")


@pytest.mark.parametrize(
    ("error", "code"),
    [
        (StudyError("s"), 2),
        (DataError("d"), 2),
        (InputError("i"), 2),
        (MachineError("m"), 3),
        (RenderingError("r"), 3),
        (BusyError("b"), 4),
    ],
    ids=lambda value: type(value).__name__ if isinstance(value, Exception) else str(value),
)
def test_each_family_has_its_exit_code(error: AssayfolioError, code: int) -> None:
    assert error.exit_code == code


def test_the_exit_codes_are_those_that_scripts_rely_on() -> None:
    assert {code.name: int(code) for code in ExitCode} == {
        "DONE": 0,
        "FINDING": 1,
        "INPUT": 2,
        "MACHINE": 3,
        "BUSY": 4,
        "NOT_CHECKABLE": 5,
    }


def test_every_error_belongs_to_the_one_family() -> None:
    found = [item for item in vars(errors).values() if isinstance(item, type) and issubclass(item, Exception)]
    assert AssayfolioError in found
    assert all(issubclass(item, AssayfolioError) for item in found)
