"""A re-run in the environment that a run was made with: its own program, on the packages of its own lock.

The program comes from the workspace's store or a folder of wheels and is named by the digest in the run's
record. It is code, so it is started only when something vouches for that digest: the verified audit trail of
a workspace, or the person who names it. The packages are pinned by their digests in the folio's lock and
come from a folder of wheels, offline, or from the index that pip is configured for.
"""

import json
import os
import shutil
import subprocess
import sys
import tempfile
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from assayfolio.canonical import sha256_hex
from assayfolio.errors import InputError, MachineError
from assayfolio.evidence.files import digest_regular
from assayfolio.evidence.outcomes import Verification
from assayfolio.evidence.program_store import WHEEL, kept_program
from assayfolio.workflow.archived import ArchivedRun, archived_run
from assayfolio.workflow.rerun_record import ArchivedEnvironmentRerun
from assayfolio.workflow.workspace import Workspace, shown_path

LOCK_FILE = "data/requirements.lock"
_BY_TRAIL = "vouched for by the verified audit trail"
_BY_NAME = "named by the person who started the re-run"
_LAST_LINES = 12


@dataclass(frozen=True, slots=True)
class ArchivedEnvironmentOptions:
    """`wheels` is a folder of wheels (None: pip's index); `trust_code` a digest; `python` the interpreter."""

    wheels: Path | None
    trust_code: str | None
    python: Path | None


def rerun_archived(
    folio: Path,
    workspace: Workspace | None,
    verification: Verification,
    options: ArchivedEnvironmentOptions,
) -> ArchivedEnvironmentRerun:
    """Build the environment of the run in `folio`, re-run it there, and return what that came to.

    Raises InputError where the folio names no program, nothing vouches for it or it is not at hand;
    MachineError where the environment cannot be built or the re-run in it fails.
    """
    run = archived_run(folio)
    digest = _program_digest(run)
    vouched = _vouched(digest, run, workspace, verification, options.trust_code)
    wheel = _wheel(digest, workspace, options.wheels)
    with tempfile.TemporaryDirectory(prefix="assayfolio-archived-") as name:
        folder = Path(name)
        python = _build(folder, run.read(LOCK_FILE), wheel, digest, options)
        document = _started(python, folio, folder)
        words = _python_words(python, run.environment)
    parts = tuple((one["part"], one["outcome"], tuple(one["notes"])) for one in document["parts"])
    return ArchivedEnvironmentRerun(str(document["outcome"]), parts, digest, vouched, words)


def _program_digest(run: ArchivedRun) -> str:
    program = run.record.get("program")
    digest = program.get("sha256") if isinstance(program, Mapping) else None
    if not isinstance(digest, str):
        note = program.get("note") if isinstance(program, Mapping) else "its record has no program"
        raise InputError(
            f"{run.subject} names no program that could be started again ({note}). "
            "Re-run it with this installation: leave out --environment."
        )
    return digest


def _vouched(
    digest: str,
    run: ArchivedRun,
    workspace: Workspace | None,
    verification: Verification,
    trust_code: str | None,
) -> str:
    if trust_code is not None and trust_code.lower() == digest:
        return _BY_NAME
    sealed = any(one.number == "3.10" and one.outcome == "passed" for one in verification.outcomes)
    if trust_code is None and workspace is not None and sealed and not verification.with_outcome("failed"):
        return _BY_TRAIL
    if trust_code is not None:
        raise InputError(
            f"{run.subject} was made by the program {digest}, not by {trust_code}; nothing was started."
        )
    raise InputError(
        f"Nothing vouches for the program of {run.subject}, so it was not started. The audit trail does, "
        "where it verifies: --workspace DIR. If you know the program from elsewhere: --trust-code SHA256. "
        f"Its SHA-256 is {digest}."
    )


def _wheel(digest: str, workspace: Workspace | None, wheels: Path | None) -> Path:
    kept = None if workspace is None else kept_program(workspace.runs, digest)
    if kept is not None:
        return kept
    for path in sorted(wheels.rglob(f"assayfolio-*{WHEEL}")) if wheels is not None else ():
        if path.is_file() and digest_regular(path) == digest:
            return path
    raise InputError(
        f"The program with SHA-256 {digest} is not at hand. A workspace keeps it in runs/_programs/, and "
        "`assayfolio archive --with-wheels` puts it into a copy: --wheels DIR."
    )


