"""Whatever is handed in, the answer is a plan or a list of faults with places inside the file."""

import json
import re
import string
from fractions import Fraction
from typing import Any

from hypothesis import example, given
from hypothesis import strategies as st

from assayfolio.errors import StudyError
from assayfolio.study.numbers import exact_number
from assayfolio.study.plan import Laboratory, StudyDefinition
from assayfolio.study.reading import read_laboratory, read_study
from assayfolio.study.suggestions import edit_distance, nearest
from assayfolio.study.vocabulary import DATA_KEYS, STUDY_KEYS
from study.examples import FULL, RECEIVED, SAMPLE, SEPARATE, SMALLEST


def lines_of(content: bytes) -> list[str]:
    text = content.decode("utf-8-sig", errors="replace")
    return re.split(r"\r\n|\r|\n", text)


def answer_to(content: bytes) -> StudyDefinition | StudyError:
    """What reading `content` gives, after asserting what holds of every refusal."""
    try:
        return read_study(content, "any.yaml")
    except StudyError as refusal:
        assert_well_worded(refusal, content)
        return refusal


def assert_well_worded(refusal: StudyError, content: bytes) -> None:
    lines = lines_of(content)
    assert refusal.faults
    places = [(fault.place.line or 0, fault.place.column or 0) for fault in refusal.faults]
    assert places == sorted(places)
    for line, column in places:
        assert 1 <= line <= len(lines)
        assert 1 <= column <= len(lines[line - 1]) + 1
    for fault in refusal.faults:
        assert fault.place.file == "any.yaml"
        assert fault.found.isprintable()
        assert fault.advice.isprintable()


@given(st.binary(max_size=200))
@example(b"")
@example(b"\xef\xbb\xbf")
@example(b"? a")
@example(b"a:\n-")
@example(b"[")
@example(b'"\\')
@example(b"study: 'x")
def test_any_bytes_give_a_plan_or_faults_inside_the_file(content: bytes) -> None:
    answer_to(content)


@given(st.text(alphabet="aé水:-?[]{},&*!|>'\"%@`#~< \t\n\r\\01", max_size=60))
def test_any_text_of_marks_gives_a_plan_or_faults_inside_the_file(text: str) -> None:
    answer_to(text.encode())


@given(st.data())
def test_a_full_plan_with_a_passage_exchanged_gives_a_plan_or_faults_inside_the_file(
    data: st.DataObject,
) -> None:
    whole = data.draw(st.sampled_from([FULL, RECEIVED, SAMPLE, SEPARATE]))
    start = data.draw(st.integers(0, len(whole)))
    end = data.draw(st.integers(start, min(len(whole), start + 30)))
    passage = data.draw(
        st.text(max_size=8) | st.sampled_from(["\n", ": ", "- ", "[", "}", "'", '"', "~", "\t"])
    )
    answer_to((whole[:start] + passage + whole[end:]).encode("utf-8", errors="replace"))


@given(st.lists(st.sampled_from(SMALLEST.splitlines(keepends=True)), max_size=14))
def test_lines_in_any_order_and_number_give_a_plan_or_faults_inside_the_file(lines: list[str]) -> None:
    answer_to("".join(lines).encode())


SCALARS = st.sampled_from(
    [
        "all",
        "a",
        "b",
        "0.05",
        "1",
        "-1",
        "1/3",
        "holm",
        "sidak",
        "scheffe",
        "linear",
        "polynomial",
        "not-lower",
        "level-sd",
        "total-sd",
        "separate",
        "2",
        "true",
        "fixed",
        "random",
        "",
        "~",
        "x y",
        "水",
        "author",
        "wide",
        "omit",
        "limit",
        "half-limit",
        "utf-16",
        "v.xlsx",
        "v*.csv",
        "<5",
    ]
)
TREES = st.recursive(
    SCALARS,
    lambda inner: (
        st.lists(inner, max_size=3)
        | st.dictionaries(
            st.sampled_from(
                [
                    "name",
                    "against",
                    "pairs",
                    "weights",
                    "contrasts",
                    "trend",
                    "degree",
                    "scores",
                    "adjust",
                    "alternative",
                    "margin",
                    "margin-percent",
                    "lower",
                    "non-inferiority",
                    "response",
                    "quantity",
                    "level",
                    "at-most",
                    "effects",
                    "variances",
                    "across-responses",
                    "role",
                    "a",
                    "b",
                    "file",
                    "column",
                    "item",
                    "seed",
                    "block",
                    "blocks",
                ]
            ),
            inner,
            max_size=4,
        )
    ),
    max_leaves=8,
)


@given(st.dictionaries(st.sampled_from([*STUDY_KEYS, "other"]), TREES, max_size=6))
def test_values_of_the_wrong_kind_anywhere_give_a_plan_or_faults_inside_the_file(
    tree: dict[str, Any],
) -> None:
    whole = {"study": "A", "title": "t", "alpha": "0.05", **tree}
    whole.setdefault("data", {"file": "v.csv", "response": "y", "factor": "f", "levels": ["a", "b"]})
    answer_to(json.dumps(whole, ensure_ascii=False).encode())


