"""A laboratory's settings: what they mean and what is refused."""

import pytest

from assayfolio.errors import StudyError
from assayfolio.study.plan import Laboratory
from assayfolio.study.reading import read_laboratory
from study.examples import edited, laboratory_faults_of

SETTINGS = """\
laboratory: Invented Waters
address: [1 Weir Lane, Sluice]
note: Invented for demonstration.
accent: "#0F5B66"
paper: Letter
require: [unit, sign-off]
wait-seconds: 0
"""
REQUIREMENTS = (
    "unit, order, levels, replicates, measurand, method, method-version, item, lot, instrument, operator, "
    "measured-at, supplied-by, purpose, comparisons, equivalence, margin-source, checks, precision, power or "
    "sign-off"
)


def test_every_setting_arrives_as_a_typed_value() -> None:
    assert read_laboratory(SETTINGS.encode(), "lab.yaml") == Laboratory(
        name="Invented Waters",
        address=("1 Weir Lane", "Sluice"),
        note="Invented for demonstration.",
        accent="#0F5B66",
        paper="Letter",
        require=("unit", "sign-off"),
        wait_seconds=0,
    )


def test_a_name_is_enough_and_the_rest_has_the_stated_defaults() -> None:
    assert read_laboratory(b"laboratory: Invented Waters", "lab.yaml") == Laboratory("Invented Waters")


ONE_FAULT = {
    "no name": (
        "laboratory: Invented Waters\n",
        "",
        "1:1: the key `laboratory` is missing - add `laboratory: ...`",
    ),
    "a misspelt key": (
        "address",
        "adress",
        "2:1: the key `adress` is not known here - did you mean `address`?",
    ),
    "an address of one line": (
        "[1 Weir Lane, Sluice]",
        "1 Weir Lane",
        "2:10: `address` is `1 Weir Lane` - expected a list of lines",
    ),
    "an unquoted colour, which is a comment": (
        '"#0F5B66"',
        "#0F5B66",
        '4:8: `accent` is empty - expected a colour in quotation marks, such as "#0f5b66"',
    ),
    "a colour by name": (
        '"#0F5B66"',
        "teal",
        '4:9: `accent` is `teal` - expected a colour in quotation marks, such as "#0f5b66"',
    ),
    "another paper": ("Letter", "A5", "5:8: `paper` is `A5` - expected A4 or Letter; did you mean `A4`?"),
    "a requirement that is not known": (
        "sign-off",
        "signoff",
        f"6:17: `require` is `signoff` - expected {REQUIREMENTS}; did you mean `sign-off`?",
    ),
    "a requirement twice": (
        "sign-off",
        "unit",
        "6:17: `require` holds `unit` twice - expected each once; it stands on line 6",
    ),
    "a wait beyond ten minutes": (
        "seconds: 0",
        "seconds: 601",
        "7:15: `wait-seconds` is `601` - expected a whole number from 0 to 600",
    ),
    "a note of 301 characters": (
        "Invented for demonstration.",
        "n" * 301,
        "3:7: `note` has 301 characters - expected one line of text of at most 300 characters",
    ),
    "a key of a study": (
        "paper: Letter",
        "alpha: 0.05",
        (
            "5:1: the key `alpha` is not known here - known here: laboratory, address, note, accent, paper, "
            "require, wait-seconds"
        ),
    ),
}


@pytest.mark.parametrize(("old", "new", "fault"), ONE_FAULT.values(), ids=ONE_FAULT.keys())
def test_a_setting_is_refused_with_its_place_and_what_was_expected(old: str, new: str, fault: str) -> None:
    assert laboratory_faults_of(edited(SETTINGS, old, new)) == [fault]


def test_the_headline_speaks_of_the_laboratory() -> None:
    with pytest.raises(StudyError, match=r"^lab.yaml: the laboratory's settings cannot be used \(1 fault\)"):
        read_laboratory(b"{}", "lab.yaml")
