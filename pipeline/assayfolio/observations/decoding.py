"""From the bytes of a text file to its lines, in the encoding that the plan declares and in no other."""

import re
from collections.abc import Callable

from assayfolio.errors import DataError
from assayfolio.observations.faults import FaultList, raise_faults, refusal
from assayfolio.study.faults import shown
from assayfolio.study.plan import Encoding

MAX_BYTES = 64_000_000
MAX_LINES = 1_000_000

CARRIAGE_RETURN = ("a carriage return that no line feed follows", "let every line end in LF or CRLF")

_UTF8_MARK = b"\xef\xbb\xbf"
_OTHER_KINDS = (
    (b"PK\x03\x04", "a spreadsheet or another zip archive"),
    (b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1", "a spreadsheet in the old binary Excel format"),
    (b"\x1f\x8b", "a file compressed with gzip"),
    (b"\xfd7zXZ\x00", "a file compressed with xz"),
    (b"\x28\xb5\x2f\xfd", "a file compressed with zstandard"),
    (b"7z\xbc\xaf\x27\x1c", "a 7-Zip archive"),
    (b"\x89HDF\r\n\x1a\n", "an HDF5 file"),
    (b"SQLite format 3\x00", "an SQLite database"),
    (b"%PDF", "a PDF"),
    (b"{\\rtf", "a word processor's document"),
    (b"<?xml", "an XML file"),
    (b"<!DOCTYPE", "a web page"),
    (b"<html", "a web page"),
)
_MARKS = (
    (_UTF8_MARK, "UTF-8"),
    (b"\xff\xfe\x00\x00", "UTF-32"),
    (b"\x00\x00\xfe\xff", "UTF-32"),
    (b"\xff\xfe", "UTF-16"),
    (b"\xfe\xff", "UTF-16"),
)
_CODECS: dict[Encoding, str] = {
    "windows-1252": "cp1252",
    "iso-8859-1": "iso8859-1",
    "iso-8859-15": "iso8859-15",
}
_WANTED = "save it as text with separators (CSV) in UTF-8"
_UTF16_WANTED = "save it in UTF-8, or state `encoding: utf-16` in the study's data"
_UPPER_CONTROL = re.compile("[\x80-\x9f]")
_BEYOND_ASCII = re.compile("[^\x00-\x7f]+")


def decoded_lines(content: bytes, file: str, encoding: Encoding = "utf-8") -> tuple[list[str], bool]:
    """The lines of `content` without their line ends, and whether it began with a byte order mark.

    Lines end in LF or CRLF, also mixed; blank lines at the end of the file are left out.
    Raises DataError for a file of another kind or in another encoding than the one declared, for text that is
    declared as Windows-1252 or ISO 8859 and is valid UTF-8 beyond ASCII, for UTF-16 without a mark of it, a
    NUL character, a carriage return that no line feed follows, and for an empty or an enormous file.
    """
    refuse_other_kinds(content, file)
    text, has_mark = _DECODERS[encoding](content, file, encoding)
    refuse_empty(text, file)
    lines = text.replace("\r\n", "\n").split("\n")
    if "\r" in text:
        _refuse_everywhere(
            lines,
            "\r",
            *CARRIAGE_RETURN,
            file,
        )
    while not lines[-1] or lines[-1].isspace():
        lines.pop()
    return lines, has_mark


def refuse_other_kinds(content: bytes, file: str) -> None:
    """Raise DataError where `content` begins as a file of another kind does, and where it is enormous."""
    for magic, kind in _OTHER_KINDS:
        if content[: len(magic)].lower() == magic.lower():
            raise refusal(file, f"this is {kind}, not a text file", _WANTED)
    if len(content) > MAX_BYTES:
        found = f"the file has {len(content):,} bytes, more than {MAX_BYTES:,}"
        raise refusal(file, found, "divide the study, or leave out columns that it does not need")
    line_count = content.count(b"\n")
    if line_count > MAX_LINES:
        found = f"the file has {line_count:,} lines, more than {MAX_LINES:,}"
        raise refusal(file, found, "divide the study")


def _mark_of(content: bytes) -> tuple[bytes, str]:
    """The byte order mark that `content` begins with and the encoding that it stands for, or nothing."""
    return next(((mark, name) for mark, name in _MARKS if content.startswith(mark)), (b"", ""))


def utf8_mark(content: bytes, file: str) -> bytes:
    """The byte order mark of UTF-8 that begins `content`, or nothing. Raises DataError for another mark."""
    mark, name = _mark_of(content)
    if name == "UTF-32":
        raise refusal(file, "the file is encoded in UTF-32", _WANTED, 1, 1)
    if name == "UTF-16":
        raise refusal(file, "the file is encoded in UTF-16", _UTF16_WANTED, 1, 1)
    return mark


def refuse_empty(text: str, file: str) -> None:
    """Raise DataError where `text` holds nothing but blanks."""
    if not text or text.isspace():
        raise refusal(file, "the file is empty", "the column names and the values are expected in it")


def _from_utf8(content: bytes, file: str, _: Encoding) -> tuple[str, bool]:
    mark = utf8_mark(content, file)
    body = content[len(mark) :]
    if b"\x00" in body:
        refuse_nul_bytes(body, file)
    try:
        return body.decode("utf-8"), bool(mark)
    except UnicodeDecodeError as error:
        raise not_utf8(body, error, len(mark), file) from None


def _from_utf16(content: bytes, file: str, _: Encoding) -> tuple[str, bool]:
    mark, name = _mark_of(content)
    if name != "UTF-16":
        found = f"the file is encoded in {name}" if name else "the file has no byte order mark of UTF-16"
        advice = f"the study declares utf-16; take `encoding` out of its data, or {_WANTED}"
        raise refusal(file, found, advice, 1, 1)
    codec = "utf-16-le" if mark == b"\xff\xfe" else "utf-16-be"
    body = content[len(mark) :]
    try:
        text = body.decode(codec)
    except UnicodeDecodeError as error:
        before = body[: error.start].decode(codec)
        found = f"bytes that are no UTF-16 (from number {len(mark) + error.start + 1} of the file)"
        advice = "it may have been cut short; export it again"
        raise refusal(file, found, advice, *_end_of(before)) from None
    if "\x00" in text:
        advice = "the file is damaged or no text file; export it again"
        _refuse_everywhere(text.split("\n"), "\x00", "a NUL character", advice, file)
    return text, True


def _from_one_byte(content: bytes, file: str, encoding: Encoding) -> tuple[str, bool]:
    _, name = _mark_of(content)
    if name and (name != "UTF-16" or b"\x00" in content):
        advice = f"the study declares {encoding}; state in its data how the file is encoded"
        raise refusal(file, f"the file is encoded in {name}", advice, 1, 1)
    if b"\x00" in content:
        refuse_nul_bytes(content, file)
    try:
        text = content.decode(_CODECS[encoding])
    except UnicodeDecodeError as error:
        before = content[: error.start].decode(_CODECS[encoding])
        found = f"byte 0x{content[error.start]:02X} (number {error.start + 1} of the file) is not {encoding}"
        raise refusal(file, found, "state in the study's data how it is encoded", *_end_of(before)) from None
    control = _UPPER_CONTROL.search(text)
    if control is not None:
        place = _end_of(text[: control.start()])
        found = f"byte 0x{ord(control[0]):02X} is a control character in {encoding}"
        windows = control[0].encode("latin-1").decode("cp1252", "replace")
        likely = f"; it would be {shown(windows)} in windows-1252" if windows != "\ufffd" else ""
        raise refusal(file, found, f"state in the study's data how it is encoded{likely}", *place)
    _refuse_hidden_utf8(content, text, encoding, file)
    return text, False


def _refuse_hidden_utf8(content: bytes, text: str, encoding: Encoding, file: str) -> None:
    """Refuse text beyond ASCII that is UTF-8 throughout, since hardly any other text is so by chance."""
    first = _BEYOND_ASCII.search(text)
    if first is None:
        return
    try:
        content.decode("utf-8")
    except UnicodeDecodeError:
        return
    meant = first[0].encode(_CODECS[encoding]).decode("utf-8")
    found = f"the file is UTF-8 throughout: {shown(meant)} would be {shown(first[0])} in {encoding}"
    advice = "take `encoding` out of the study's data, or state utf-8"
    raise refusal(file, found, advice, *_end_of(text[: first.start()]))


_DECODERS: dict[Encoding, Callable[[bytes, str, Encoding], tuple[str, bool]]] = {
    "utf-8": _from_utf8,
    "utf-16": _from_utf16,
    "windows-1252": _from_one_byte,
    "iso-8859-1": _from_one_byte,
    "iso-8859-15": _from_one_byte,
}


def _end_of(text: str) -> tuple[int, int]:
    """Line and column, from one, of the character that would follow `text`."""
    return text.count("\n") + 1, len(text) - text.rfind("\n")


def refuse_nul_bytes(body: bytes, file: str) -> None:
    """Raise DataError with every line of `body` that holds a NUL byte."""
    faults = FaultList(file)
    add_nul_bytes(faults, body, 0, nul_advice(body[::2].count(0), body[1::2].count(0), len(body)))
    raise_faults(file, faults)


def nul_advice(even: int, odd: int, size: int) -> str:
    """What to do about NUL bytes, of which so many stand at even and at odd places of a text of `size`."""
    if max(even, odd) * 3 > size:
        return f"it looks like UTF-16; {_WANTED}"
    return "the file is damaged or no text file; export it again"


def add_nul_bytes(faults: FaultList, body: bytes, above: int, advice: str) -> None:
    """Add a fault for every line of `body` that holds a NUL byte; `above` lines stand before it."""
    for number, line in enumerate(body.split(b"\n"), start=above + 1):
        at = line.find(0)
        if at >= 0:
            column = len(line[:at].decode("utf-8", "replace")) + 1
            faults.add(number, column, "a NUL byte", advice)


def not_utf8(body: bytes, error: UnicodeDecodeError, skipped: int, file: str) -> DataError:
    """The error of a `body` that is no UTF-8, with `skipped` bytes of the file before it."""
    start = error.start
    line, column = _end_of(body[:start].decode("utf-8"))
    byte = body[start : start + 1]
    found = f"byte 0x{byte[0]:02X} (number {skipped + start + 1} of the file) is not UTF-8"
    if error.reason == "unexpected end of data":
        found = f"the file ends within a character (byte number {skipped + start + 1})"
        return refusal(file, found, "it may have been cut short; export it again", line, column)
    windows = byte.decode("cp1252", "replace")
    likely = ""
    if windows != "\ufffd":
        likely = f"; it would be {shown(windows)} in Windows-1252, which `encoding: windows-1252` declares"
    return refusal(file, found, f"{_WANTED}{likely}", line, column)


def _refuse_everywhere(lines: list[str], character: str, found: str, advice: str, file: str) -> None:
    """Refuse `character` wherever it stands, once a line."""
    faults = FaultList(file)
    for number, line in enumerate(lines, start=1):
        at = line.find(character)
        if at >= 0:
            faults.add(number, at + 1, found, advice)
    raise_faults(file, faults)
