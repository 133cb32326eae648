"""The shuffle is fixed to the byte: words and orders here were computed from its description alone."""

import hashlib
import itertools
import struct
from collections import Counter

import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.worksheet.order import ALGORITHM, draw_below, shuffled, words

SEED = 20261201


def independent_words(study: str, seed: int, count: int) -> list[int]:
    """The stream of words as the description says, written a second time."""
    found: list[int] = []
    for counter in range(-(-count // 4)):
        message = b"assayfolio-order/1\x00%s\x00%d\x00" % (study.encode(), seed) + struct.pack(">Q", counter)
        found += struct.unpack(">4Q", hashlib.sha256(message).digest())
    return found[:count]


def test_the_words_of_a_study_and_seed_are_fixed_for_good():
    stream = words("WHP-204", SEED)
    assert [next(stream) for _ in range(6)] == [
        0x62AA47EC9BA28609,
        0xCD61392CD21F0728,
        0x42EB8D6D5A76EDF2,
        0xBCEA364BDB30F616,
        0xCEDF3DA788C34FD9,
        0x59E8E611493C1845,
    ]
    assert next(words("A", 0)) == 0x71010A25AC96EA21
    assert ALGORITHM == "assayfolio-order/1"


@given(study=st.from_regex(r"[A-Z0-9][A-Z0-9-]{0,39}", fullmatch=True), seed=st.integers(0, 2**53 - 1))
def test_the_words_follow_the_description(study, seed):
    assert list(itertools.islice(words(study, seed), 9)) == independent_words(study, seed, 9)


@pytest.mark.requirement("PLAN-5")
def test_the_order_of_a_study_and_seed_is_fixed_for_good():
    assert shuffled(range(12), words("WHP-204", SEED)) == [7, 6, 0, 11, 2, 5, 4, 1, 3, 10, 8, 9]
    assert shuffled(range(5), words("WHP-204", SEED)) == [1, 3, 2, 4, 0]


def test_study_and_seed_run_into_each_other_nowhere():
    assert next(words("A1", 2)) != next(words("A", 12))
    assert next(words("A", 1)) != next(words("B", 1))


def test_words_that_would_favour_small_numbers_are_passed_over():
    limit = 2**64 - 2**64 % 6
    assert draw_below(6, iter([limit, 2**64 - 1, limit - 1])) == 5
    assert draw_below(6, iter([limit - 6])) == 0


def test_a_single_choice_takes_no_word():
    assert draw_below(1, iter(())) == 0
    assert shuffled(["only"], iter(())) == ["only"]
    assert shuffled([], iter(())) == []


@given(items=st.lists(st.integers()), seed=st.integers(0, 2**53 - 1))
def test_a_shuffle_loses_and_adds_nothing(items, seed):
    assert Counter(shuffled(items, words("S", seed))) == Counter(items)


def test_every_choice_of_words_gives_its_own_order():
    """With words below 2, 3 and 4 in every combination each order of four items comes up exactly once."""
    orders = {
        tuple(shuffled("abcd", iter(draws))) for draws in itertools.product(range(4), range(3), range(2))
    }
    assert orders == set(itertools.permutations("abcd"))
