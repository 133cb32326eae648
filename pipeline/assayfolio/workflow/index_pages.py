"""Putting the register's pages on the disk: a file that is as it should be is left alone.

A page is replaced at one moment, so that a reader sees the old one or the new one. Few pages are made durable
one by one, many of them together.
"""

import os
from pathlib import Path

from assayfolio.evidence.files import explained, make_folder, replacement_name, write_all
from assayfolio.evidence.register_pages import REGISTER_FOLDER, files_of_register

_FEW = 200


class PageFolder:
    """The folder `runs` with the register's pages in it."""

    def __init__(self, runs: Path) -> None:
        self._runs = runs
        self._put: set[str] = set()
        self._written: list[Path] = []
        self._folders: set[Path] = set()

    @property
    def written(self) -> int:
        """How many files were not as they should be and were written."""
        return len(self._written)

    def put(self, path: str, content: bytes) -> None:
        """See to it that the file at `path`, below `runs`, holds `content`."""
        self._put.add(path)
        target = self._runs / path
        with explained("write the page", target):
            if _holds(target, content):
                return
            if target.parent not in self._folders:
                make_folder(target.parent)
                self._folders.add(target.parent)
            new = replacement_name(target)
            descriptor = os.open(new, os.O_WRONLY | os.O_CREAT | os.O_TRUNC | os.O_NOFOLLOW, 0o644)
            try:
                write_all(descriptor, content)
            finally:
                os.close(descriptor)
            os.replace(new, target)  # noqa: PTH105 - one plain system call
        self._written.append(target)

    def settle(self) -> None:
        """Make durable what was written."""
        if len(self._written) > _FEW:
            os.sync()
            return
        for path in (*self._written, *{path.parent for path in self._written}):
            with explained("make the page durable", path):
                descriptor = os.open(path, os.O_RDONLY)
                try:
                    os.fsync(descriptor)
                finally:
                    os.close(descriptor)

    def remove_others(self) -> None:
        """Remove pages that were not put: those of a register that was built from something else."""
        folder = self._runs / REGISTER_FOLDER
        with explained("remove old pages", folder):
            for path in list(files_of_register(folder)):
                if f"{REGISTER_FOLDER}/{path}" not in self._put:
                    (folder / path).unlink()


def _holds(target: Path, content: bytes) -> bool:
    try:
        descriptor = os.open(target, os.O_RDONLY | os.O_NOFOLLOW | os.O_NONBLOCK)
    except OSError:
        return False
    with os.fdopen(descriptor, "rb") as file:
        return os.fstat(descriptor).st_size == len(content) and file.read() == content
