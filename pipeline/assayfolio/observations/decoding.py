"""From the bytes of a data file to the lines of its text."""

from assayfolio.errors import DataError
from assayfolio.observations.faults import FaultList, raise_faults, refusal
from assayfolio.study.faults import shown

MAX_BYTES = 64_000_000
MAX_LINES = 1_000_000

_UTF8_MARK = b"\xef\xbb\xbf"
_OTHER_KINDS = (
    (b"PK\x03\x04", "a spreadsheet or another zip archive"),
    (b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1", "a spreadsheet in the old binary Excel format"),
    (b"\x1f\x8b", "a file compressed with gzip"),
    (b"%PDF", "a PDF"),
)
_OTHER_MARKS = (
    (b"\xff\xfe\x00\x00", "UTF-32"),
    (b"\x00\x00\xfe\xff", "UTF-32"),
    (b"\xff\xfe", "UTF-16"),
    (b"\xfe\xff", "UTF-16"),
)
_WANTED = "save it as text with separators (CSV) in UTF-8"


def decoded_lines(content: bytes, file: str) -> tuple[list[str], bool]:
    """The lines of `content` without their line ends, and whether it began with a byte order mark.

    Lines end in LF or CRLF, also mixed; blank lines at the end of the file are left out.
    Raises DataError for a file of another kind, another encoding than UTF-8, a NUL byte, a carriage return
    that no line feed follows, and for an empty or an enormous file.
    """
    _refuse_other_kinds(content, file)
    has_mark = content.startswith(_UTF8_MARK)
    body = content[len(_UTF8_MARK) :] if has_mark else content
    if b"\x00" in body:
        _refuse_nul_bytes(body, file)
    try:
        text = body.decode("utf-8")
    except UnicodeDecodeError as error:
        raise _wrong_encoding(body, error, len(content) - len(body), file) from None
    if not text or text.isspace():
        raise refusal(file, "the file is empty", "the column names and the values are expected in it")
    lines = text.replace("\r\n", "\n").split("\n")
    if "\r" in text:
        _refuse_carriage_returns(lines, file)
    while not lines[-1] or lines[-1].isspace():
        lines.pop()
    return lines, has_mark


def _refuse_other_kinds(content: bytes, file: str) -> None:
    for magic, kind in _OTHER_KINDS:
        if content.startswith(magic):
            raise refusal(file, f"this is {kind}, not a text file", _WANTED)
    for mark, encoding in _OTHER_MARKS:
        if content.startswith(mark):
            raise refusal(file, f"the file is encoded in {encoding}", _WANTED, 1, 1)
    if len(content) > MAX_BYTES:
        found = f"the file has {len(content):,} bytes, more than {MAX_BYTES:,}"
        raise refusal(file, found, "divide the study, or leave out columns that it does not need")
    line_count = content.count(b"\n")
    if line_count > MAX_LINES:
        found = f"the file has {line_count:,} lines, more than {MAX_LINES:,}"
        raise refusal(file, found, "divide the study")


def _refuse_nul_bytes(body: bytes, file: str) -> None:
    advice = "the file is damaged or no text file; export it again"
    if body[1::2].count(0) * 3 > len(body) or body[::2].count(0) * 3 > len(body):
        advice = f"it looks like UTF-16; {_WANTED}"
    faults = FaultList(file)
    for number, line in enumerate(body.split(b"\n"), start=1):
        at = line.find(0)
        if at >= 0:
            column = len(line[:at].decode("utf-8", "replace")) + 1
            faults.add(number, column, "a NUL byte", advice)
    raise_faults(file, faults)


def _wrong_encoding(body: bytes, error: UnicodeDecodeError, skipped: int, file: str) -> DataError:
    start = error.start
    line_start = body.rfind(b"\n", 0, start) + 1
    line = body.count(b"\n", 0, start) + 1
    column = len(body[line_start:start].decode("utf-8")) + 1
    byte = body[start : start + 1]
    found = f"byte 0x{byte[0]:02X} (number {skipped + start + 1} of the file) is not UTF-8"
    if error.reason == "unexpected end of data":
        found = f"the file ends within a character (byte number {skipped + start + 1})"
        return refusal(file, found, "it may have been cut short; export it again", line, column)
    windows = byte.decode("cp1252", "replace")
    likely = f"; it would be {shown(windows)} in Windows-1252" if windows != "\ufffd" else ""
    return refusal(file, found, f"{_WANTED}{likely}", line, column)


def _refuse_carriage_returns(lines: list[str], file: str) -> None:
    faults = FaultList(file)
    for number, line in enumerate(lines, start=1):
        at = line.find("\r")
        if at >= 0:
            found = "a carriage return that no line feed follows"
            faults.add(number, at + 1, found, "let every line end in LF or CRLF")
    raise_faults(file, faults)