def _build(folder: Path, lock: bytes, wheel: Path, digest: str, options: ArchivedEnvironmentOptions) -> Path:
    """The interpreter of a new environment with the locked packages and the program with this digest."""
    source = options.python or Path(sys.executable)
    requirements = folder / "requirements.lock"
    requirements.write_bytes(lock)
    environment = folder / "environment"
    _quietly("make a virtual environment", [os.fspath(source), "-I", "-m", "venv", os.fspath(environment)])
    python = environment / ("Scripts" if os.name == "nt" else "bin") / "python"
    pip = [os.fspath(python), "-I", "-m", "pip", "--disable-pip-version-check", "--no-input", "install"]
    offline = [] if options.wheels is None else ["--no-index", "--find-links", os.fspath(options.wheels)]
    _quietly(
        "install the locked packages",
        [
            *pip,
            "--require-hashes",
            "--only-binary",
            ":all:",
            *offline,
            "--requirement",
            os.fspath(requirements),
        ],
    )
    # Installed from a copy under its own name: the bytes are those whose digest was vouched for.
    content = wheel.read_bytes()
    if sha256_hex(content) != digest:
        raise MachineError(f"{shown_path(wheel)} changed while it was read; nothing was started.")
    copy = folder / wheel.name
    copy.write_bytes(content)
    _quietly("install the program", [*pip, "--no-deps", "--no-index", os.fspath(copy)])
    return python


def _quietly(deed: str, command: Sequence[str]) -> subprocess.CompletedProcess[str]:
    # pip's own configuration (index, proxies, certificates) counts; what points Python elsewhere does not.
    environment = {name: value for name, value in os.environ.items() if not name.startswith("PYTHON")}
    try:
        outcome = subprocess.run(  # noqa: S603 - a list of words, no shell; code was vouched for above
            command, env={**environment, "PIP_USER": "0"}, capture_output=True, text=True, check=False
        )
    except OSError as error:
        raise MachineError(f"The archived environment: could not {deed}: {error}.") from error
    if outcome.returncode != 0:
        told = "\n".join(f"  {line}" for line in outcome.stderr.splitlines()[-_LAST_LINES:])
        raise MachineError(f"The archived environment: could not {deed}.\n{told}")
    return outcome


def _started(python: Path, folio: Path, folder: Path) -> dict[str, Any]:
    """Re-run a copy of `folio` with the archived program; what it answered.

    A copy, because an earlier program cannot be expected to read what a later one adds to a trail.
    """
    output, copy = folder / "records", folder / "folio" / folio.resolve().name
    output.mkdir()
    shutil.copytree(folio, copy, symlinks=True)
    command = [os.fspath(python), "-I", "-m", "assayfolio", "rerun", os.fspath(copy)]
    environment = {name: value for name, value in os.environ.items() if not name.startswith("PYTHON")}
    outcome = subprocess.run(  # noqa: S603 - as above
        [*command, "--output", os.fspath(output), "--json"],
        cwd=folder,
        env=environment,
        capture_output=True,
        text=True,
        check=False,
    )
    try:
        document = json.loads(outcome.stdout)
        _ = (document["outcome"], document["parts"])
    except (ValueError, KeyError, TypeError) as error:
        told = "\n".join(f"  {line}" for line in outcome.stderr.splitlines()[-_LAST_LINES:])
        raise MachineError(
            f"The re-run in the archived environment ended without an answer.\n{told}"
        ) from error
    assert isinstance(document, dict)
    return document


def _python_words(python: Path, archived: Mapping[str, Any]) -> str:
    code = "import platform; print(platform.python_implementation(), platform.python_version())"
    now = _quietly("ask the interpreter", [os.fspath(python), "-I", "-c", code]).stdout.strip()
    interpreter = archived.get("interpreter")
    facts = interpreter if isinstance(interpreter, Mapping) else {}
    then = f"{facts.get('implementation')} {facts.get('version')}"
    return now if now == then else f"{now}; the run was made with {then}"
