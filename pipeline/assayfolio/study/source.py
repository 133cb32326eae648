"""Bytes of a settings file to text: encoding, size and characters, before anything is read from it."""

import re
from bisect import bisect_right
from functools import cached_property
from itertools import islice

from assayfolio.characters import describe
from assayfolio.errors import Place
from assayfolio.study.faults import LISTED_FAULTS, Faults

MAX_BYTES = 1_000_000
_BYTE_ORDER_MARK = b"\xef\xbb\xbf"

# Control characters but tab and line breaks; the line and paragraph separators, which some readers take for
# line breaks and some do not; marks and overrides of writing direction, which make a text look like another;
# a byte order mark inside the text; code points that are no characters.
_FORBIDDEN = re.compile(
    "[\x00-\x08\x0b\x0c\x0e-\x1f\x7f-\x9f\u2028\u2029\u061c\u200e\u200f\u202a-\u202e\u2066-\u2069\ufeff"
    "\ufdd0-\ufdef\ufffe\uffff]"
)
_TAB_INDENTATION = re.compile(r"^ *+\t", re.MULTILINE)
_LINE_BREAK = re.compile(r"\r\n|\r|\n")
_DIRECTIVE = re.compile(r"(?:[ \t]*+(?:#[^\r\n]*+)?(?:\r\n|\r|\n))*+%")


def decode(content: bytes, faults: Faults) -> str | None:
    """`content` as text without a byte order mark, or None where it cannot be read; `faults` says why.

    Refused: more than 1 MB, anything that is not UTF-8, control characters, characters that change the
    writing direction, tabs as indentation, directives.
    """
    if len(content) > MAX_BYTES:
        size = f"the file has {len(content)} bytes"
        faults.add(Place(faults.file), size, f"at most {MAX_BYTES} are read; is it the right file?")
        return None
    content = content.removeprefix(_BYTE_ORDER_MARK)
    try:
        text = content.decode("utf-8")
    except UnicodeDecodeError as error:
        before = content[: error.start].decode("utf-8")
        found = f"the byte 0x{content[error.start]:02X} is not UTF-8 text"
        faults.add(_Lines(before, faults.file).place(len(before)), found, "save the file as UTF-8")
        return None
    _refuse_characters(text, faults)
    return None if len(faults) else text


def _refuse_characters(text: str, faults: Faults) -> None:
    lines = _Lines(text, faults.file)
    invisible = _FORBIDDEN.finditer(text)
    for match in islice(invisible, LISTED_FAULTS):
        found = f"the character {describe(match[0])} is not allowed"
        faults.add(lines.place(match.start()), found, "delete it; it cannot be seen")
    tabs = _TAB_INDENTATION.finditer(text)
    for match in islice(tabs, LISTED_FAULTS):
        faults.add(lines.place(match.end() - 1), "the line begins with a tab", "indent with blanks")
    faults.add_unlisted(sum(1 for _ in invisible) + sum(1 for _ in tabs))
    directive = _DIRECTIVE.match(text)
    if directive:
        place = lines.place(directive.end() - 1)
        faults.add(place, "a YAML directive is not allowed", "delete the line that begins with %")


class _Lines:
    """Line and column of each index of a text."""

    def __init__(self, text: str, file: str) -> None:
        self._text = text
        self._file = file

    @cached_property
    def _starts(self) -> list[int]:
        return [0, *(match.end() for match in _LINE_BREAK.finditer(self._text))]

    def place(self, index: int) -> Place:
        line = bisect_right(self._starts, index)
        return Place(self._file, line, index - self._starts[line - 1] + 1)
