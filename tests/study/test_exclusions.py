"""The exclusions file: rows that are left out, each with a reason that says something and a person."""

import re
import string

import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from assayfolio.errors import Place, StudyError
from assayfolio.study.exclusions import Exclusion, read_exclusions
from assayfolio.study.reasons import emptiness
from study.examples import edited

ONE = """\
exclusions:
  - row: 14
    value: "0.71"
    reason: cell leaked during filling - see logbook 12
    decided-by: A. Analyst
    decided-at: 2031-03-04
    approved-by: R. Reviewer
"""
SHORT = "reason: bottle 7 was found open, decided-by: A. Analyst, decided-at: 2031-03-04"


def exclusions_of(text: str) -> tuple[Exclusion, ...]:
    return read_exclusions(text.encode(), "left-out.yaml")


def faults_of(text: str) -> list[str]:
    try:
        exclusions_of(text)
    except StudyError as error:
        return [str(fault).removeprefix("left-out.yaml:") for fault in error.faults]
    return []


def test_an_exclusion_arrives_with_everything_that_was_written() -> None:
    assert exclusions_of(ONE) == (
        Exclusion(
            row=14,
            file=None,
            value="0.71",
            reason="cell leaked during filling - see logbook 12",
            decided_by="A. Analyst",
            decided_at="2031-03-04",
            approved_by="R. Reviewer",
            place=Place("left-out.yaml", 2, 5),
        ),
    )


def test_exclusions_come_in_the_order_of_the_file_and_may_name_theirs() -> None:
    first, second, third = exclusions_of(
        f"exclusions:\n  - {{row: 9, file: data/tue.csv, value: <0.05, {SHORT}}}\n"
        f"  - {{row: 9, file: data/mon.csv, value: 1.50, {SHORT}}}\n  - {{row: 2, value: n.d., {SHORT}}}\n"
    )
    assert [(one.file, one.row, one.value) for one in (first, second, third)] == [
        ("data/tue.csv", 9, "<0.05"),
        ("data/mon.csv", 9, "1.50"),
        (None, 2, "n.d."),
    ]
    assert first.approved_by is None
    assert third.place == Place("left-out.yaml", 4, 5)


def test_an_empty_list_excludes_nothing() -> None:
    assert exclusions_of("exclusions: []\n") == ()


@pytest.mark.parametrize("value", ["0.710", "1e-3", "012", "no", "0,71", "-"])
def test_a_value_is_the_text_that_was_typed(value: str) -> None:
    (one,) = exclusions_of(edited(ONE, "0.71", value))
    assert one.value == value


@pytest.mark.parametrize(
    "moment",
    [
        "2031-12-31",
        "2028-02-29",
        "2031-03-04T09:30:00Z",
        "2031-03-04t09:30:00.125z",
        "2031-03-04T23:59:59+13:45",
        "2016-12-31T23:59:60Z",
    ],
)
def test_a_decision_has_a_day_or_a_time_with_its_zone(moment: str) -> None:
    (one,) = exclusions_of(edited(ONE, "2031-03-04", moment))
    assert one.decided_at == moment


LABEL = "expected one line of text of at most 80 characters"
WHEN = "expected a date such as 2031-03-04, or a time with its zone such as 2031-03-04T09:30:00+01:00"
REASON = "expected what happened, and where that is recorded, in 10 characters or more"
PATH = "expected a path below this file's folder, such as data/values.csv"
CAUSE = "cell leaked during filling - see logbook 12"
KEYS = "row, file, value, reason, decided-by, decided-at and approved-by"

