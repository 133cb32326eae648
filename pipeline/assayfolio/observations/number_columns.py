"""A column of numbers as integers and powers of ten, exactly as typed, without a step of Python a row.

Numbers that are written alike (sign, digits, one decimal mark at the same distance from the end) are taken
digit by digit; the others by a regular expression. What neither takes, such as a number of more than 18
digits, is left to whoever reads row by row.
"""

from collections.abc import Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Final

import numpy as np
import numpy.typing as npt

from assayfolio.exact import MAX_EXPONENT

if TYPE_CHECKING:
    import pyarrow as pa

Integers = npt.NDArray[np.int64]
Mask = npt.NDArray[np.bool_]

MOST_DIGITS: Final = 18
"""So many digits fit into 64 bits, also in a difference of two numbers."""

_LONGEST: Final = 64
_HALF: Final = 10**9  # so many are added up in 32 bits
_ZERO, _MINUS = ord("0"), ord("-")


@dataclass(frozen=True, slots=True)
class Piece:
    """The rows of a column that have one power of ten: their numbers in rising order, and the integers."""

    exponent: int
    rows: Integers
    mantissas: Integers


def pieces_of(column: "pa.StringArray", mark: str) -> tuple[list[Piece], Mask]:
    """The numbers in `column`, whose decimal mark is `mark`, and which rows hold none that was taken."""
    text = _Text.of(column)
    regular = text.alike(ord(mark))
    if regular is None:
        return _by_pattern(column, mark, np.arange(len(column)))
    piece, taken = regular
    if taken.all():
        return [piece], ~taken
    others = np.flatnonzero(~taken)
    pieces, left = _by_pattern(column.take(_arrow(others)), mark, others)
    unread = np.zeros(len(column), dtype=np.bool_)
    unread[others[left]] = True
    return [piece, *pieces], unread


@dataclass(frozen=True, slots=True)
class _Text:
    """The characters of all rows behind one another, and where each row begins and ends in them."""

    characters: npt.NDArray[np.uint8]
    starts: Integers
    ends: Integers

    @staticmethod
    def of(column: "pa.StringArray") -> "_Text":
        _, offsets, characters = column.buffers()
        bounds = np.frombuffer(offsets, dtype=np.int32)[column.offset :][: len(column) + 1].astype(np.int64)
        size = int(bounds[-1]) if len(column) else 0
        plain = np.frombuffer(characters, dtype=np.uint8) if characters is not None and size else b"\0"
        return _Text(np.frombuffer(plain, dtype=np.uint8), bounds[:-1], bounds[1:])

    def alike(self, mark: int) -> tuple[Piece, Mask] | None:
        """The rows that are written as the first one is: digits with the mark at the same place, or none.

        None where the first row is no such number.
        """
        lengths = self.ends - self.starts
        if not len(lengths) or not lengths[0]:
            return None
        first = self.characters[self.starts[0] : self.ends[0]]
        marks = np.flatnonzero(first == mark)
        if len(marks) > 1:
            return None
        places = int(len(first) - 1 - marks[0]) if len(marks) else None
        negative = (lengths > 0) & (self.characters[np.minimum(self.starts, self.ends[-1] - 1)] == _MINUS)
        digits = lengths - negative
        most = MOST_DIGITS + (places is not None)
        taken = (
            (digits <= most) & (digits > (places is not None)) & (digits > (-1 if places is None else places))
        )
        mantissas, sound = self._from_the_end(digits, int(digits[taken].max(initial=0)), places, mark)
        taken &= sound
        np.negative(mantissas, out=mantissas, where=negative)
        rows = np.flatnonzero(taken)
        exponent = -(places or 0)
        return Piece(exponent, rows, mantissas if len(rows) == len(mantissas) else mantissas[rows]), taken

    def _from_the_end(
        self, digits: Integers, most: int, places: int | None, mark: int
    ) -> tuple[Integers, Mask]:
        """The last `digits` characters of each row, `most` at most as an integer; whether they are digits.

        The character `places` before the end has to be the mark.
        """
        shortest = int(digits.min())
        at_mark = np.ones(len(digits), dtype=np.bool_)
        largest = np.zeros(len(digits), dtype=np.uint8)
        index = self.ends - 1
        halves = []
        part, power = np.zeros(len(digits), dtype=np.int32), 1
        for at in range(most):
            found = self.characters.take(index, mode="clip")
            index -= 1
            if at == places:
                at_mark = found == mark
                continue
            digit = found - np.uint8(_ZERO)
            if at >= shortest:
                digit *= digits > at
            np.maximum(largest, digit, out=largest)
            part += np.multiply(digit, power, dtype=np.int32)
            power *= 10
            if power == _HALF:
                halves.append(part)
                part, power = np.zeros(len(digits), dtype=np.int32), 1
        mantissas = np.zeros(len(digits), dtype=np.int64)
        for half in reversed([*halves, part]):
            mantissas *= _HALF
            mantissas += half
        return mantissas, at_mark & (largest <= 9)


