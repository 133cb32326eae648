"""Text compressed with gzip (RFC 1952), inflated within bounds."""

import zlib

from assayfolio.observations.decoding import MAX_BYTES
from assayfolio.observations.faults import refusal

MOST_RATIO = 200
"""Recorded values shrink to a tenth, constant columns to a fiftieth; beyond this it is no record."""

FREE_BYTES = 16_000_000
"""Up to this size the ratio does not matter: a few values over and over shrink to a thousandth."""

_MAGIC = b"\x1f\x8b"
_BLOCK = 1 << 20


def inflated(content: bytes, file: str) -> bytes:
    """The text in `content`, one gzip member and nothing else; never more than 64 MB are made of it.

    Raises DataError for anything that is not gzip, a damaged or cut file, bytes behind its end, more than
    64,000,000 bytes of text, and more than 200 bytes of text a byte of the file.
    """
    require_gzip(content, file)
    parts: list[bytes] = []
    size = 0
    engine = zlib.decompressobj(wbits=31)
    pending = content
    try:
        while not engine.eof:
            part = engine.decompress(pending, _BLOCK)
            pending = engine.unconsumed_tail
            parts.append(part)
            size += len(part)
            _refuse_bomb(size, len(content), file)
            if not part and not pending:
                break
    except zlib.error as error:
        found = f"the compressed file is damaged ({reason_of(error)})"
        raise refusal(file, found, "export or copy it again") from None
    if not engine.eof:
        raise refusal(file, "the compressed file was cut short", "export or copy it again")
    if engine.unused_data:
        found = f"{len(engine.unused_data):,} bytes behind the end of the compressed text"
        raise refusal(file, found, "compress one text alone; others are files of their own in the study")
    return b"".join(parts)


def require_gzip(beginning: bytes, file: str) -> None:
    """Raise DataError unless a file begins as one that is compressed with gzip."""
    if not beginning.startswith(_MAGIC):
        advice = "take .gz off its name, or compress it with gzip"
        raise refusal(file, "this is not a file compressed with gzip, as its name says", advice)


def _refuse_bomb(size: int, packed: int, file: str) -> None:
    advice = "divide the study, or leave out columns that it does not need"
    if size > MAX_BYTES:
        raise refusal(file, f"it inflates to more than {MAX_BYTES:,} bytes", advice)
    if size > FREE_BYTES and size > MOST_RATIO * packed:
        found = f"it inflates to more than {MOST_RATIO} times its size, which recorded values do not"
        raise refusal(file, found, "give the text itself, not compressed")


def reason_of(error: zlib.error) -> str:
    """Why zlib could not go on, in its own words."""
    return str(error).rpartition(": ")[2]
