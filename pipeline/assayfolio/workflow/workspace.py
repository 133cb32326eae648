"""A laboratory's workspace: where it is, and what may be read in it."""

import os
import stat
from dataclasses import dataclass
from pathlib import Path

from assayfolio.errors import Fault, InputError, MachineError, Place

SETTINGS = "configs/lab.yaml"
PEOPLE = "configs/people.yaml"
MAX_FILE_BYTES = 512 * 1024 * 1024


@dataclass(frozen=True, slots=True)
class Workspace:
    """The folder that holds a laboratory's `configs/` and `runs/`."""

    root: Path

    @property
    def runs(self) -> Path:
        """Where folios and the audit trail are kept."""
        return self.root / "runs"

    @property
    def settings(self) -> Path:
        """The laboratory's settings."""
        return self.root / SETTINGS

    @property
    def people(self) -> Path:
        """Who works here; there need not be such a file."""
        return self.root / PEOPLE

    def name_of(self, path: Path) -> str:
        """`path` as the records name it: relative to the workspace, with forward slashes."""
        return shown_path(path.relative_to(self.root))


def shown_path(path: Path) -> str:
    """`path` as text that any record can hold; bytes that are not UTF-8 appear escaped."""
    return os.fsencode(path.as_posix()).decode("utf-8", "backslashreplace")


def find_workspace(named: Path | None, start: Path) -> Workspace:
    """The workspace that was `named`, or the nearest folder upward of `start` with `configs/lab.yaml`.

    Raises InputError where there is none.
    """
    if named is not None:
        root = named.resolve()
        if not (root / SETTINGS).is_file():
            raise InputError(
                f"{named} is not a workspace: it has no {SETTINGS}. "
                f"`assayfolio workspace {named}` founds a new one."
            )
        return Workspace(root)
    here = start.resolve()
    for folder in (here, *here.parents):
        if (folder / SETTINGS).is_file():
            return Workspace(folder)
    raise InputError(
        f"No workspace: neither {start} nor a folder above it has {SETTINGS}. "
        "Name one with --workspace, or found one with `assayfolio workspace DIR`."
    )


def read_input(workspace: Workspace, path: Path, what: str) -> bytes:
    """The bytes of an input file, read once.

    Raises InputError as `real_input` does; MachineError where the machine refuses to read it.
    """
    real = real_input(workspace, path, what, MAX_FILE_BYTES)
    try:
        return real.read_bytes()
    except OSError as error:
        raise MachineError(f"{shown_path(path)}: the {what} cannot be read: {error.strerror}.") from error


def real_input(workspace: Workspace, path: Path, what: str, most_bytes: int) -> Path:
    """Where an input file lies, free of symbolic links.

    Raises InputError where the file is missing, not a regular file, larger than `most_bytes`, or outside the
    workspace (also by way of a symbolic link).
    """
    shown = shown_path(path)
    try:
        real = path.resolve(strict=True)
        inside = real.is_relative_to(workspace.root)
        kind = real.stat()
    except (OSError, RuntimeError) as error:
        reason = "there is no such file" if isinstance(error, FileNotFoundError) else str(error)
        raise InputError(f"The {what} cannot be read.", (Fault(Place(shown), reason),)) from error
    fault = None
    if not inside:
        advice = f"the {what} must lie inside the workspace {workspace.root}"
        fault = Fault(Place(shown), f"leads outside the workspace, to {shown_path(real)}", advice)
    elif not stat.S_ISREG(kind.st_mode):
        fault = Fault(Place(shown), "is not a regular file")
    elif kind.st_size > most_bytes:
        fault = Fault(Place(shown), f"is larger than {most_bytes // 2**20} MB")
    if fault is not None:
        raise InputError(f"The {what} cannot be read.", (fault,))
    return real
