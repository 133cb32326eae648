"""The project's own shuffle, stated to the byte, so that any later version draws the same order again.

The algorithm "assayfolio-order/1":

1. Words. The message of counter c (c = 0, 1, 2, ...) is, in bytes: the name of the algorithm in ASCII, a zero
   byte, the study's identifier in UTF-8, a zero byte, the seed as a decimal number in ASCII (no sign but for
   a negative seed, no leading zeros), a zero byte, and c as 8 bytes, the highest first. Its SHA-256 (FIPS
   180-4) is read as four whole numbers of 8 bytes each, the highest byte first. These words are used in
   their order, each once.
2. Draws. A number below n is drawn by taking words until one is less than L = 2^64 - (2^64 mod n); the number
   is that word mod n. Since n divides L, every number is equally likely. For n = 1 no word is taken.
3. Shuffle (R. A. Fisher and F. Yates 1938 in the form of R. Durstenfeld 1964, from memory). For i from the
   last place down to the second, counted from zero: draw j below i + 1, and exchange what stands at i and j.

Several lists are shuffled one after the other with one stream of words.
"""

import hashlib
from collections.abc import Iterable, Iterator, Sequence
from typing import TypeVar

ALGORITHM = "assayfolio-order/1"

_WORD_BYTES = 8
_WORDS = 2 ** (8 * _WORD_BYTES)

T = TypeVar("T")


def words(study: str, seed: int) -> Iterator[int]:
    """The endless stream of whole numbers from 0 to 2**64 - 1 that belongs to `study` and `seed`."""
    start = b"\0".join((ALGORITHM.encode("ascii"), study.encode("utf-8"), str(seed).encode("ascii"), b""))
    counter = 0
    while True:
        digest = hashlib.sha256(start + counter.to_bytes(_WORD_BYTES, "big")).digest()
        for at in range(0, len(digest), _WORD_BYTES):
            yield int.from_bytes(digest[at : at + _WORD_BYTES], "big")
        counter += 1


def draw_below(n: int, stream: Iterator[int]) -> int:
    """A whole number from 0 to `n` - 1, each equally likely; takes words from `stream` as it needs them.

    `n` is from 1 to 2**64.
    """
    if n == 1:
        return 0
    limit = _WORDS - _WORDS % n
    return next(word for word in stream if word < limit) % n


def shuffled(items: Iterable[T], stream: Iterator[int]) -> Sequence[T]:
    """`items` in the order that the words of `stream` give."""
    order = list(items)
    for last in range(len(order) - 1, 0, -1):
        other = draw_below(last + 1, stream)
        order[last], order[other] = order[other], order[last]
    return order
