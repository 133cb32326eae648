"""The programs that made the runs of a workspace: `runs/_programs/<SHA-256>/<wheel>`, each kept once.

A run's record names the digest of its program, and the run's seal in the audit trail vouches for the record.
"""

import os
from collections.abc import Iterator
from pathlib import Path

from assayfolio.canonical import sha256_hex
from assayfolio.evidence.entries import is_digest
from assayfolio.evidence.files import (
    digest_regular,
    explained,
    make_folder,
    plain_reason,
    sync_folder,
    write_new,
)
from assayfolio.evidence.inventory import shown

FOLDER = "_programs"
WHEEL = ".whl"


def kept_program(runs: Path, digest: str) -> Path | None:
    """The wheel with this digest, if the workspace keeps it unchanged.

    Raises MachineError where it cannot be read.
    """
    for path in sorted((runs / FOLDER / digest).glob(f"*{WHEEL}")):
        with explained("read the program", path):
            if digest_regular(path) == digest:
                return path
    return None


def keep_program(runs: Path, name: str, content: bytes) -> str:
    """Keep a wheel under its digest, unless it is there; the digest.

    Raises MachineError where the disk refuses.
    """
    digest = sha256_hex(content)
    folder = runs / FOLDER / digest
    target = folder / name
    if target.exists():
        return digest
    make_folder(folder)
    new = folder / f".{name}.{os.getpid()}"
    write_new(new, content, 0o444)
    with explained("keep the program", target):
        os.replace(new, target)  # noqa: PTH105 - one plain system call
    sync_folder(folder)
    return digest


def program_faults(runs: Path) -> Iterator[str]:
    """What is wrong with the kept programs: a changed wheel, or anything that is none."""
    for folder in sorted((runs / FOLDER).iterdir()):
        place = f"{FOLDER}/{shown(folder.name)}"
        if folder.is_symlink() or not folder.is_dir() or not is_digest(folder.name):
            yield f"extra: {place}: it is not the folder of a program"
            continue
        for path in sorted(folder.iterdir()):
            if path.name.startswith("."):
                continue  # left by a writer that was killed
            try:
                changed = path.suffix != WHEEL or digest_regular(path) != folder.name
            except OSError as error:
                yield f"{place}/{shown(path.name)} could not be read: {plain_reason(error)}"
                continue
            if changed:
                yield f"changed: {place}/{shown(path.name)} has not the digest that its folder is named by"
