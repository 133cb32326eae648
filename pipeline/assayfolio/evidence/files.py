"""Durable files: what is written here is on the disk before the call returns, or an error says why not.

A file is fsynced, then the folder that names it. Errors of the operating system become `MachineError` with
the path and plain words. Files are opened without following a symbolic link in the last part of the path.
"""

import errno
import os
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from hashlib import sha256
from pathlib import Path

from assayfolio.errors import MachineError

_BLOCK = 1 << 20
_WORDS = {
    errno.ENOSPC: "the disk is full",
    errno.EDQUOT: "the disk quota is used up",
    errno.EACCES: "permission denied",
    errno.EPERM: "permission denied",
    errno.EROFS: "the disk is read-only",
    errno.EIO: "the disk reports an input/output error",
    errno.ENOENT: "it is not there",
    errno.ENOTDIR: "a part of the path is not a folder",
    errno.EISDIR: "it is a folder",
    errno.EEXIST: "it exists already",
    errno.ENAMETOOLONG: "the name is too long for this disk",
    errno.ELOOP: "it is a symbolic link",
    errno.EMFILE: "too many files are open",
    errno.ENFILE: "too many files are open",
    errno.EFBIG: "the file would be too large for this disk",
    errno.ENOLCK: "this disk has no file locks",
    errno.EOPNOTSUPP: "this disk does not support it",
}


def plain_reason(error: OSError) -> str:
    """Why the operating system refused, in words that need no manual."""
    known = _WORDS.get(error.errno or 0)
    return known or error.strerror or type(error).__name__


@contextmanager
def explained(deed: str, path: Path) -> Iterator[None]:
    """Turn an OSError of the block into `MachineError`: "<path>: could not <deed>: <reason>"."""
    try:
        yield
    except OSError as error:
        raise MachineError(f"{path}: could not {deed}: {plain_reason(error)}") from error


def write_all(descriptor: int, content: bytes) -> None:
    """Write every byte; OSError where the system takes none."""
    view = memoryview(content)
    while view:
        written = os.write(descriptor, view)
        if written == 0:
            raise OSError(errno.EIO, "no byte was written")
        view = view[written:]


def sync_folder(folder: Path) -> None:
    """Make the names in `folder` durable."""
    with explained("make the folder durable", folder):
        descriptor = os.open(folder, os.O_RDONLY | os.O_DIRECTORY)
        try:
            os.fsync(descriptor)
        finally:
            os.close(descriptor)


def make_folder(folder: Path) -> None:
    """Make `folder` and what is missing above it, each durable in its parent; an existing one is kept."""
    if folder.is_dir():
        return
    make_folder(folder.parent)
    with explained("make the folder", folder):
        try:
            os.mkdir(folder)  # noqa: PTH102 - one plain system call, no second look
        except FileExistsError:
            if not folder.is_dir():
                raise
    sync_folder(folder.parent)


def write_new(path: Path, content: bytes, mode: int = 0o644) -> None:
    """Write a file that must not exist yet, and fsync it. The folder is the caller's to sync."""
    with explained("write the file", path):
        descriptor = os.open(path, os.O_WRONLY | os.O_CREAT | os.O_EXCL | os.O_NOFOLLOW, mode)
        try:
            write_all(descriptor, content)
            os.fsync(descriptor)
        finally:
            os.close(descriptor)


def append_line(path: Path, line: bytes) -> None:
    """Add a line to a file that is made where it is missing, and bring it to the disk."""
    with explained("add a line", path):
        descriptor = os.open(path, os.O_WRONLY | os.O_APPEND | os.O_CREAT | os.O_NOFOLLOW, 0o644)
        try:
            begun = os.fstat(descriptor).st_size > 0
            write_all(descriptor, line + b"\n")
            os.fsync(descriptor)
        finally:
            os.close(descriptor)
    if not begun:
        sync_folder(path.parent)


def replace_file(path: Path, content: bytes) -> None:
    """Replace `path` by `content` at one moment: whoever reads sees the old bytes or the new ones, whole."""
    new = replacement_name(path)
    with explained("replace the file", path):
        descriptor = os.open(new, os.O_WRONLY | os.O_CREAT | os.O_TRUNC | os.O_NOFOLLOW, 0o644)
        try:
            write_all(descriptor, content)
            os.fsync(descriptor)
        finally:
            os.close(descriptor)
        os.replace(new, path)  # noqa: PTH105 - one plain system call
    sync_folder(path.parent)


def replacement_name(path: Path) -> Path:
    """Where `replace_file` writes before it renames; a leftover of this name carries no evidence."""
    return path.with_name(f".{path.name}.new")


@dataclass(frozen=True, slots=True)
class FileToCopy:
    """A file too large to be held in memory, as it was when it was read: its size and its SHA-256."""

    source: Path
    size: int
    sha256: str


def copy_new(file: FileToCopy, path: Path, mode: int = 0o644) -> None:
    """Copy `file` in blocks to one that must not exist yet, fsync it; the folder is the caller's to sync.

    Raises MachineError where the copy is not what was read before.
    """
    digest = sha256()
    with explained("copy the file", path):
        source = os.open(file.source, os.O_RDONLY | os.O_NOFOLLOW | os.O_NONBLOCK)
        try:
            descriptor = os.open(path, os.O_WRONLY | os.O_CREAT | os.O_EXCL | os.O_NOFOLLOW, mode)
            try:
                while block := os.read(source, _BLOCK):
                    digest.update(block)
                    write_all(descriptor, block)
                os.fsync(descriptor)
            finally:
                os.close(descriptor)
        finally:
            os.close(source)
    if digest.hexdigest() != file.sha256:
        raise MachineError(f"{file.source}: it was changed after it had been read, so nothing was sealed.")


def digest_regular(path: Path) -> str:
    """The SHA-256 of a regular file, read in blocks, never through a symbolic link. Raises OSError."""
    digest = sha256()
    descriptor = os.open(path, os.O_RDONLY | os.O_NOFOLLOW | os.O_NONBLOCK)
    with os.fdopen(descriptor, "rb") as file:
        while block := file.read(_BLOCK):
            digest.update(block)
    return digest.hexdigest()


def read_regular(path: Path) -> bytes:
    """The bytes of a regular file, never through a symbolic link and never waiting on a pipe.

    Raises OSError; a caller that must go on decides what it means, others use `explained`.
    """
    descriptor = os.open(path, os.O_RDONLY | os.O_NOFOLLOW | os.O_NONBLOCK)
    with os.fdopen(descriptor, "rb") as file:
        return file.read()
