"""A long text cut into stretches of rows: those in which every line is one row, and those that need care.

In the first kind columns can be taken as wholes. The second kind goes through `rows`, line by line, which
sees further lines as far as it asks for them.
"""

from collections import deque
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import Future, ThreadPoolExecutor
from typing import TypeVar, overload

import numpy as np
import numpy.typing as npt

from assayfolio.observations.long_text import line_count, plain_lines
from assayfolio.observations.rows import MAX_CELL, Broken, Row, rows_and_ends

_MARK, _LINE_END = ord('"'), ord("\n")

_READERS = 2
_AHEAD = 4
_SMALL_PIECE, _LARGE_PIECE = 1 << 12, 1 << 18
_NO_LIMIT = 1 << 62

Taken = TypeVar("Taken")
Integers = npt.NDArray[np.int64]


class Feed:
    """The text that has not been taken yet: `data` holds whole lines, the first of them number `line`.

    `fill` sees to it that it holds `least` bytes, as long as there are so many.
    """

    def __init__(self, stretches: Iterator[bytes], data: bytes, line: int, least: int) -> None:
        self.data = data
        self.line = line
        self.ended = False
        self._stretches = stretches
        self._least = least

    def next(self) -> bytes:
        """The next stretch; nothing at the end, which is then known."""
        stretch = next(self._stretches, None)
        if stretch is None:
            self.ended = True
            return b""
        return plain_lines(stretch)

    def fill(self) -> bool:
        """Take more data where little is left; False where there is none."""
        while len(self.data) < self._least and not self.ended:
            self.data += self.next()
        return bool(self.data)

    @property
    def over(self) -> bool:
        """Whether nothing is left to be taken."""
        return self.ended and not self.data

    def piece(self, most: int) -> bytes:
        """Take whole lines of the data at hand, `most` bytes or one line, else the next stretch."""
        if not self.data:
            return self.next()
        end = self.data.rfind(b"\n", 0, most) + 1 or self.data.index(b"\n") + 1
        piece, self.data = self.data[:end], self.data[end:]
        return piece

    def drop(self, size: int) -> None:
        """Let go of `size` bytes, whole lines."""
        self.line += line_count(self.data[:size])
        self.data = self.data[size:]

    def put_back(self, data: bytes, line: int) -> None:
        """Put `data`, the lines from number `line` on, before what has not been taken yet."""
        self.data = data + self.data
        self.line = line


class Lines(Sequence[str]):
    """Lines by their numbers in the file, from `first` on; more come out of `feed` as they are asked for."""

    def __init__(self, data: bytes, first: int, feed: Feed | None = None) -> None:
        self.first = first
        self.at_hand = _split(data)
        self._feed = feed

    def __len__(self) -> int:
        # Until the text has ended there is always a line more at hand than was ever asked for.
        return self.first + len(self.at_hand)

    @overload
    def __getitem__(self, at: int) -> str: ...

    @overload
    def __getitem__(self, at: slice) -> Sequence[str]: ...

    def __getitem__(self, at: int | slice) -> str | Sequence[str]:
        if isinstance(at, slice):
            raise TypeError("lines are given one by one")
        index = at - self.first
        while self._feed is not None and not self._feed.over and index >= len(self.at_hand) - 1:
            self.at_hand.extend(_split(self._feed.piece(_LARGE_PIECE)))
        return self.at_hand[index]


class PlainLines(Sequence[str]):
    """The lines of a stretch by their numbers in the file, from `first` on, cut out as they are asked for."""

    def __init__(self, data: bytes, first: int) -> None:
        self._data = data
        self._first = first
        self._ends = np.flatnonzero(np.frombuffer(data, dtype=np.uint8) == _LINE_END)

    def __len__(self) -> int:
        return self._first + len(self._ends)

    @overload
    def __getitem__(self, at: int) -> str: ...

    @overload
    def __getitem__(self, at: slice) -> Sequence[str]: ...

    def __getitem__(self, at: int | slice) -> str | Sequence[str]:
        if isinstance(at, slice):
            raise TypeError("lines are given one by one")
        index = at - self._first
        start = int(self._ends[index - 1]) + 1 if index else 0
        return self._data[start : int(self._ends[index])].decode("utf-8")


