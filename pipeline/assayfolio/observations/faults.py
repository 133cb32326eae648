"""Faults of data files, gathered in one pass and told in the order of the files.

Faults that differ only in the entry that a cell holds are of one kind. Up to three of a kind are told one by
one; of more the first is told, with how many there are and where the next ones stand.
"""

import re
from collections.abc import Sequence
from dataclasses import dataclass, field, replace

from assayfolio.errors import DataError, Fault, Place
from assayfolio.study.faults import shown

MAX_LISTED = 50
MOST_ALIKE = 3
_LISTED_NAMES = 12
_LISTED_PLACES = 9

_ENTRY = re.compile(r"(?<= holds )`[^`]*`")


@dataclass(slots=True)
class _Kind:
    """Faults that are alike: how many there are, and the first of them."""

    first: list[Fault] = field(default_factory=list)
    count: int = 0

    def told(self, *, spreadsheet: bool) -> list[tuple[Fault, int]]:
        """The faults to be shown, and how many each of them stands for."""
        if self.count <= MOST_ALIKE:
            return [(fault, 1) for fault in self.first]
        first, *others = self.first
        places = ", ".join(_short_place(fault.place, spreadsheet=spreadsheet) for fault in others)
        end = " ..." if self.count > len(self.first) else ""
        at = f", at {places}{end}" if places else ""
        found = f"{first.found}; the same {self.count - 1:,} times more{at}"
        return [(replace(first, found=found), self.count)]


@dataclass(slots=True)
class FaultList:
    """The faults of one file, kind by kind: the first 50 kinds that were added are kept, others counted.

    In a spreadsheet a fault also names its cell by letter and row, as the program that shows it does.
    """

    file: str
    count: int = 0
    spreadsheet: bool = False
    kinds: dict[tuple[str, str], _Kind] = field(default_factory=dict)

    @property
    def full(self) -> bool:
        """Whether a fault of another kind would only be counted, so that its words need no care."""
        return len(self.kinds) >= MAX_LISTED

    def add(self, line: int | None, column: int | None, found: str, advice: str) -> None:
        """Add one fault; `line` is None where it concerns the file as a whole."""
        self.count += 1
        name = (_ENTRY.sub("", found), advice)
        kind = self.kinds.get(name)
        if kind is None:
            if self.full:
                return
            kind = self.kinds.setdefault(name, _Kind())
        kind.count += 1
        if len(kind.first) < _LISTED_PLACES:
            if self.spreadsheet and line is not None and column is not None:
                found = f"cell {cell_name(line, column)}: {found}"
            kind.first.append(Fault(Place(self.file, line, column), found, advice))

    def told(self) -> list[tuple[Fault, int]]:
        """The faults to be shown, and how many each of them stands for."""
        return [told for kind in self.kinds.values() for told in kind.told(spreadsheet=self.spreadsheet)]

    def beside(self) -> "FaultList":
        """An empty list for other faults of the same file."""
        return FaultList(self.file, spreadsheet=self.spreadsheet)


@dataclass(slots=True)
class Faults:
    """The faults of all files of a study, in the order of the files.

    `lost_values` says that a stretch of some file is no row though values may stand in it, so that numbers of
    rows cannot be compared with the plan; `stopped` that reading was given up, so that there may be more.
    """

    of: list[FaultList]
    lost_values: bool = False
    stopped: bool = False

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
        files = [[own, *(lists[at] for lists in beside)] for at, own in enumerate(self.of)]
        raise_in_files(files, " or more" if self.stopped else "")


def raise_faults(file: str, *lists: FaultList) -> None:
    """Raise DataError with the faults of all `lists`, all of one `file`, if there is any.

    They come in the order of the file, faults of the file as a whole last. Each list has to be in the order
    of the file, which makes the 50 kinds that are kept the first 50.
    """
    raise_in_files([[FaultList(file), *lists]])


def raise_in_files(files: Sequence[Sequence[FaultList]], more: str = "") -> None:
    """Raise DataError with the faults of all `files`, file by file, if there is any.

    `more` are words behind their number.
    """
    faulty = [lists for lists in files if any(faults.count for faults in lists)]
    if not faulty:
        return
    count = sum(faults.count for lists in faulty for faults in lists)
    told = [
        fault
        for lists in faulty
        for fault in sorted((told for faults in lists for told in faults.told()), key=_position)
    ][:MAX_LISTED]
    names = " and ".join(lists[0].file for lists in faulty[:2])
    names = f"{names} and {len(faulty) - 2} more" if len(faulty) > 2 else names
    noun = "fault" if count == 1 else "faults"
    hidden = count - sum(number for _, number in told)
    raise DataError(
        f"{names} cannot be used: {count} {noun}{more}", tuple(fault for fault, _ in told), hidden
    )


def refusal(
    file: str, found: str, advice: str, line: int | None = None, column: int | None = None
) -> DataError:
    """The error of a file that has one fault and cannot be read further."""
    return DataError(f"{file} cannot be used: 1 fault", (Fault(Place(file, line, column), found, advice),))


def _position(told: tuple[Fault, int]) -> tuple[bool, int, int]:
    line, column = told[0].place.line, told[0].place.column
    return (line is None, line or 0, column or 0)


def _short_place(place: Place, *, spreadsheet: bool) -> str:
    """A place without its file: a cell's name, or line and column."""
    if place.line is None or place.column is None:
        return "the file as a whole" if place.line is None else str(place.line)
    return cell_name(place.line, place.column) if spreadsheet else f"{place.line}:{place.column}"


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
