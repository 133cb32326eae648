"""What one signature states: who signs, in which role, what that means, when, and for which sealed folder."""

import re
from dataclasses import dataclass
from datetime import datetime

from assayfolio.characters import describe, is_settable
from assayfolio.evidence.signing.refusals import SigningRefusedError

_SEAL = re.compile(r"[0-9a-f]{64}")
_FIELD = re.compile(r"[a-z][a-z0-9-]{0,39}")


@dataclass(frozen=True, slots=True)
class Statement:
    """One signature's statement. `time` has an offset and whole seconds; `seal` is the folder's (hex).

    `field` is the signature field's name in the PDF: the role, with a number where the role signs again.
    Raises SigningRefusedError for what cannot be printed, and for a time without an offset.
    """

    field: str
    role: str
    person: str
    meaning: str
    time: datetime
    seal: str

    def __post_init__(self) -> None:
        if not _FIELD.fullmatch(self.field):
            raise SigningRefusedError(f"{self.field!r} is no name of a signature field")
        if self.time.utcoffset() is None or self.time.microsecond:
            raise SigningRefusedError("the time of signing needs an offset from UTC and whole seconds")
        if not _SEAL.fullmatch(self.seal):
            raise SigningRefusedError("the seal is 64 lower-case hexadecimal digits")
        for what, text in (("role", self.role), ("name", self.person), ("meaning", self.meaning)):
            _refuse_unprintable(what, text)
        if ":" in self.role:
            raise SigningRefusedError("the role holds a colon, which separates it from the meaning")
        if not re.fullmatch(re.escape(self.role) + r"(-[0-9]+)?", self.field):
            raise SigningRefusedError(f"the field {self.field} is not one for the role {self.role}")


def _refuse_unprintable(what: str, text: str) -> None:
    if not text or text != " ".join(text.split(" ")).strip() or "  " in text:
        raise SigningRefusedError(f"the {what} is empty or has blanks to spare: {text!r}")
    for character in text:
        if not is_settable(character):
            raise SigningRefusedError(f"the {what} holds {describe(character)}, which cannot be printed")


def reason_text(statement: Statement) -> str:
    """What stands as the reason in the signature: role and meaning."""
    return f"{statement.role}: {statement.meaning}"


def printed_time(time: datetime) -> str:
    """`time` as the block prints it: date, time of day and offset from UTC."""
    return f"{time:%Y-%m-%d %H:%M:%S} {offset_text(time)}"


def offset_text(time: datetime) -> str:
    """The offset of `time` from UTC as +hh:mm; raises SigningRefusedError for one with seconds."""
    offset = time.utcoffset()
    if offset is None or offset.total_seconds() % 60:
        raise SigningRefusedError("the offset from UTC has to be in whole minutes")
    minutes = int(offset.total_seconds()) // 60
    sign = "-" if minutes < 0 else "+"
    return f"{sign}{abs(minutes) // 60:02d}:{abs(minutes) % 60:02d}"


def rfc3339(time: datetime) -> str:
    """`time` by RFC 3339 with its offset, to the second."""
    return f"{time:%Y-%m-%dT%H:%M:%S}{offset_text(time)}"


def block_paragraphs(statement: Statement) -> tuple[str, str, str]:
    """The three paragraphs of the printed block: name; date and time; role and meaning."""
    meaning = f"{statement.role.capitalize()}: {statement.meaning}"
    return statement.person, printed_time(statement.time), meaning
