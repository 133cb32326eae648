"""Places outside the workspace that are told of every trail head: a file, or a folder.

A file gets a line for each head, a folder a file of its own. Both are canonical JSON: number and SHA-256 of
the newest line, and the time of its entry. Whoever cannot write there cannot make a trail that was cut back
or built anew agree with what is kept there.
"""

import fcntl
import os
import struct
from collections.abc import Mapping
from dataclasses import dataclass
from datetime import datetime
from pathlib import Path
from typing import Protocol

from assayfolio.canonical import Json, canonical_bytes
from assayfolio.errors import MachineError
from assayfolio.evidence.entries import EMPTY_HEAD, TrailHead, is_digest
from assayfolio.evidence.files import (
    append_line,
    explained,
    plain_reason,
    read_regular,
    sync_folder,
    write_all,
)
from assayfolio.evidence.strict_json import NotCanonicalError, parse_canonical

# ioctl FS_IOC_GETFLAGS and FS_APPEND_FL of Linux (linux/fs.h).
_GET_FLAGS, _APPEND_ONLY = 0x80086601, 0x20


@dataclass(frozen=True, slots=True)
class KeptHeads:
    """What a witness keeps: digests by the number of the entry, and what there could not be understood.

    A number that is kept with two digests stands in `troubles`; `digests` has the first of them. `times` are
    those by another clock than this computer's. `guard` says who could alter what is kept.
    """

    digests: Mapping[int, str]
    troubles: tuple[str, ...]
    times: Mapping[int, datetime]
    guard: str

    @property
    def newest(self) -> TrailHead:
        """The head with the highest number."""
        if not self.digests:
            return EMPTY_HEAD
        seq = max(self.digests)
        return TrailHead(seq, self.digests[seq])


class Witness(Protocol):
    """A place that is told of trail heads and can be asked for them."""

    @property
    def name(self) -> str:
        """How the settings, the trail and the checks name it: kind and place."""

    def tell(self, head: TrailHead, time: str) -> None:
        """Keep a head. Raises MachineError where the place does not take it."""

    def kept(self) -> KeptHeads:
        """The heads that it keeps. Raises MachineError where it cannot be read."""

    @property
    def each_entry(self) -> bool:
        """Whether it is told of every entry, or only of the one with which the trail is closed."""


@dataclass(frozen=True, slots=True)
class FileWitness:
    """A file that heads are added to, a line each; it is made where it is missing, its folder is not."""

    path: Path
    each_entry: bool = True

    @property
    def name(self) -> str:
        """`file: PATH`."""
        return f"file: {self.path}"

    def tell(self, head: TrailHead, time: str) -> None:
        """Add a line and bring it to the disk."""
        append_line(self.path, _head_line(head, time))

    def kept(self) -> KeptHeads:
        """Every head in the file."""
        with explained("read the witness", self.path):
            lines = read_regular(self.path).split(b"\n")
        digests: dict[int, str] = {}
        troubles = []
        for number, line in enumerate(lines, start=1):
            if not line:
                continue
            head = _head_in(line)
            if head is None:
                troubles.append(f"line {number} is no head: torn or altered")
            elif digests.setdefault(head.seq, head.sha256) != head.sha256:
                troubles.append(f"line {number} has another head for entry {head.seq} than a line before it")
        return KeptHeads(digests, tuple(troubles), {}, self._guard())

    def _guard(self) -> str:
        """By the rights of the file, and whether the file system lets it only grow."""
        if not os.access(self.path, os.W_OK):
            return _OUT_OF_REACH
        return "its file can only grow (append-only)" if _only_grows(self.path) else _WITHIN_REACH


@dataclass(frozen=True, slots=True)
class FolderWitness:
    """A folder that is there already, in which every head becomes a file of its own."""

    path: Path
    each_entry: bool = True

    @property
    def name(self) -> str:
        """`folder: PATH`."""
        return f"folder: {self.path}"

    def tell(self, head: TrailHead, time: str) -> None:
        """Write the head's file, which must not be there yet unless it holds this head."""
        place = self.path / f"{head.seq:08d}.json"
        with explained("tell the witness", place):
            try:
                descriptor = os.open(place, os.O_WRONLY | os.O_CREAT | os.O_EXCL | os.O_NOFOLLOW, 0o444)
            except FileExistsError:
                if _head_in(read_regular(place).removesuffix(b"\n")) == head:
                    return
                raise MachineError(f"{place}: it holds another head of entry {head.seq} already") from None
            try:
                write_all(descriptor, _head_line(head, time) + b"\n")
                os.fsync(descriptor)
            finally:
                os.close(descriptor)
        sync_folder(self.path)

    def kept(self) -> KeptHeads:
        """Every head in the folder; files of other names are no heads."""
        digests: dict[int, str] = {}
        troubles = []
        with explained("read the witness", self.path):
            names = sorted(os.listdir(self.path))  # noqa: PTH208 - one plain system call
        for name in names:
            number = name.removesuffix(".json")
            if not (name.endswith(".json") and number.isascii() and number.isdecimal()):
                continue
            try:
                head = _head_in(read_regular(self.path / name).removesuffix(b"\n"))
            except OSError as error:
                raise MachineError(f"{self.path / name}: {plain_reason(error)}") from error
            if head is None or head.seq != int(number):
                troubles.append(f"{name} is not the head of entry {int(number)}: torn or altered")
            else:
                digests[head.seq] = head.sha256
        guard = _WITHIN_REACH if os.access(self.path, os.W_OK) else _OUT_OF_REACH
        return KeptHeads(digests, tuple(troubles), {}, guard)


@dataclass(frozen=True, slots=True)
class PrintedHead:
    """A head that was taken from a report or a note; it tells only of itself."""

    head: TrailHead
    each_entry: bool = False

    @property
    def name(self) -> str:
        """`head: NUMBER`."""
        return f"head: entry {self.head.seq}, as given"

    def tell(self, head: TrailHead, time: str) -> None:
        """Paper takes nothing more."""
        raise MachineError(f"{self.name}: entry {head.seq} of {time} cannot be added")

    def kept(self) -> KeptHeads:
        """The one head."""
        return KeptHeads({self.head.seq: self.head.sha256}, (), {}, "as reliable as what it was read from")


_OUT_OF_REACH = "this account cannot alter it"
_WITHIN_REACH = (
    "this account can alter it, so it shows nothing against somebody who alters it along with the trail"
)


def _head_line(head: TrailHead, time: str) -> bytes:
    return canonical_bytes({"seq": head.seq, "sha256": head.sha256, "time": time})


def _head_in(line: bytes) -> TrailHead | None:
    try:
        value: Json = parse_canonical(line)
    except NotCanonicalError:
        return None
    if not isinstance(value, dict):
        return None
    seq, digest = value.get("seq"), value.get("sha256")
    if not isinstance(seq, int) or isinstance(seq, bool) or seq < 1 or not is_digest(digest):
        return None
    return TrailHead(seq, str(digest))


def _only_grows(path: Path) -> bool:
    """Whether the file has the attribute by which Linux lets it only grow; False where that is not told."""
    try:
        descriptor = os.open(path, os.O_RDONLY | os.O_NOFOLLOW)
    except OSError:
        return False
    try:
        answer = fcntl.ioctl(descriptor, _GET_FLAGS, b"\0" * 8)
    except OSError:
        return False
    finally:
        os.close(descriptor)
    return bool(struct.unpack("=L", answer[:4])[0] & _APPEND_ONLY)
