"""A laboratory's settings: what they mean and what is refused."""

import pytest

from assayfolio.errors import StudyError
from assayfolio.study.laboratory import LABORATORY_REQUIREMENTS, Laboratory, Separation, Witness
from assayfolio.study.profiles import REGULATED
from assayfolio.study.reading import read_laboratory
from assayfolio.study.vocabulary import REQUIREMENTS as OF_STUDIES
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
    "measured-at, supplied-by, purpose, comparisons, equivalence, margin-source, checks, precision, power, "
    "sign-off, pre-registration, approved-protocol, people or witness"
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
            "require, wait-seconds, profile, one-person, log-reading, review-before-approval, separation, "
            "witnesses, retention, signatures"
        ),
    ),
}


@pytest.mark.parametrize(("old", "new", "fault"), ONE_FAULT.values(), ids=ONE_FAULT.keys())
def test_a_setting_is_refused_with_its_place_and_what_was_expected(old: str, new: str, fault: str) -> None:
    assert laboratory_faults_of(edited(SETTINGS, old, new)) == [fault]


def test_the_headline_speaks_of_the_laboratory() -> None:
    with pytest.raises(StudyError, match=r"^lab.yaml: the laboratory's settings cannot be used \(1 fault\)"):
        read_laboratory(b"{}", "lab.yaml")


CONTROLS = """\
laboratory: Invented Waters
require: [approved-protocol]
one-person: false
log-reading: true
review-before-approval: false
separation: {reviewer-is-not-runner: false}
witnesses:
  - file: /mnt/witness/heads.jsonl
  - time-stamp: https://time.example.org/stamp
"""


def test_who_checks_whom_and_who_is_told_of_the_trail_are_settings() -> None:
    assert read_laboratory(CONTROLS.encode(), "lab.yaml") == Laboratory(
        "Invented Waters",
        require=("approved-protocol",),
        log_reading=True,
        review_before_approval=False,
        separation=Separation(reviewer_is_not_runner=False, approver_is_not_author=True),
        witnesses=(
            Witness("file", "/mnt/witness/heads.jsonl"),
            Witness("time-stamp", "https://time.example.org/stamp"),
        ),
    )


WRONG_CONTROLS = {
    "a truth in another word": (
        "log-reading: true",
        "log-reading: yes",
        "4:14: `log-reading` is `yes` - expected true or false",
    ),
    "a witness inside the workspace": (
        "/mnt/witness/heads.jsonl",
        "runs/heads.jsonl",
        (
            "8:11: `witnesses.file` is `runs/heads.jsonl` - expected an absolute path outside the workspace, "
            "such as /mnt/witness/heads.jsonl"
        ),
    ),
    "a witness of two kinds": (
        "  - file: /mnt/witness/heads.jsonl",
        "  - {file: /mnt/a, folder: /mnt/b}",
        (
            "8:5: `witnesses` names no single place - expected one of the keys file, folder or time-stamp in "
            "each entry"
        ),
    ),
    "an address that is none": (
        "https://time.example.org/stamp",
        "time.example.org",
        (
            "9:17: `witnesses.time-stamp` is `time.example.org` - expected an address such as "
            "https://time.example.org/stamp"
        ),
    ),
    "a witness twice": (
        "time-stamp: https://time.example.org/stamp",
        "file: /mnt/witness/heads.jsonl",
        "9:5: `witnesses` names `/mnt/witness/heads.jsonl` twice - expected each place once",
    ),
}


@pytest.mark.parametrize(("old", "new", "fault"), WRONG_CONTROLS.values(), ids=WRONG_CONTROLS.keys())
def test_a_wrong_control_is_refused_with_its_place(old: str, new: str, fault: str) -> None:
    assert laboratory_faults_of(edited(CONTROLS, old, new)) == [fault]


def test_a_required_witness_has_to_be_named() -> None:
    assert laboratory_faults_of("laboratory: Invented Waters\nrequire: [witness]\n") == [
        (
            "2:1: no witness of the audit trail is named, and `require` asks for one - add `witnesses:` with "
            "a place outside the workspace"
        )
    ]


REGULATED_LABORATORY = """\
laboratory: Invented Waters
profile: regulated
require: [order, unit]
witnesses: [{folder: /mnt/witness}]
"""


class TestTheRegulatedProfile:
    def test_has_the_strictest_settings_and_what_the_laboratory_adds(self) -> None:
        laboratory = read_laboratory(REGULATED_LABORATORY.encode(), "lab.yaml")
        assert laboratory.require == (*REGULATED, "order")
        assert laboratory.log_reading
        assert laboratory.review_before_approval
        assert laboratory.separation == Separation()
        assert not laboratory.one_person

    def test_requires_only_what_a_laboratory_can_require(self) -> None:
        assert set(REGULATED) <= {*OF_STUDIES, *LABORATORY_REQUIREMENTS}
        assert set(LABORATORY_REQUIREMENTS) <= set(REGULATED)

    @pytest.mark.parametrize(
        ("contradiction", "fault"),
        [
            ("one-person: true", "5:13: `one-person` is true - expected false"),
            ("log-reading: false", "5:14: `log-reading` is false - expected true"),
            ("review-before-approval: false", "5:25: `review-before-approval` is false - expected true"),
            (
                "separation: {approver-is-not-author: false}",
                "5:38: `separation.approver-is-not-author` is false - expected true",
            ),
        ],
    )
    def test_cannot_be_weakened(self, contradiction: str, fault: str) -> None:
        faults = laboratory_faults_of(f"{REGULATED_LABORATORY}{contradiction}\n")
        assert faults == [f"{fault}, as the profile `regulated` has it"]

    def test_needs_a_witness(self) -> None:
        [fault] = laboratory_faults_of("laboratory: Invented Waters\nprofile: regulated\n")
        assert fault.startswith("2:1: no witness of the audit trail is named, and the profile `regulated`")