ONE_FAULT = {
    "no list": (
        ONE,
        "exclusions: none\n",
        (
            "1:13: `exclusions` is `none` - expected a list of entries, each beginning with a hyphen, "
            "or [] where nothing is excluded"
        ),
    ),
    "another key": (
        "exclusions:",
        "exclusion:",
        "1:1: the key `exclusion` is not known here - did you mean `exclusions`?",
    ),
    "nothing in the file": (ONE, "{}", "1:1: the key `exclusions` is missing - add `exclusions: ...`"),
    "an entry that is a word": (
        ONE,
        "exclusions: [all]\n",
        f"1:14: `exclusions` is `all` - expected a mapping with the keys {KEYS}",
    ),
    "a key twice": (
        'value: "0.71"',
        'value: "0.71"\n    row: 15',
        "4:5: the key `row` stands here a second time - the first is on line 2; keep one of them",
    ),
    "a misspelt key": (
        "approved-by",
        "aproved-by",
        "7:5: the key `aproved-by` is not known in `exclusions` - did you mean `approved-by`?",
    ),
    "the row of the column names": (
        "row: 14",
        "row: 1",
        "2:10: `exclusions.row` is `1` - expected a whole number from 2 to 1000000000",
    ),
    "rows from to": (
        "row: 14",
        "row: 14-17",
        "2:10: `exclusions.row` is `14-17` - expected a whole number from 2 to 1000000000",
    ),
    "no value": (
        '    value: "0.71"\n',
        "",
        "2:5: the key `exclusions.value` is missing - add `value: ...`",
    ),
    "a blank value": ('"0.71"', '""', f"3:12: `exclusions.value` is empty - {LABEL}"),
    "a file outside the folder": (
        "row: 14",
        "row: 14\n    file: /etc/values.csv",
        f"3:11: `exclusions.file` is `/etc/values.csv`, an absolute path - {PATH}",
    ),
    "a pattern of files": (
        "row: 14",
        'row: 14\n    file: "*.csv"',
        (
            f"3:11: `exclusions.file` is `*.csv`, with a * or ? - {PATH}; "
            "only a `data.file` that stands alone may be a pattern"
        ),
    ),
    "no reason": (
        f"    reason: {CAUSE}\n",
        "",
        "2:5: the key `exclusions.reason` is missing - add `reason: ...`",
    ),
    "a blank reason": (
        CAUSE,
        "",
        "4:12: `exclusions.reason` is empty - expected one line of text of at most 500 characters",
    ),
    "a short reason": (
        CAUSE,
        "spilt",
        f"4:13: `exclusions.reason` is `spilt`, only 5 characters long - {REASON}",
    ),
    "a reason that fits any value": (
        CAUSE,
        "Obvious outlier, see above!",
        (
            "4:13: `exclusions.reason` is `Obvious outlier, see above!`, "
            f"made of words that would fit any value - {REASON}"
        ),
    ),
    "a reason of one letter": (
        CAUSE,
        "xxxxxxxxxxxx",
        f"4:13: `exclusions.reason` is `xxxxxxxxxxxx`, no text - {REASON}",
    ),
    "nobody": (
        "    decided-by: A. Analyst\n",
        "",
        "2:5: the key `exclusions.decided-by` is missing - add `decided-by: ...`",
    ),
    "no day": (
        "    decided-at: 2031-03-04\n",
        "",
        "2:5: the key `exclusions.decided-at` is missing - add `decided-at: ...`",
    ),
    "an approval by oneself": (
        "R. Reviewer",
        "A. Analyst",
        (
            "7:5: `exclusions.approved-by` is `A. Analyst`, who decided it - "
            "name another person, or leave the key out"
        ),
    ),
}


@pytest.mark.parametrize(("old", "new", "fault"), ONE_FAULT.values(), ids=ONE_FAULT.keys())
def test_it_is_refused_with_its_place_and_what_was_expected(old: str, new: str, fault: str) -> None:
    assert faults_of(edited(ONE, old, new)) == [fault]


@pytest.mark.parametrize(
    "moment",
    [
        "yesterday",
        "04.03.2031",
        "2031-3-4",
        "2031-03-04T09:30:00",
        "2031-03-04 09:30:00Z",
        "2031-03-04T24:00:00Z",
        "2031-03-04T09:60:00Z",
        "2031-03-04T09:30:61Z",
        "2031-03-04T09:30:00+24:00",
        "2031-03-04T09:30:00+01:60",
        "2031-03-04T09:30Z",
        "2031-03-04T",
        "２031-03-04",
    ],
)
def test_another_form_of_date_is_refused(moment: str) -> None:
    assert faults_of(edited(ONE, "2031-03-04", moment)) == [
        f"6:17: `exclusions.decided-at` is `{moment}` - {WHEN}"
    ]


@pytest.mark.parametrize("day", ["2031-02-29", "2031-13-01", "2031-00-10", "2031-04-31", "0000-01-01"])
def test_a_day_that_is_in_no_calendar_is_refused(day: str) -> None:
    for moment in (day, f"{day}T10:00:00Z"):
        assert faults_of(edited(ONE, "2031-03-04", moment)) == [
            f"6:17: `exclusions.decided-at` is `{moment}`, which is no day of the calendar - {WHEN}"
        ]


