"""Whether a text can stand as a label in the report: a column name, a level, a cell carried along."""

import unicodedata
from collections.abc import Set as AbstractSet

from assayfolio.characters import describe, is_settable

MAX_LABEL = 100
LAID_OUT = frozenset("\t\n\r")


def label_fault(text: str) -> tuple[str, str] | None:
    """What keeps `text` from being a label, and what to do about it; None where nothing does."""
    bad = next((character for character in text if not is_settable(character)), None)
    if bad is not None:
        return unprintable(bad)
    if len(text) > MAX_LABEL:
        return f"{len(text):,} characters, more than {MAX_LABEL}", "shorten it"
    return None


def unprintable(character: str) -> tuple[str, str]:
    """The words for a character that the report's fonts do not have."""
    return f"{describe(character)}, which the report cannot print", "spell it without that character"


def unsettable(lines: list[str]) -> AbstractSet[str]:
    """The characters of a text that the report cannot set; line ends and tabs are layout, not characters."""
    alphabet = set().union(*lines) - LAID_OUT
    return frozenset(character for character in alphabet if not is_settable(character))


def as_seen(text: str) -> str:
    """`text` in the form in which two labels that look alike are equal: composed, blanks made one."""
    return " ".join(unicodedata.normalize("NFC", text).split())
