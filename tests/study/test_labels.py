"""Labels of pairs of levels: `A - B` has to name one pair only."""

from itertools import permutations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.study.labels import shared_label


@pytest.mark.parametrize(
    ("levels", "label"),
    [
        (("a", "b"), None),
        (("a - b", "c"), None),
        (("a - b", "c", "d - e"), None),
        (("a", "b - c", "a - b", "c"), "a - b - c"),
        (("x -", "b", "x", "- b"), "x - - b"),
        (("x", "x - x"), None),
    ],
)
def test_only_levels_that_hold_the_sign_of_the_label_can_be_confused(
    levels: tuple[str, ...], label: str | None
) -> None:
    assert shared_label(levels) == label


NAMES = st.lists(st.sampled_from(["a", "b", "-", "- ", " -", " - "]), min_size=1, max_size=6).map("".join)


@given(st.lists(NAMES.map(str.strip).filter(bool), max_size=8))
def test_a_shared_label_is_found_just_where_two_pairs_have_it(levels: list[str]) -> None:
    pairs: dict[str, set[frozenset[str]]] = {}
    for one, other in permutations(sorted(set(levels)), 2):
        pairs.setdefault(f"{one} - {other}", set()).add(frozenset((one, other)))
    shared = {label for label, of in pairs.items() if len(of) > 1}
    found = shared_label(levels)
    assert (found in shared) if shared else found is None


def test_many_levels_with_many_signs_are_looked_through_at_once() -> None:
    levels = [" - ".join(["lot"] * 10 + [str(number)]) for number in range(3000)]
    assert shared_label(levels) is None