def test_the_same_value_of_a_row_twice_is_refused_and_another_one_is_not() -> None:
    rows = [f"  - {{row: 9, value: {value}, {SHORT}}}\n" for value in ("1.5", "1.50", "1.5")]
    other_file = f"  - {{row: 9, value: 1.5, file: b.csv, {SHORT}}}\n"
    assert faults_of("exclusions:\n" + "".join([*rows[:2], other_file])) == []
    assert faults_of("exclusions:\n" + "".join(rows)) == [
        "4:5: row 9 with the value `1.5` is excluded a second time - the first is on line 2; keep one of them"
    ]


def test_faults_of_all_entries_show_in_one_pass_and_in_the_order_of_the_file() -> None:
    text = (
        "exclusions:\n"
        "  - {row: x, value: 1, reason: test, decided-by: A, decided-at: 2031-03-04}\n"
        "  - {row: 3, value: 2, reason: the vial broke, decided-by: B, decided-at: today}\n"
        "  - {row: 4, valeu: 2, reason: the vial broke, decided-by: B, decided-at: 2031-03-04}\n"
    )
    assert [fault.partition(": ")[0] for fault in faults_of(text)] == ["2:11", "2:32", "3:75", "4:14"]


def test_the_headline_speaks_of_the_exclusions() -> None:
    headline = r"^left-out.yaml: the exclusions cannot be used \(1 fault\); nothing was analysed$"
    with pytest.raises(StudyError) as refusal:
        exclusions_of("[]")
    assert refusal.match(headline.removesuffix("$"))


@pytest.mark.requirement("TRAIL-14")
@pytest.mark.parametrize(
    "reason",
    [
        "statistical outlier",
        "measurement error",
        "Analyst error.",
        "value too high",
        "excluded as requested",
        "not applicable",
        "see note 4 below",
        "test test test",
        "result was wrong!!",
        "n/a n/a n/a n/a",
        "row 14 removed",
        "----------",
        "1234567890",
    ],
)
def test_words_that_would_fit_any_value_are_no_reason(reason: str) -> None:
    assert len(reason) >= 10
    assert emptiness(reason) is not None


@pytest.mark.parametrize(
    "reason",
    [
        CAUSE,
        "vial broke",
        "Grubbs at 1 %, procedure 12, section 4",
        "power failure during the run",
        "Probe verwechselt, Journal S. 31",
        "test portion spilled",
        "outlier caused by an air bubble",
    ],
)
def test_a_reason_that_says_what_happened_is_one(reason: str) -> None:
    assert emptiness(reason) is None


@given(st.text(alphabet=string.ascii_letters + string.digits + " .,-/!", max_size=9))
def test_fewer_than_ten_characters_are_no_reason(reason: str) -> None:
    assert emptiness(reason) == f"only {len(reason)} characters long"


def answer_to(content: bytes) -> tuple[Exclusion, ...]:
    """The exclusions in `content`; none where it is refused, after asserting what holds of every refusal."""
    try:
        return read_exclusions(content, "any.yaml")
    except StudyError as refusal:
        assert_well_worded(refusal, content)
        return ()


def assert_well_worded(refusal: StudyError, content: bytes) -> None:
    lines = re.split(r"\r\n|\r|\n", content.decode("utf-8-sig", errors="replace"))
    assert refusal.faults
    for fault in refusal.faults:
        assert fault.place.file == "any.yaml"
        assert 1 <= (fault.place.line or 0) <= len(lines)
        assert fault.found.isprintable()
        assert fault.advice.isprintable()


def assert_complete(exclusions: tuple[Exclusion, ...]) -> None:
    for one in exclusions:
        assert one.row >= 2
        assert emptiness(one.reason) is None
        assert one.approved_by != one.decided_by


@given(st.binary(max_size=120))
@example(b"exclusions: [[]]")
@example(b"exclusions: [{row: 2, value: [a], reason: {}, decided-at: []}]")
def test_any_bytes_give_exclusions_or_faults_inside_the_file(content: bytes) -> None:
    assert_complete(answer_to(content))


@given(st.data())
def test_exclusions_with_a_passage_exchanged_are_complete_or_refused(data: st.DataObject) -> None:
    start = data.draw(st.integers(0, len(ONE)))
    end = data.draw(st.integers(start, min(len(ONE), start + 20)))
    passage = data.draw(st.text(max_size=6) | st.sampled_from(["\n", ": ", "- ", "[", "}", "'", "~"]))
    assert_complete(answer_to((ONE[:start] + passage + ONE[end:]).encode("utf-8", errors="replace")))
