"""Gathering the wheels of a lock: from a folder, or from the index that pip is configured for."""

import os
import re
import shutil
import subprocess
import sys
import tempfile
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

from assayfolio.errors import InputError, MachineError
from assayfolio.evidence.files import digest_regular, explained
from assayfolio.evidence.program_store import WHEEL

_HASH = re.compile(r"--hash=sha256:([0-9a-f]{64})")
_LAST_LINES = 8


@dataclass(frozen=True, slots=True)
class WheelSource:
    """Where wheels come from: a folder, or with None the index that pip is configured for."""

    folder: Path | None


def gather_wheels(lock: bytes, source: WheelSource, target: Path) -> tuple[str, ...]:
    """Put the wheels of `lock` for this interpreter and machine into `target`; their names.

    Raises InputError where the folder lacks a package of the lock, MachineError where pip or the disk
    refuses.
    """
    target.mkdir(parents=True, exist_ok=True)
    with tempfile.TemporaryDirectory(prefix="assayfolio-wheels-") as name:
        requirements = Path(name) / "requirements.lock"
        requirements.write_bytes(lock)
        found = Path(name) / "found"
        command = [sys.executable, "-I", "-m", "pip", "--disable-pip-version-check", "--no-input", "download"]
        offline = [] if source.folder is None else ["--no-index", "--find-links", os.fspath(source.folder)]
        wanted = ["--require-hashes", "--only-binary", ":all:", "--no-deps", "--dest", os.fspath(found)]
        outcome = subprocess.run(  # noqa: S603 - a list of words, no shell
            [*command, *wanted, *offline, "--requirement", os.fspath(requirements)],
            capture_output=True,
            text=True,
            check=False,
        )
        if outcome.returncode != 0:
            told = "\n".join(f"  {line}" for line in outcome.stderr.splitlines()[-_LAST_LINES:])
            if source.folder is not None:
                raise InputError(f"{source.folder} does not hold every package of the lock.\n{told}")
            raise MachineError(f"The packages of the lock could not be fetched.\n{told}")
        known = set(_HASH.findall(lock.decode("utf-8")))
        return tuple(sorted(_moved(found, target, known)))


def _moved(found: Path, target: Path, known: set[str]) -> Iterator[str]:
    for path in sorted(found.iterdir()):
        with explained("keep the wheel", path):
            if path.suffix != WHEEL or digest_regular(path) not in known:
                raise MachineError(f"{path.name}: it is not a wheel of the lock.")
            shutil.move(path, target / path.name)
        yield path.name
