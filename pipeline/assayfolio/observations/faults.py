"""Faults of data files, gathered in one pass and told in the order of the files."""

from collections.abc import Sequence
from dataclasses import dataclass, field

from assayfolio.errors import DataError, Fault, Place
from assayfolio.study.faults import shown

MAX_LISTED = 50
_LISTED_NAMES = 12


@dataclass(slots=True)
class FaultList:
    """The faults of one file: the first 50 that were added are kept, the others counted.

    In a spreadsheet a fault also names its cell by letter and row, as the program that shows it does.
    """

    file: str
    kept: list[Fault] = field(default_factory=list)
    count: int = 0
    spreadsheet: bool = False

    @property
    def full(self) -> bool:
        """Whether a further fault would only be counted, so that its words need no care."""
        return self.count >= MAX_LISTED

    def add(self, line: int | None, column: int | None, found: str, advice: str) -> None:
        """Add one fault; `line` is None where it concerns the file as a whole."""
        self.count += 1
        if len(self.kept) < MAX_LISTED:
            if self.spreadsheet and line is not None and column is not None:
                found = f"cell {cell_name(line, column)}: {found}"
            self.kept.append(Fault(Place(self.file, line, column), found, advice))

    def beside(self) -> "FaultList":
        """An empty list for other faults of the same file."""
        return FaultList(self.file, spreadsheet=self.spreadsheet)


@dataclass(slots=True)
class Faults:
    """The faults of all files of a study, in the order of the files.

    `lost_values` says that a stretch of some file is no row though values may stand in it, so that numbers of
    rows cannot be compared with the plan.
    """

    of: list[FaultList]
    lost_values: bool = False

    @staticmethod
    def in_files(names: Sequence[str]) -> "Faults":
        """No faults yet in any of the files."""
        return Faults([FaultList(name) for name in names])

    @property
    def count(self) -> int:
        """How many there are in all files."""
        return sum(faults.count for faults in self.of)

    def raise_any(self, *beside: Sequence[FaultList]) -> None:
        """Raise DataError with all faults, if there is any; each of `beside` has a list a file as well."""
        raise_in_files([[own, *(lists[at] for lists in beside)] for at, own in enumerate(self.of)])


def raise_faults(file: str, *lists: FaultList) -> None:
    """Raise DataError with the faults of all `lists`, all of one `file`, if there is any.

    They come in the order of the file, faults of the file as a whole last. Each list has to be in the order
    of the file, which makes the 50 that are shown the first 50.
    """
    raise_in_files([[FaultList(file), *lists]])


def raise_in_files(files: Sequence[Sequence[FaultList]]) -> None:
    """Raise DataError with the faults of all `files`, file by file, if there is any."""
    faulty = [lists for lists in files if any(faults.count for faults in lists)]
    if not faulty:
        return
    count = sum(faults.count for lists in faulty for faults in lists)
    kept = [
        fault
        for lists in faulty
        for fault in sorted((fault for faults in lists for fault in faults.kept), key=_position)
    ][:MAX_LISTED]
    names = " and ".join(lists[0].file for lists in faulty[:2])
    names = f"{names} and {len(faulty) - 2} more" if len(faulty) > 2 else names
    noun = "fault" if count == 1 else "faults"
    raise DataError(f"{names} cannot be used: {count} {noun}", tuple(kept), count - len(kept))


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


def column_letters(column: int) -> str:
    """The letters of a spreadsheet's column, counted from one (28 is AB)."""
    letters = ""
    while column > 0:
        column, rest = divmod(column - 1, 26)
        letters = chr(ord("A") + rest) + letters
    return letters


def cell_name(line: int, column: int) -> str:
    """A cell as a spreadsheet program names it: C4."""
    return f"{column_letters(column)}{line}"
