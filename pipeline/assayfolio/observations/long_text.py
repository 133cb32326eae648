"""A long text in UTF-8, taken in stretches of whole lines, so that it is never whole in memory.

Each stretch is held to what `decoding` demands of a whole file; blank lines at the end of the file are left
out, LF and CRLF become LF, a byte order mark is no part of the text.
"""

import hashlib
import zlib
from collections.abc import Callable, Iterator
from contextlib import suppress
from dataclasses import replace
from typing import BinaryIO

import numpy as np

from assayfolio.errors import DataError, Fault, Place
from assayfolio.observations.compressed import FREE_BYTES, MOST_RATIO, reason_of, require_gzip
from assayfolio.observations.decoding import CARRIAGE_RETURN, add_nul_bytes, not_utf8, nul_advice
from assayfolio.observations.faults import FaultList, raise_faults, refusal

BLOCK = 1 << 20
MOST_BYTES = 1 << 34
LONGEST_LINE = 8_000_000

_BOMB = (
    f"it inflates to more than {MOST_RATIO} times its size, which recorded values do not",
    "give the text itself, not compressed",
)
_LINE_END = ord("\n")
_BOM = b"\xef\xbb\xbf"


class UnfitTextError(Exception):
    """Some byte of the text cannot be read; a second pass says which and where."""


class LongLineError(DataError):
    """A line goes on for too long to be held in memory."""


class LongFile:
    """A file that is read from its beginning once or more, and hashed each time.

    `open_file` opens it anew, `block` is how many bytes are read at once; a name that ends in .gz is that of
    a text compressed with gzip. Where `sha256` is given the file must be the one that has it.
    """

    def __init__(
        self, name: str, open_file: Callable[[], BinaryIO], block: int = BLOCK, sha256: str = ""
    ) -> None:
        self.name = name
        self.block = block
        self.packed = name.lower().endswith(".gz")
        self.size = 0
        self.sha256 = sha256
        self._open = open_file

    def stretches(self) -> Iterator[bytes]:
        """The text as it stands, in stretches of whole lines of about 1 MB, the last line perhaps unended.

        Raises DataError for a damaged compressed file, for more than 16 GiB of text, and for a file that was
        changed since it was read the first time.
        """
        with self._open() as file:
            blocks = self._hashed(file)
            if self.packed:
                require_gzip(file.read(2), self.name)
                most = max(FREE_BYTES, MOST_RATIO * file.seek(0, 2))
                file.seek(0)
                blocks = self._inflated(blocks, min(most, MOST_BYTES))
            yield from _whole_lines(blocks, self.name)

    def _hashed(self, file: BinaryIO) -> Iterator[bytes]:
        digest, size = hashlib.sha256(), 0
        while block := file.read(self.block):
            digest.update(block)
            size += len(block)
            if size > MOST_BYTES:
                raise refusal(self.name, f"the file has more than {MOST_BYTES:,} bytes", "divide the study")
            yield block
        if self.sha256 and digest.hexdigest() != self.sha256:
            raise refusal(self.name, "the file was changed while it was read", "run the study again")
        self.size, self.sha256 = size, digest.hexdigest()

    def _inflated(self, blocks: Iterator[bytes], most: int) -> Iterator[bytes]:
        engine = zlib.decompressobj(wbits=31)
        size = behind = 0
        try:
            for block in blocks:
                if engine.eof:
                    behind += len(block)
                    continue
                pending, part = block, b"-"
                while (pending or part) and not engine.eof:
                    part = engine.decompress(pending, self.block)
                    pending = engine.unconsumed_tail
                    size += len(part)
                    if size > most:
                        raise refusal(self.name, *_BOMB)
                    yield part
                behind += len(engine.unused_data) if engine.eof else 0
        except zlib.error as error:
            found = f"the compressed file is damaged ({reason_of(error)})"
            raise refusal(self.name, found, "export or copy it again") from None
        if not engine.eof:
            raise refusal(self.name, "the compressed file was cut short", "export or copy it again")
        if behind:
            found = f"{behind:,} bytes behind the end of the compressed text"
            advice = "compress one text alone; others are files of their own in the study"
            raise refusal(self.name, found, advice)


def _whole_lines(blocks: Iterator[bytes], name: str) -> Iterator[bytes]:
    """`blocks` cut behind line ends; blank lines wait until something follows them, and fall at the end."""
    rest, yielded = b"", False
    for block in blocks:
        whole = rest + block
        end = _end_of_entries(whole, whole.rfind(b"\n") + 1)
        if end:
            yielded = True
            yield whole[:end]
        rest = whole[end:]
        if len(rest) > LONGEST_LINE:
            raise _long_line(name, None if yielded else 1)
    end = _end_of_entries(rest, len(rest))
    if end:
        yield rest[:end]