@given(st.binary(max_size=120))
@example(b"laboratory: [x]")
def test_any_bytes_give_settings_or_faults(content: bytes) -> None:
    try:
        laboratory = read_laboratory(content, "any.yaml")
    except StudyError as refusal:
        assert_well_worded(refusal, content)
    else:
        assert isinstance(laboratory, Laboratory)


DATA = st.dictionaries(st.sampled_from(DATA_KEYS), TREES, max_size=6)


@given(DATA, st.dictionaries(st.sampled_from(["measurement", "worksheet"]), TREES))
def test_data_of_any_kind_give_a_plan_or_faults_inside_the_file(
    data: dict[str, Any], tree: dict[str, Any]
) -> None:
    columns = {"file": "v.csv", "response": "y", "factor": "f"}
    whole = {"study": "A", "title": "t", "alpha": "0.05", **tree, "data": {**columns, **data}}
    answer_to(json.dumps(whole, ensure_ascii=False).encode())


LABELS = st.text(
    alphabet=string.ascii_letters + string.digits + "µ°Ωé.,:;#'\"-+*&!?%@{}[]|<>=~ /\\", min_size=1
).filter(lambda text: text == text.strip() and len(text) <= 80)


@given(st.lists(LABELS, min_size=2, max_size=6, unique=True), LABELS, LABELS)
def test_quoted_labels_arrive_exactly_as_they_were_written(levels: list[str], title: str, unit: str) -> None:
    plan = {
        "study": "A",
        "title": title,
        "data": {"file": "v.csv", "response": "y y", "factor": "f f", "unit": unit, "levels": levels},
        "alpha": "0.05",
    }
    study = read_study(json.dumps(plan, ensure_ascii=False).encode(), "any.yaml")
    assert (study.title, study.data.unit, study.data.levels) == (title, unit, tuple(levels))


@given(st.lists(st.fractions(-1000, 1000, max_denominator=100).filter(bool), min_size=1, max_size=3))
def test_weights_are_taken_exactly_and_judged_exactly(weights: list[Fraction]) -> None:
    weights = [*weights, -sum(weights, Fraction(0))]
    levels = [f"level-{number}" for number in range(len(weights))]
    plan: dict[str, Any] = {
        "study": "A",
        "title": "t",
        "data": {"file": "v.csv", "response": "y", "factor": "f", "levels": levels},
        "alpha": "0.05",
        "comparisons": [{"name": "c", "weights": dict(zip(levels, map(str, weights), strict=True))}],
    }
    (contrast,) = read_study(json.dumps(plan).encode(), "any.yaml").comparisons
    assert getattr(contrast, "weights", None) == tuple(zip(levels, weights, strict=True))
    plan["comparisons"][0]["weights"][levels[0]] = str(weights[0] + Fraction(1, 10**6))
    answer = answer_to(json.dumps(plan).encode())
    assert isinstance(answer, StudyError)
    assert f"add up to 1/{10**6}" in answer.faults[0].found


@given(st.integers(-(10**15) + 1, 10**15 - 1), st.integers(1, 10**15 - 1))
def test_a_fraction_is_the_number_it_spells(numerator: int, denominator: int) -> None:
    assert exact_number(f"{numerator}/{denominator}") == Fraction(numerator, denominator)


WORDS = st.text(alphabet="abc-", max_size=7)


@given(WORDS, WORDS, WORDS)
def test_edits_between_words_are_a_distance(a: str, b: str, c: str) -> None:
    assert (edit_distance(a, b) == 0) == (a == b)
    assert edit_distance(a, b) == edit_distance(b, a)
    assert abs(len(a) - len(b)) <= edit_distance(a, b) <= max(len(a), len(b))
    assert edit_distance(a + c, b + c) <= edit_distance(a, b)


@given(st.sampled_from(STUDY_KEYS), st.data())
def test_a_key_with_one_slip_suggests_a_known_key(key: str, data: st.DataObject) -> None:
    index = data.draw(st.integers(0, len(key) - 1))
    slips = [
        key[:index] + key[index + 1 :],
        key[:index] + "q" + key[index:],
        key[:index] + "q" + key[index + 1 :],
    ]
    for slip in slips:
        suggestion = nearest(slip, STUDY_KEYS)
        assert suggestion is not None
        assert edit_distance(slip, suggestion) <= 1


NUMBERS = st.fractions(-50, 50, max_denominator=20)


@given(st.lists(NUMBERS, min_size=2, max_size=6), st.integers(2, 7))
def test_a_trend_is_planned_just_where_its_levels_have_different_numbers_and_are_enough(
    scores: list[Fraction], degree: int
) -> None:
    levels = [f"level-{number}" for number in range(len(scores))]
    trend = {"name": "t", "trend": "polynomial", "degree": degree, "adjust": "holm"}
    plan: dict[str, Any] = {
        "study": "A",
        "title": "t",
        "data": {"file": "v.csv", "response": "y", "factor": "f", "levels": levels},
        "alpha": "0.05",
        "comparisons": [{**trend, "scores": dict(zip(levels, map(str, scores), strict=True))}],
    }
    answer = answer_to(json.dumps(plan).encode())
    fits = len(set(scores)) == len(scores) and degree < len(levels)
    assert isinstance(answer, StudyDefinition) == fits
