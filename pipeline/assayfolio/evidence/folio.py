"""Making a folio: staged beside its target, read back, made durable, renamed into place.

A folio is a BagIt 1.0 folder (RFC 8493) with its payload in `data/`. Its seal is the SHA-256 of
`tagmanifest-sha256.txt`, which fixes every other file; the caller enters the seal in the audit trail before
it publishes the folio, so that a killed process leaves a staged folder that the trail explains.

Files are made read-only (0444) against slips of the hand; folders keep the usual rights, so that sign-off
can later be added beside the payload and a folio can be copied and removed by ordinary means. The evidence
is the seal, never the file modes.
"""

import os
import shutil
import stat
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

from assayfolio.canonical import Json, canonical_digest, sha256_hex
from assayfolio.errors import InputError, MachineError
from assayfolio.evidence.files import (
    FileToCopy,
    copy_new,
    digest_regular,
    explained,
    make_folder,
    plain_reason,
    read_regular,
    sync_folder,
    write_new,
)
from assayfolio.evidence.locks import folio_lock, is_locked
from assayfolio.evidence.manifest import (
    BAG_INFO_FILE,
    BAGIT_FILE,
    BAGIT_TEXT,
    MANIFEST_FILE,
    PAYLOAD_FOLDER,
    TAG_MANIFEST_FILE,
    bag_info_bytes,
    collisions,
    manifest_bytes,
    name_fault,
    parse_manifest,
)

__all__ = [
    "UNSEALED",
    "Content",
    "FileToCopy",
    "StagedFolio",
    "folio_lock",
    "is_locked",
    "leftover_record",
    "name_fault",
    "read_seal",
    "reopen_staged",
    "stage_folio",
]

UNSEALED = ".unsealed"


Content = bytes | FileToCopy
"""What a file of a folio is made of: bytes at hand, or a file that is copied."""


@dataclass(frozen=True, slots=True)
class StagedFolio:
    """A complete folio in its staging folder, not yet under its name."""

    path: Path
    target: Path
    seal: str

    def publish(self) -> Path:
        """Give the folio its name, durably. Raises MachineError for a taken name or a refusing disk."""
        _refuse_existing(self.target)
        with explained("rename the staged folio into place", self.target):
            os.rename(self.path, self.target)  # noqa: PTH104 - one plain system call
        sync_folder(self.target.parent)
        return self.target


def stage_folio(
    folder: Path, name: str, payload: Mapping[str, Content], bag_info: Sequence[tuple[str, str]]
) -> StagedFolio:
    """Write the folio `name` into `folder`/<name>.unsealed, durable and read back, ready to be published.

    `payload` maps paths such as "data/study.yaml" to their bytes, or to files to copy; `bag_info` has the
    labels of bag-info.txt, to which Payload-Oxum is added. The same arguments give the same bytes and so the
    same seal. Raises InputError for paths that cannot stand in a folio or beside each other; MachineError
    where the target or the staging folder exists, the disk refuses, or a file reads back differently; what
    this call had written is then removed again. A killed process leaves it for the next writer to tell of.
    """
    _refuse_paths(payload)
    target = folder / name
    staging = folder / f"{name}{UNSEALED}"
    for path in (target, staging):
        _refuse_existing(path)
    contents = _with_tag_files(payload, bag_info)
    make_folder(folder)
    make_folder(staging)
    try:
        _write(staging, contents)
        _read_back(staging, contents)
    except BaseException:
        # What this call began is of no use to anybody, and in the way of the folio that tells of the failure.
        shutil.rmtree(staging, ignore_errors=True)
        raise
    return StagedFolio(staging, target, _digest(contents[TAG_MANIFEST_FILE]))


def _digest(content: Content) -> str:
    return sha256_hex(content) if isinstance(content, bytes) else content.sha256


def _size(content: Content) -> int:
    return len(content) if isinstance(content, bytes) else content.size


def _write(staging: Path, contents: Mapping[str, Content]) -> None:
    """Write every file, then make every folder durable."""
    folders = {staging}
    for inside, content in contents.items():
        file = staging / inside
        make_folder(file.parent)
        if isinstance(content, bytes):
            write_new(file, content, 0o444)
        else:
            copy_new(content, file, 0o444)
        folders.update(parent for parent in file.parents if staging in parent.parents)
    for written in sorted(folders):
        sync_folder(written)


def _refuse_paths(payload: Mapping[str, Content]) -> None:
    if not payload:
        raise InputError("a folio without payload is no folio")
    for path in payload:
        fault = name_fault(path)
        if fault is None and not path.startswith(f"{PAYLOAD_FOLDER}/"):
            fault = f"it is not inside {PAYLOAD_FOLDER}/"
        if fault:
            raise InputError(f"{path!r} cannot be kept in a folio: {fault}. Rename the file.")
    clashes = collisions(payload)
    if clashes:
        raise InputError(f"{clashes[0]}, so they cannot be kept in one folio. Rename a file.")


