"""Words with a little emphasis: text in spans, so that nothing a user typed is ever taken for markup.

Patterns are written by this package alone. In a pattern `*x*` is a symbol (italic), `#x#` strong, `~x~`
quiet, `_x_` a subscript, `^x^` a superscript, and `{name}` a value put in as it is, never taken for
marks.
"""

import re
from dataclasses import dataclass
from typing import TypeAlias

from assayfolio.characters import is_settable
from assayfolio.report.notation import kept_together

_STYLES = {"*": "symbol", "#": "strong", "~": "quiet", "_": "sub", "^": "sup"}
_UNIT_WITH_SLASH = re.compile(r"((?<![^ ])[^ /]{1,20}/\d[^ /]{0,12}(?![^ ]))")
_LONG_WORD = re.compile(r"\w{8}")
_LONGEST_CELL = 240
_TOKEN = re.compile(r"([*#~_^])(.+?)\1|\{([a-z0-9_]+)\}")


@dataclass(frozen=True, slots=True)
class Span:
    """A stretch of text; `style` names how it is set, such as "symbol" or "sub symbol"."""

    text: str
    style: str = ""


Prose: TypeAlias = tuple[Span, ...]
Words: TypeAlias = "str | Prose"


def prose(pattern: str, **values: Words) -> Prose:
    """The spans that `pattern` describes, with `values` in their places.

    Raises KeyError where the pattern names a value that is not given.
    """
    spans: list[Span] = []
    position = 0
    for match in _TOKEN.finditer(pattern):
        if match.start() > position:
            spans.append(Span(pattern[position : match.start()]))
        if match[3]:
            spans.extend(_given(values[match[3]]))
        else:
            outer = _STYLES[match[1]]
            spans.extend(
                Span(span.text, f"{outer} {span.style}".strip()) for span in prose(match[2], **values)
            )
        position = match.end()
    if position < len(pattern):
        spans.append(Span(pattern[position:]))
    return tuple(spans)


def _given(words: Words) -> Prose:
    """A value put into a pattern; where it holds long words, it is marked so that none is ever hyphenated.

    A unit such as g/100 g stays on one line, together with the figure before it.
    """
    if not isinstance(words, str):
        return words
    style = "given" if _LONG_WORD.search(words) else ""
    spans: list[Span] = []
    for place, part in enumerate(_UNIT_WITH_SLASH.split(kept_together(words))):
        if part:
            spans.append(Span(part, f"{style} kept".strip() if place % 2 else style))
    return tuple(spans)


def as_prose(words: Words) -> Prose:
    """`words` as spans; a plain text is one unstyled span, in which no number parts from its unit."""
    if isinstance(words, str):
        return (Span(kept_together(words)),) if words else ()
    return words


def verbatim(text: str) -> Prose:
    """`text` character by character, such as a path that a reader may copy."""
    return (Span(text, "given"),)


def legible(text: str) -> str:
    """`text` as far as print can show it: what the typeface lacks or nobody sees as its number, long cut."""
    cut = text if len(text) <= _LONGEST_CELL else text[:_LONGEST_CELL]
    shown = "".join(c if is_settable(c) else f"<U+{ord(c):04X}>" for c in cut)
    return shown if cut is text else f"{shown} … ({len(text)} characters)"


def plain(words: Words) -> str:
    """The text of `words` alone."""
    return words if isinstance(words, str) else "".join(span.text for span in words)


def joined(parts: list[Prose], separator: str) -> Prose:
    """`parts` with `separator` between them."""
    spans: list[Span] = []
    for index, part in enumerate(parts):
        if index:
            spans.append(Span(separator))
        spans.extend(part)
    return tuple(spans)