def _by_pattern(column: "pa.StringArray", mark: str, rows: Integers) -> tuple[list[Piece], Mask]:
    """Numbers of any way of writing; `rows` are the numbers of the rows in `column`."""
    import pyarrow as pa
    import pyarrow.compute as pc

    pattern = rf"^(?P<s>[+-]?)(?P<w>[0-9]*)(?:[{mark}](?P<d>[0-9]*))?(?:[eE](?P<x>[+-]?[0-9]{{1,3}}))?$"
    trimmed = pc.ascii_trim(column, " \t")
    parts = pc.extract_regex(trimmed, pattern)
    matched = _mask(parts.is_valid()) & (_numbers(pc.binary_length(trimmed)) <= _LONGEST)
    at = np.flatnonzero(matched)
    sound = parts.take(_arrow(at))
    decimals = _field(sound, "d")
    digits = pc.binary_join_element_wise(_field(sound, "w"), decimals, "")
    significant = pc.ascii_ltrim(digits, "0")
    powers = _integers(pc.binary_join_element_wise("0", pc.ascii_ltrim(_field(sound, "x"), "+-"), ""))
    negative_power = _mask(pc.starts_with(_field(sound, "x"), "-"))
    powers = np.where(negative_power, -powers, powers)
    exponents = powers - _numbers(pc.binary_length(decimals))
    fits = (
        (_numbers(pc.binary_length(digits)) > 0)
        & (_numbers(pc.binary_length(significant)) <= MOST_DIGITS)
        & (np.abs(powers) <= MAX_EXPONENT)
        & (np.abs(exponents) <= MAX_EXPONENT)
    )
    kept = np.flatnonzero(fits)
    whole = significant.take(_arrow(kept))
    mantissas = _integers(pc.binary_join_element_wise(pa.scalar("0"), whole, ""))
    negative = _mask(pc.equal(_field(sound, "s"), "-"))[kept]
    mantissas = np.where(negative, -mantissas, mantissas)
    unread = np.ones(len(column), dtype=np.bool_)
    unread[at[kept]] = False
    return list(_by_exponent(exponents[kept], rows[at[kept]], mantissas)), unread


def _by_exponent(exponents: Integers, rows: Integers, mantissas: Integers) -> Iterator[Piece]:
    for exponent in np.unique(exponents):
        own = exponents == exponent
        yield Piece(int(exponent), rows[own], mantissas[own])


def _field(parts: Any, name: str) -> Any:
    return parts.field(name)


def _arrow(rows: Integers) -> "pa.Array[Any]":
    import pyarrow as pa

    return pa.array(rows, type=pa.int64())


def _integers(texts: Any) -> Integers:
    import pyarrow as pa

    return _numbers(texts.cast(pa.int64()))


def _numbers(values: Any) -> Integers:
    return np.asarray(values.to_numpy(zero_copy_only=False), dtype=np.int64)


def _mask(values: Any) -> Mask:
    return np.asarray(values.to_numpy(zero_copy_only=False), dtype=np.bool_)
