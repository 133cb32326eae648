"""What really lies in a folio's folder, for verification: every file with size and digest, everything odd.

Nothing is followed: a symbolic link is named, not opened. What cannot be read is kept with the reason, so
that a check can say what it could not look at.
"""

import hashlib
import os
import stat
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path

from assayfolio.evidence.files import plain_reason

_PIECE = 1 << 20


def shown(name: str) -> str:
    """A file name fit for print: bytes that are no UTF-8 and unprintable characters as escapes."""
    text = name.encode("utf-8", "backslashreplace").decode("utf-8")
    return text if text.isprintable() else "".join(c if c.isprintable() else ascii(c)[1:-1] for c in text)


@dataclass(frozen=True, slots=True)
class FoundFile:
    """A regular file: its size, and its SHA-256 or why it could not be read."""

    size: int
    sha256: str | None
    trouble: str = ""


@dataclass(frozen=True, slots=True)
class Inventory:
    """A folder's files by path (parts joined by "/"), what is odd in it, and what could not be listed."""

    files: Mapping[str, FoundFile]
    oddities: Mapping[str, str]
    unlisted: Mapping[str, str]

    @property
    def unreadable(self) -> tuple[str, ...]:
        """Each file or folder that could not be read, with the reason."""
        files = [f"{shown(path)}: {file.trouble}" for path, file in self.files.items() if file.trouble]
        return (*files, *(f"{shown(path) or '.'}: {why}" for path, why in self.unlisted.items()))


@dataclass(slots=True)
class _Findings:
    files: dict[str, FoundFile] = field(default_factory=dict)
    oddities: dict[str, str] = field(default_factory=dict)
    unlisted: dict[str, str] = field(default_factory=dict)


def take_inventory(folder: Path) -> Inventory:
    """Look at everything in `folder`, sorted by path. Never raises for what it finds there."""
    found = _Findings()
    _look(folder, "", found)
    return Inventory(found.files, found.oddities, found.unlisted)


def _look(folder: Path, prefix: str, found: _Findings) -> None:
    try:
        with os.scandir(folder) as listing:
            entries = sorted(listing, key=lambda entry: entry.name)
    except OSError as error:
        found.unlisted[prefix.removesuffix("/")] = plain_reason(error)
        return
    if not entries and prefix:
        found.oddities[prefix.removesuffix("/")] = "empty folder"
    for entry in entries:
        path = f"{prefix}{entry.name}"
        try:
            status = entry.stat(follow_symlinks=False)
        except OSError as error:
            found.unlisted[path] = plain_reason(error)
            continue
        if stat.S_ISDIR(status.st_mode):
            _look(folder / entry.name, f"{path}/", found)
        elif stat.S_ISREG(status.st_mode):
            found.files[path] = look_at_file(folder / entry.name)
        else:
            found.oddities[path] = "symbolic link" if stat.S_ISLNK(status.st_mode) else "special file"


def look_at_file(path: Path) -> FoundFile:
    """Size and digest of a regular file, read in pieces; the reason where it cannot be read."""
    digest, size = hashlib.sha256(), 0
    try:
        descriptor = os.open(path, os.O_RDONLY | os.O_NOFOLLOW | os.O_NONBLOCK)
        try:
            while piece := os.read(descriptor, _PIECE):
                digest.update(piece)
                size += len(piece)
        finally:
            os.close(descriptor)
    except OSError as error:
        return FoundFile(size, None, plain_reason(error))
    return FoundFile(size, digest.hexdigest())
