"""Plain words for what a YAML parser objects to.

Two parsers word the same objections differently; each row below names fragments of both.
"""

from dataclasses import dataclass
from typing import Literal

import yaml


@dataclass(frozen=True, slots=True)
class _Words:
    """What to say where a parser's objection holds one of `fragments`, and which of its marks to show."""

    fragments: tuple[str, ...]
    found: str
    advice: str
    mark: Literal["problem", "context"] = "problem"


@dataclass(frozen=True, slots=True)
class SyntaxFault:
    """Where (counted from one) and what, in plain words."""

    line: int
    column: int
    found: str
    advice: str


_INDENTATION = "check the indentation, quotation marks and brackets of this line and the one above"

_ESCAPE = _Words(
    ("escape character", "hexdecimal number", "hexadecimal numbers", "escape code", "escape sequence"),
    "the backslash in this text begins no known escape",
    "use single quotation marks, or write the backslash twice",
)
_ANCHOR = _Words(
    ("alphabetic or numeric",),
    "an anchor (`&...`) or alias (`*...`) is not allowed",
    "write the value out; put a text that begins with `&` or `*` in quotation marks",
    "context",
)
_WORDS = (
    _Words(("nesting depth",), "values are nested too deep", "write it flatter"),
    _Words(
        ("unexpected end of stream", "unexpected document"),
        "the quotation mark that opens here is never closed",
        "put the same mark behind the text",
        "context",
    ),
    _Words(
        ("',' or ']'",),
        "the list that opens here with `[` is not closed, or lacks a comma",
        "separate the items with commas and end with `]`",
        "context",
    ),
    _Words(
        ("',' or '}'",),
        "the mapping that opens here with `{` is not closed, or lacks a comma",
        "separate the entries with commas and end with `}`",
        "context",
    ),
    _Words(
        ("could not find expected ':'",),
        "this is not of the form `key: value`",
        "put a colon and a blank behind the key, or indent the line if it continues the one above",
        "context",
    ),
    _Words(
        ("mapping values are not allowed",),
        "a colon stands where no value can begin",
        "put a text that holds a colon in quotation marks; check the indentation, and that every key above "
        "has a blank behind its colon",
    ),
    _Words(
        ("sequence entries are not allowed",),
        "a list begins behind a key on the same line",
        "begin the list on a line of its own, or write it as [a, b]",
    ),
    _Words(
        ("mapping keys are not allowed",),
        "a question mark and a blank cannot begin a value",
        "put the text in quotation marks",
    ),
    _Words(
        ("cannot start any token",),
        "a value cannot begin with this character",
        "put the text in quotation marks",
    ),
    _ESCAPE,
    _Words(
        ("tag handle", "tag URI", "expected URI", "expected the '!'", "expected '!'", "expected '>'"),
        "a tag (`!...`) is not allowed",
        "delete it; put a text that begins with `!` in quotation marks",
        "context",
    ),
    _Words(("tab character",), "a tab stands where blanks belong", "use blanks"),
    _Words(
        ("indentation indicator", "comment or line break", "comment or a line break"),
        "nothing may stand behind `|` or `>` on its line",
        "begin the text on the next line",
    ),
    _Words(("expected node content", "the node content"), "a value is missing before this", _INDENTATION),
    _Words(
        ("did not find expected '-'", "did not find expected key", "expected <block end>"),
        "this does not fit the lines above it",
        _INDENTATION,
    ),
)
_OTHER = _Words((), "this is not YAML", _INDENTATION)


def in_plain_words(error: Exception) -> SyntaxFault:
    """The objection of a parser as place and plain words; the start of the file where it names no place."""
    if not isinstance(error, yaml.MarkedYAMLError):
        # The parser written in Python lets the number of an impossible character through to `chr`.
        words = _ESCAPE if isinstance(error, ValueError | OverflowError) else _OTHER
        return SyntaxFault(1, 1, words.found, words.advice)
    words = _words_for(f"{error.context or ''}; {error.problem or ''}")
    marks = (error.context_mark, error.problem_mark)
    first, second = marks if words.mark == "context" else marks[::-1]
    mark = first or second
    line, column = (mark.line + 1, mark.column + 1) if mark else (1, 1)
    return SyntaxFault(line, column, words.found, words.advice)


def _words_for(objection: str) -> _Words:
    if "scanning an alias" in objection or "scanning an anchor" in objection:
        return _ANCHOR
    for words in _WORDS:
        if any(fragment in objection for fragment in words.fragments):
            return words
    return _OTHER