def _long_line(name: str, line: int | None) -> LongLineError:
    found = f"a line, or blank lines, of more than {LONGEST_LINE:,} bytes"
    fault = Fault(
        Place(name, line, None if line is None else 1), found, "export the file again, one line a row"
    )
    return LongLineError(f"{name} cannot be used: 1 fault", (fault,))


def _end_of_entries(text: bytes, end: int) -> int:
    """Where the last line that is not blank ends, of those that end at `end`; 0 where all are blank."""
    while end:
        start = text.rfind(b"\n", 0, end - 1) + 1
        line = text[start:end]
        if not line.isspace() and not line.decode("utf-8", "replace").isspace():
            return end
        entries = len(text[:start].rstrip())
        if b"\r" in text[entries:end].replace(b"\r\n", b"\n"):
            return end  # blank lines that are refused, as lines that hold anything would be
        end = min(start, text.find(b"\n", entries) + 1) if entries else 0
    return 0


def line_count(text: bytes) -> int:
    """How many lines end in `text`."""
    return int(np.count_nonzero(np.frombuffer(text, dtype=np.uint8) == _LINE_END))


def plain_lines(stretch: bytes) -> bytes:
    """A stretch with LF behind every line. Raises UnfitTextError where it holds what no text may hold."""
    if b"\0" in stretch:
        raise UnfitTextError
    if not stretch.isascii():
        try:
            stretch.decode("utf-8")
        except UnicodeDecodeError:
            raise UnfitTextError from None
    if b"\r" in stretch:
        stretch = stretch.replace(b"\r\n", b"\n")
        if b"\r" in stretch:
            raise UnfitTextError
    return stretch if stretch.endswith(b"\n") else stretch + b"\n"


def refuse_unfit_text(file: LongFile) -> None:
    """Raise DataError as `decoding` does: all NUL bytes, or the first byte that is no UTF-8, or all stray CR.

    A second pass through the file, for one that `plain_lines` would not take.
    """
    nul, returns = FaultList(file.name), FaultList(file.name)
    first: DataError | None = None
    advice = ""
    line = offset = 0
    stretches = file.stretches()
    while stretch := _next(stretches, file.name, line):
        body = stretch
        if not offset and body.startswith(_BOM):
            body, offset = body[len(_BOM) :], len(_BOM)
        if b"\0" in body:
            advice = advice or _advice_on_nul_bytes(file)
            add_nul_bytes(nul, body, line, advice)
        if first is None:
            try:
                body.decode("utf-8")
            except UnicodeDecodeError as error:
                first = _shifted(not_utf8(body, error, offset, file.name), line)
        _add_returns(returns, body, line)
        line += line_count(body)
        offset += len(body)
    raise_faults(file.name, nul)
    if first is not None:
        raise first
    raise_faults(file.name, returns)


def _next(stretches: Iterator[bytes], name: str, line: int) -> bytes:
    """The next stretch, nothing at the end; a line that is too long is named as the one below `line`."""
    try:
        return next(stretches, b"")
    except LongLineError:
        raise _long_line(name, line + 1) from None


def _advice_on_nul_bytes(file: LongFile) -> str:
    """What to do about the NUL bytes of the file, which a pass of its own counts."""
    counts = [0, 0]
    size = skipped = 0
    with suppress(LongLineError):  # which is told by whoever reads that far
        for stretch in file.stretches():
            body = stretch
            if not size and not skipped and body.startswith(_BOM):
                body, skipped = body[len(_BOM) :], len(_BOM)
            for place in (0, 1):
                counts[(size + place) % 2] += body[place::2].count(0)
            size += len(body)
    return nul_advice(counts[0], counts[1], size)


def _add_returns(faults: FaultList, body: bytes, line: int) -> None:
    plain = body.replace(b"\r\n", b"\n")
    if b"\r" not in plain:
        return
    for number, text in enumerate(plain.split(b"\n"), start=line + 1):
        at = text.find(b"\r")
        if at >= 0:
            column = len(text[:at].decode("utf-8", "replace")) + 1
            faults.add(number, column, *CARRIAGE_RETURN)


def _shifted(error: DataError, lines: int) -> DataError:
    def lower(fault: Fault) -> Fault:
        place = fault.place
        return replace(fault, place=replace(place, line=(place.line or 0) + lines))

    return DataError(error.headline, tuple(map(lower, error.faults)), error.hidden)