def _refuse_existing(path: Path) -> None:
    if os.path.lexists(path):
        raise MachineError(
            f"{path}: it exists already, so nothing was written over it. "
            "Run `assayfolio verify` to see what the audit trail says of it."
        )


def _with_tag_files(
    payload: Mapping[str, Content], bag_info: Sequence[tuple[str, str]]
) -> Mapping[str, Content]:
    """The payload in the order of its paths, then the tag files; the one that seals comes last."""
    contents = {path: payload[path] for path in sorted(payload)}
    manifest = manifest_bytes({path: _digest(content) for path, content in contents.items()})
    tags: dict[str, Content] = {
        BAG_INFO_FILE: bag_info_bytes(bag_info, [_size(content) for content in contents.values()]),
        BAGIT_FILE: BAGIT_TEXT,
        MANIFEST_FILE: manifest,
    }
    tags[TAG_MANIFEST_FILE] = manifest_bytes({path: _digest(content) for path, content in tags.items()})
    return contents | tags


def _read_back(staging: Path, contents: Mapping[str, Content]) -> None:
    with explained("read the staged folio back", staging):
        there = {path for path, _ in _files(staging)}
        odd = sorted(there.symmetric_difference(contents))
        for path, content in contents.items():
            if path in there and not _is(staging / path, content):
                odd.append(path)
    if odd:
        raise MachineError(
            f"{staging / odd[0]}: it does not read back as it was written. The disk, or another program at "
            "work in this folder, is at fault; nothing was sealed."
        )


def _is(path: Path, content: Content) -> bool:
    """Whether a file holds what it is to hold."""
    if isinstance(content, bytes):
        return read_regular(path) == content
    return digest_regular(path) == content.sha256


def _files(folder: Path, prefix: str = "") -> Iterator[tuple[str, os.DirEntry[str]]]:
    """Everything in `folder` that is no folder, with its path inside; nothing is followed."""
    with os.scandir(folder) as found:
        entries = sorted(found, key=lambda entry: entry.name)
    for entry in entries:
        path = f"{prefix}{entry.name}"
        if entry.is_dir(follow_symlinks=False):
            yield from _files(folder / entry.name, f"{path}/")
        else:
            yield path, entry


def read_seal(folio: Path) -> str:
    """The SHA-256 of the folio's tag manifest.

    Raises InputError where there is none, MachineError where it cannot be read.
    """
    path = folio / TAG_MANIFEST_FILE
    try:
        return sha256_hex(read_regular(path))
    except (FileNotFoundError, NotADirectoryError):
        raise InputError(f"{folio} is not a folio: it has no {TAG_MANIFEST_FILE}") from None
    except OSError as error:
        raise MachineError(f"{path}: could not read the file: {plain_reason(error)}") from error


def reopen_staged(folder: Path, name: str) -> StagedFolio | None:
    """The staged folio `name` in `folder`, if it is there, complete, and agrees with its own manifests.

    For the writer that finds a "sealed" entry without its folio: where the seal is the entry's, publishing
    it completes the interrupted rename. Raises MachineError where a file cannot be read.
    """
    staging = folder / f"{name}{UNSEALED}"
    if not _is_real_folder(staging):
        return None
    with explained("read the staged folio", staging):
        digests = _digests(staging)
        if TAG_MANIFEST_FILE not in digests or MANIFEST_FILE not in digests:
            return None
        tags = parse_manifest(read_regular(staging / TAG_MANIFEST_FILE))
        payload = parse_manifest(read_regular(staging / MANIFEST_FILE))
    seal = digests.pop(TAG_MANIFEST_FILE)
    if tags.faults or payload.faults or digests != {**tags.digests, **payload.digests}:
        return None
    return StagedFolio(staging, folder / name, seal)


def leftover_record(folder: Path, name: str) -> Mapping[str, Json]:
    """What an interrupted run left in its staging folder, as details for its "interrupted" entry.

    {"found": "nothing"} or {"found": "staging folder", "files": count, "files_sha256": digest of the
    canonical JSON of path -> SHA-256}. Raises MachineError where a file cannot be read.
    """
    staging = folder / f"{name}{UNSEALED}"
    if not os.path.lexists(staging):
        return {"found": "nothing"}
    with explained("read what an interrupted run left", staging):
        digests = _digests(staging) if _is_real_folder(staging) else {}
    return {"found": "staging folder", "files": len(digests), "files_sha256": canonical_digest(digests)}


def _is_real_folder(path: Path) -> bool:
    with explained("look at the folder", path):
        try:
            return stat.S_ISDIR(path.lstat().st_mode)
        except FileNotFoundError:
            return False


def _digests(folder: Path) -> dict[str, str]:
    """Path -> SHA-256 of every file; links and other special things by a word that is no digest."""
    found: dict[str, str] = {}
    for path, entry in _files(folder):
        regular = entry.is_file(follow_symlinks=False)
        found[path] = digest_regular(folder / path) if regular else "not a regular file"
    return found
