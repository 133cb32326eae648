"""Faults of a data file, gathered in one pass and told in the order of the file."""

from collections.abc import Sequence
from dataclasses import dataclass, field

from assayfolio.errors import DataError, Fault, Place
from assayfolio.study.faults import shown

MAX_LISTED = 50
_LISTED_NAMES = 12


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


def listed(names: Sequence[str]) -> str:
    """`names` for a message: the first dozen, then how many more there are."""
    words = ", ".join(shown(name) for name in names[:_LISTED_NAMES])
    hidden = len(names) - _LISTED_NAMES
    return f"{words} and {hidden} more" if hidden > 0 else words
