"""Locks between processes: advisory locks of the operating system, gone with the process that held them.

A lock is a file of its own beside what it guards, so that a killed process leaves at most an empty-handed
file, never a locked workspace.
"""

import errno
import fcntl
import os
import time
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from assayfolio.canonical import Json, canonical_bytes
from assayfolio.errors import BusyError, MachineError
from assayfolio.evidence.files import explained, make_folder
from assayfolio.evidence.strict_json import NotCanonicalError, parse_canonical

_PAUSE_SECONDS = 0.02
# Somebody who asks `is_locked` holds the lock for an instant; a taker outwaits that.
_PATIENCE_SECONDS = 1.0


def lock_path(folder: Path, name: str) -> Path:
    """The lock file of `name` in `folder`."""
    return folder / f".{name}.lock"


def _try_lock(descriptor: int, how: int) -> bool:
    try:
        fcntl.flock(descriptor, how | fcntl.LOCK_NB)
    except OSError as error:
        if error.errno in (errno.EWOULDBLOCK, errno.EACCES):
            return False
        raise
    return True


def _still_named(descriptor: int, path: Path) -> bool:
    """Whether the locked file is the one that the path names: its holder may have removed it meanwhile."""
    try:
        named = path.lstat()
    except FileNotFoundError:
        return False
    held = os.fstat(descriptor)
    return (named.st_dev, named.st_ino) == (held.st_dev, held.st_ino)


def take_lock(path: Path, wait_seconds: float, holder: Json = None) -> int:
    """Take the lock file `path` exclusively and return its descriptor; closing it gives the lock back.

    Polls until `wait_seconds` have passed (by a timer, not by the clock), then raises BusyError. `holder`
    is written into the file for those who wait.
    """
    deadline = time.monotonic() + wait_seconds
    make_folder(path.parent)
    if not os.access(path.parent, os.W_OK | os.X_OK):
        raise MachineError(
            f"{path.parent}: this account may not write here, so nothing was entered. "
            "Give it the right to write, or work under an account that has it."
        )
    with explained("take the lock", path):
        while True:
            descriptor = os.open(path, os.O_RDWR | os.O_CREAT | os.O_NOFOLLOW, 0o644)
            try:
                taken = _try_lock(descriptor, fcntl.LOCK_EX) and _still_named(descriptor, path)
                if taken:
                    os.ftruncate(descriptor, 0)
                    if holder is not None:
                        os.write(descriptor, canonical_bytes(holder) + b"\n")
            except BaseException:
                os.close(descriptor)
                raise
            if taken:
                return descriptor
            os.close(descriptor)
            if time.monotonic() >= deadline:
                raise BusyError(_busy_words(path, wait_seconds))
            time.sleep(_PAUSE_SECONDS)


def _busy_words(path: Path, waited: float) -> str:
    held = "another process"
    try:
        who = parse_canonical(path.read_bytes().removesuffix(b"\n"))
    except (OSError, NotCanonicalError):
        who = None
    if isinstance(who, dict):
        held = f"{who.get('actor')} (process {who.get('process')}, since {who.get('since')})"
    return (
        f"{path.parent} is in use: {held} holds {path.name}. Waited {waited:g} s; nothing was written. "
        "Try again when that command has ended."
    )


@contextmanager
def folio_lock(folder: Path, name: str) -> Iterator[None]:
    """Hold the lock of the folio `name` in `folder` while a run works on it.

    Take it before the number is entered in the trail, and keep it until the folio has its name: in between,
    whoever looks can tell a run that is working from one that was killed. The file goes at the end.
    Raises BusyError where another process holds it, MachineError where the disk refuses.
    """
    path = lock_path(folder, name)
    descriptor = take_lock(path, _PATIENCE_SECONDS)
    try:
        yield
    finally:
        # Removed while still held: the next taker notices that its file has lost its name.
        with explained("remove the lock", path):
            try:
                os.unlink(path)  # noqa: PTH108 - one plain system call
            finally:
                os.close(descriptor)


def is_locked(folder: Path, name: str) -> bool:
    """Whether a living process holds the lock of `name` in `folder`. Creates nothing."""
    path = lock_path(folder, name)
    with explained("look at the lock", path):
        try:
            descriptor = os.open(path, os.O_RDONLY | os.O_NOFOLLOW)
        except FileNotFoundError:
            return False
        try:
            return not _try_lock(descriptor, fcntl.LOCK_SH)
        finally:
            os.close(descriptor)
