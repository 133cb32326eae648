"""The error family: one root, divided by who has to act.

Every error carries the words for the person at the bench. The command line turns an error into those
words and into its exit code; nothing below the command line prints or exits.
"""

from dataclasses import dataclass
from enum import IntEnum


class ExitCode(IntEnum):
    """What the process tells its caller."""

    DONE = 0
    FINDING = 1
    INPUT = 2
    MACHINE = 3
    BUSY = 4
    NOT_CHECKABLE = 5


@dataclass(frozen=True, slots=True)
class Place:
    """Where something stands: a file as the user knows it, and line and column counted from one."""

    file: str
    line: int | None = None
    column: int | None = None

    def __str__(self) -> str:
        """`file:line:column`, as far as known."""
        parts = [self.file]
        if self.line is not None:
            parts.append(str(self.line))
            if self.column is not None:
                parts.append(str(self.column))
        return ":".join(parts)


@dataclass(frozen=True, slots=True)
class Fault:
    """One thing that is wrong with an input, where it is, and what to do about it."""

    place: Place
    found: str
    advice: str = ""

    def __str__(self) -> str:
        """One line: place, what was found, what to do."""
        text = f"{self.place}: {self.found}"
        return f"{text} - {self.advice}" if self.advice else text


class AssayfolioError(Exception):
    """Root of the family. `exit_code` is what the command line answers with."""

    exit_code: ExitCode = ExitCode.MACHINE


class InputError(AssayfolioError):
    """The study, the data or the command line is wrong; nothing was lost or altered.

    `faults` holds every fault that was found in one pass, in the order of the file. `hidden` counts those
    beyond the limit of a listing.
    """

    exit_code = ExitCode.INPUT

    def __init__(self, headline: str, faults: tuple[Fault, ...] = (), hidden: int = 0) -> None:
        super().__init__(headline)
        self.headline = headline
        self.faults = faults
        self.hidden = hidden

    def __str__(self) -> str:
        """The headline, then one line a fault, then how many more there are."""
        lines = [self.headline, *(f"  {fault}" for fault in self.faults)]
        if self.hidden:
            lines.append(f"  and {self.hidden} more")
        return "\n".join(lines)


class StudyError(InputError):
    """The study definition or the laboratory's settings cannot be used."""


class DataError(InputError):
    """The raw data cannot be used."""


class MachineError(AssayfolioError):
    """The machine failed us: disk, permission, font, clock, a library that gives wrong results."""


class RenderingError(MachineError):
    """The report could not be set exactly as written, so none is issued."""


class ChangedError(AssayfolioError):
    """Something that was sealed or archived is not as it was."""

    exit_code = ExitCode.FINDING


class BusyError(AssayfolioError):
    """Another writer holds the workspace."""

    exit_code = ExitCode.BUSY
