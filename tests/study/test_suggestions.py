"""The nearest known word to a misspelt one."""

import pytest

from assayfolio.study.suggestions import edit_distance, nearest
from assayfolio.study.vocabulary import ADJUSTMENTS, DATA_KEYS, STUDY_KEYS


@pytest.mark.parametrize(
    ("a", "b", "edits"),
    [
        ("alpha", "alpha", 0),
        ("alpha", "aplha", 1),
        ("alpha", "alph", 1),
        ("alpha", "alphas", 1),
        ("alpha", "alphx", 1),
        ("", "abc", 3),
        ("kitten", "sitting", 3),
        ("ca", "abc", 3),
    ],
)
def test_edits_are_counted_with_a_swap_of_neighbours_as_one(a: str, b: str, edits: int) -> None:
    assert edit_distance(a, b) == edits


@pytest.mark.parametrize(
    ("word", "known", "suggestion"),
    [
        ("Alpha", STUDY_KEYS, "alpha"),
        ("titel", STUDY_KEYS, "title"),
        ("sign_off", STUDY_KEYS, "sign-off"),
        ("signoff", STUDY_KEYS, "sign-off"),
        ("comparison", STUDY_KEYS, "comparisons"),
        ("below limit", DATA_KEYS, "below-limit"),
        ("tukey", ADJUSTMENTS, "tukey-kramer"),
        ("dunnet", ADJUSTMENTS, "dunnett"),
        ("instrument", STUDY_KEYS, None),
        ("x", STUDY_KEYS, None),
        ("", STUDY_KEYS, None),
        ("a" * 1000, STUDY_KEYS, None),
    ],
)
def test_only_a_near_word_is_suggested(word: str, known: tuple[str, ...], suggestion: str | None) -> None:
    assert nearest(word, known) == suggestion


def test_nothing_is_suggested_among_very_many_words() -> None:
    assert nearest("level-7", [f"level-{number}x" for number in range(51)]) is None
