"""Faults of a data file gathered in one pass, and the ways to show what stands in it."""

import unicodedata
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field

from assayfolio.errors import DataError, Fault, Place

MAX_LISTED = 50
_SHOWN_CHARACTERS = 40
_SHOWN_NAMES = 12
_COMPARED_NAMES = 200
_COMPARED_CHARACTERS = 100


@dataclass(slots=True)
class FaultList:
    """The faults of one file: the first 50 that were added are kept, the others counted."""

    file: str
    kept: list[Fault] = field(default_factory=list)
    count: int = 0

    @property
    def full(self) -> bool:
        """Whether a further fault would only be counted, so that its words need no care."""
        return self.count >= MAX_LISTED

    def add(self, line: int | None, column: int | None, found: str, advice: str) -> None:
        """Add one fault; `line` is None where it concerns the file as a whole."""
        self.count += 1
        if len(self.kept) < MAX_LISTED:
            self.kept.append(Fault(Place(self.file, line, column), found, advice))


def raise_faults(file: str, *lists: FaultList) -> None:
    """Raise DataError with the faults of all `lists` in the order of the file, if there is any.

    Faults of the file as a whole come last. Each list has to be in the order of the file, which makes the
    50 that are shown the first 50.
    """
    count = sum(faults.count for faults in lists)
    if not count:
        return
    kept = sorted((fault for faults in lists for fault in faults.kept), key=_position)[:MAX_LISTED]
    noun = "fault" if count == 1 else "faults"
    raise DataError(f"{file} cannot be used: {count} {noun}", tuple(kept), count - len(kept))


def refusal(
    file: str, found: str, advice: str, line: int | None = None, column: int | None = None
) -> DataError:
    """The error of a file that has one fault and cannot be read further."""
    return DataError(f"{file} cannot be used: 1 fault", (Fault(Place(file, line, column), found, advice),))


def _position(fault: Fault) -> tuple[bool, int, int]:
    line, column = fault.place.line, fault.place.column
    return (line is None, line or 0, column or 0)


def quoted(text: str) -> str:
    """`text` in quotation marks for a message: cut when long, and what cannot be seen spelt as U+XXXX."""
    shown = text[:_SHOWN_CHARACTERS]
    safe = "".join(char if char.isprintable() else f"<U+{ord(char):04X}>" for char in shown)
    return f'"{safe}..."' if len(text) > _SHOWN_CHARACTERS else f'"{safe}"'


def listed(names: Sequence[str]) -> str:
    """`names` for a message: the first dozen, then how many more there are."""
    shown = ", ".join(quoted(name) for name in names[:_SHOWN_NAMES])
    hidden = len(names) - _SHOWN_NAMES
    return f"{shown} and {hidden} more" if hidden > 0 else shown


def nearest(name: str, known: Iterable[str]) -> str | None:
    """The one of `known` that `name` may be meant to be, or None if none is near."""
    from difflib import get_close_matches  # only a faulty file needs it

    candidates = {
        _plain(one): one for one in list(known)[:_COMPARED_NAMES] if len(one) <= _COMPARED_CHARACTERS
    }
    if len(name) > _COMPARED_CHARACTERS:
        return None
    matches = get_close_matches(_plain(name), list(candidates), n=1, cutoff=0.6)
    return candidates[matches[0]] if matches else None


def _plain(name: str) -> str:
    return " ".join(unicodedata.normalize("NFKC", name).casefold().split())
