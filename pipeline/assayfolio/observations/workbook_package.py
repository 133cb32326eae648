"""The parts of a spreadsheet file (.xlsx, a zip archive of XML), taken out within bounds.

Nothing of an archive is believed before it is checked: the number of its parts, their sizes, how far they
inflate, what they are named. Only the parts that hold cells are inflated at all.
"""

import io
import struct
import zipfile
import zlib
from collections import Counter

from assayfolio.errors import DataError
from assayfolio.observations.compressed import FREE_BYTES, MOST_RATIO
from assayfolio.observations.decoding import MAX_BYTES
from assayfolio.observations.faults import refusal
from assayfolio.study.faults import shown

MOST_PARTS = 5_000
MOST_DECLARED = 512 * 1024 * 1024
MOST_INFLATED = 128 * 1024 * 1024
"""What the parts that are read may hold together: a million cells and more, in a few seconds."""

_ZIP = b"PK\x03\x04"
_OLD = b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1"
_ENTRY = b"PK\x01\x02"
_KNOWN_WAYS = (zipfile.ZIP_STORED, zipfile.ZIP_DEFLATED)
_ENCRYPTED = 1
_DAMAGE = (
    zipfile.BadZipFile,
    zlib.error,
    struct.error,
    ValueError,
    EOFError,
    OSError,
    OverflowError,
    NotImplementedError,
    RuntimeError,
)
_AGAIN = "save it again as an Excel workbook (.xlsx)"


class Package:
    """The parts of one spreadsheet file by name."""

    def __init__(self, content: bytes, file: str) -> None:
        """Look through the archive's directory.

        Raises DataError for a file of another kind, a damaged archive, one with macros, a password or names
        that stand twice, and for one that holds or would inflate to far more than a workbook does.
        """
        self._file = file
        self._left = MOST_INFLATED
        _refuse_other_kinds(content, file)
        try:
            self._archive = zipfile.ZipFile(io.BytesIO(content))
            entries = self._archive.infolist()
        except _DAMAGE as error:
            raise self.damaged(f"no zip archive that can be read: {error}") from None
        self._entries = {entry.filename: entry for entry in entries}
        _check_entries(entries, file)

    def __contains__(self, name: str) -> bool:
        """Whether there is a part of that name."""
        return name in self._entries

    def read(self, name: str) -> bytes:
        """The bytes of one part. Raises DataError where it is missing, damaged or too large."""
        entry = self._entries.get(name)
        if entry is None:
            raise self.damaged(f"it has no part {shown(name)}")
        if entry.file_size > self._left:
            raise self.too_long(f"its cells inflate to more than {MOST_INFLATED:,} bytes")
        try:
            with self._archive.open(entry) as part:
                content = part.read(self._left + 1)
        except _DAMAGE as error:
            raise self.damaged(f"part {shown(name)} cannot be read: {error}") from None
        self._left -= len(content)
        return content

    def too_long(self, found: str) -> DataError:
        """The error of a workbook that holds more than can be read."""
        return refusal(self._file, found, "divide the study, or give the values as text (CSV)")

    def damaged(self, how: str) -> DataError:
        """The error of a workbook that is not made as one has to be."""
        readable = "".join(c if c.isprintable() else " " for c in how[:300])
        return refusal(self._file, f"the workbook is damaged ({readable})", _AGAIN)


def _refuse_other_kinds(content: bytes, file: str) -> None:
    if content.startswith(_OLD):
        found = "this is a workbook with a password, or one in the old binary Excel format"
        raise refusal(file, found, f"take the password off, or {_AGAIN}")
    if not content.startswith(_ZIP):
        advice = "give the file a name that says what it is (.csv for text), or save it as .xlsx"
        raise refusal(file, "this is not a workbook, as its name says", advice)
    if len(content) > MAX_BYTES:
        found = f"the file has {len(content):,} bytes, more than {MAX_BYTES:,}"
        raise refusal(file, found, "leave out pictures, or give the values as text (CSV)")
    if content.count(_ENTRY) > 2 * MOST_PARTS:  # before the directory is read, which takes long
        raise refusal(file, f"the archive has more than {MOST_PARTS:,} parts", _AGAIN)


def _check_entries(entries: list[zipfile.ZipInfo], file: str) -> None:
    if len(entries) > MOST_PARTS:
        raise refusal(file, f"the archive has more than {MOST_PARTS:,} parts", _AGAIN)
    twice = [name for name, n in Counter(entry.filename.lower() for entry in entries).items() if n > 1]
    if twice:
        raise refusal(file, f"part {shown(twice[0])} is in the archive twice", _AGAIN)
    if sum(entry.file_size for entry in entries) > MOST_DECLARED:
        found = f"the archive inflates to more than {MOST_DECLARED:,} bytes"
        raise refusal(file, found, "divide the study, or give the values as text (CSV)")
    for entry in entries:
        name = shown(entry.filename)
        if entry.flag_bits & _ENCRYPTED:
            raise refusal(file, f"part {name} has a password", "take the password off")
        if entry.compress_type not in _KNOWN_WAYS:
            raise refusal(file, f"part {name} is compressed in a way that workbooks are not", _AGAIN)
        if entry.file_size > FREE_BYTES and entry.file_size > MOST_RATIO * entry.compress_size:
            found = f"part {name} inflates to more than {MOST_RATIO} times its size"
            raise refusal(file, found, "give the values as text (CSV)")
        if entry.filename.lower().endswith("vbaproject.bin"):
            raise refusal(file, "the workbook holds macros", "save it as .xlsx, which holds none")