def go_through(
    feed: Feed,
    separator: str,
    read: Callable[[bytes], Taken | None],
    by_columns: Callable[[Taken, bytes, int], None],
    by_rows: Callable[[Iterator[Row | Broken], "Lines"], None],
) -> None:
    """Take everything in `feed`, in its order: stretches of plain rows by columns, others by rows.

    `read` is given a stretch in which every line is one row; it runs in threads beside and says None where it
    cannot take it. `by_columns` gets what it made of it, the stretch, and the number of its first line;
    `by_rows` the rows of the others, with the lines that they stand on.
    """
    ahead: deque[tuple[bytes, int, Future[Taken | None]]] = deque()
    piece, most = _SMALL_PIECE, _NO_LIMIT
    with ThreadPoolExecutor(_READERS) as beside:
        while True:
            while len(ahead) < _AHEAD and feed.fill():
                size = _worth_while(plain_rows(feed.data, separator), feed.data, piece, most)
                if not size:
                    break
                body, line = feed.data[:size], feed.line
                ahead.append((body, line, beside.submit(read, body)))
                feed.drop(size)
            if ahead:
                body, line, reading = ahead.popleft()
                taken = reading.result()
                if taken is not None:
                    by_columns(taken, body, line)
                    piece, most = _SMALL_PIECE, min(2 * most, _NO_LIMIT)
                    continue
                feed.put_back(b"".join((body, *(later for later, _, _ in ahead))), line)
                ahead.clear()
                most = _LARGE_PIECE // 8  # so that a row with too many cells takes few others with it
            if not feed.data:
                return
            _by_rows(feed, separator, by_rows, piece)
            piece = min(2 * piece, _LARGE_PIECE)


def _worth_while(size: int, data: bytes, least: int, most: int) -> int:
    """How much of `size` bytes of plain rows to take by columns: all, or `most`; 0 where it is too little."""
    if size > most:
        return data.rfind(b"\n", 0, most) + 1 or size
    return size if size >= least or size == len(data) else 0


def _by_rows(
    feed: Feed, separator: str, by_rows: Callable[[Iterator[Row | Broken], "Lines"], None], most: int
) -> None:
    """Take the rows that begin in the next `most` bytes of the data one by one."""
    lines = Lines(feed.piece(most), feed.line, feed)
    end = lines.first + len(lines.at_hand)
    stopped: list[int] = []
    by_rows(_rows_until(lines, separator, end, stopped), lines)
    rest = lines.at_hand[stopped[0] - lines.first :] if stopped else []
    below = stopped[0] if stopped else lines.first + len(lines.at_hand)
    feed.put_back("".join(f"{line}\n" for line in rest).encode(), below)


def _rows_until(lines: Lines, separator: str, end: int, stopped: list[int]) -> Iterator[Row | Broken]:
    """The rows that begin before line `end` (from zero); then `stopped` holds the line below the last."""
    for row, below in rows_and_ends(lines, separator, lines.first):
        yield row
        if below >= end:
            stopped.append(below)
            return


def _split(data: bytes) -> list[str]:
    return data.decode("utf-8").split("\n")[:-1]


def plain_rows(data: bytes, separator: str) -> int:
    """The size of a beginning of `data` in which every line is one row, as RFC 4180 writes them.

    It ends where the first line begins that is none, or that could hold a cell that is too long. A quotation
    mark may stand where it opens or closes a cell, or doubled inside of one; rows on several lines are none.
    """
    half = MAX_CELL // 2  # a longer line has no end in one of the halves that it covers
    for at in range(0, len(data) - half, half):
        if data.find(b"\n", at, at + half) < 0:
            data = data[: data.rfind(b"\n", 0, at) + 1]
            break
    if b'"' not in data:
        return len(data)
    characters = np.frombuffer(data, dtype=np.uint8)
    marks = np.flatnonzero(characters == _MARK)
    opening, closing = marks[0::2], marks[1::2]
    bad = _first_out_of_order(characters, separator, opening[: len(closing)], closing)
    if bad == len(opening):
        return len(data)
    return data.rfind(b"\n", 0, int(opening[bad])) + 1


def _first_out_of_order(
    characters: npt.NDArray[np.uint8], separator: str, opening: Integers, closing: Integers
) -> int:
    """The number of the first pair of marks that are not around a cell or a part of one, or on two lines."""
    if not len(opening):
        return 0
    beside = np.zeros(256, dtype=np.bool_)
    beside[[_LINE_END, ord(separator)]] = True
    opens = beside[characters[opening - 1]]
    opens[0] |= opening[0] == 0
    opens[1:] |= opening[1:] == closing[:-1] + 1
    closes = beside[characters[closing + 1]]  # a line end follows the last character
    closes[:-1] |= closing[:-1] + 1 == opening[1:]
    ends = np.flatnonzero(characters == _LINE_END)
    inside = np.searchsorted(ends, closing) > np.searchsorted(ends, opening)
    wrong = np.flatnonzero(~(opens & closes) | inside)
    return int(wrong[0]) if len(wrong) else len(opening)
