"""Whether a text can stand as a label in the report: a column name or a level."""

import unicodedata

from assayfolio.characters import describe, is_settable


def first_unsettable(text: str) -> str | None:
    """The first character of `text` that the report's fonts cannot set, line ends included, or None."""
    return next((character for character in text if not is_settable(character)), None)


def unprintable(character: str) -> tuple[str, str]:
    """The words for a character that the report's fonts do not have."""
    return f"{describe(character)}, which the report cannot print", "spell it without that character"


def as_seen(text: str) -> str:
    """`text` in the form in which two labels that look alike are equal: composed, blanks made one."""
    return " ".join(unicodedata.normalize("NFC", text).split())
