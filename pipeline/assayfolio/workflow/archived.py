"""An archived folio as a re-run reads it: regular files inside it, and nothing else on the machine."""

import json
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from assayfolio.errors import Fault, InputError, Place
from assayfolio.evidence.files import plain_reason, read_regular
from assayfolio.evidence.folio_reading import RUN_FILE
from assayfolio.evidence.inventory import FoundFile, take_inventory
from assayfolio.evidence.manifest import name_fault
from assayfolio.evidence.run_checks import newer_format
from assayfolio.workflow.records import RUN_FORMAT
from assayfolio.workflow.workspace import shown_path

ENVIRONMENT_FILE = "data/environment.json"
FINDINGS_FILE = "data/findings.json"
REPORT_FILE = "data/report.pdf"
FIGURES_FOLDER = "data/figures/"


class FailedRunError(InputError):
    """The folio is that of a run that failed, so there is no result to compute again."""


@dataclass(frozen=True, slots=True)
class ArchivedRun:
    """The folio of a completed run: its folder, the regular files in it, its records."""

    folder: Path
    files: Mapping[str, FoundFile]
    record: Mapping[str, Any]
    environment: Mapping[str, Any]

    @property
    def subject(self) -> str:
        """The run as its own record names it: "STUDY/run-0001"."""
        return f"{self.record['study']}/{self.record['run']}"

    @property
    def inputs(self) -> tuple[tuple[Any, str, str], ...]:
        """Role, path in the workspace and path in the folio of each input."""
        return tuple((item["role"], item["path"], item["folio_path"]) for item in self.record["inputs"])

    @property
    def figures(self) -> Mapping[str, bytes]:
        """The archived figures by their names."""
        names = [path for path in self.files if path.startswith(FIGURES_FOLDER)]
        return {path.removeprefix(FIGURES_FOLDER): self.read(path) for path in names}

    def read(self, path: str) -> bytes:
        """The bytes of a file of the folio. Raises InputError where it is none of its regular files."""
        return _read(self.folder, self.files, path)

    def document(self, path: str) -> dict[str, Any]:
        """A file of the folio as a JSON object. Raises InputError where it is none."""
        return _document(self.folder, self.files, path)


def archived_run(folder: Path) -> ArchivedRun:
    """The run in the folio `folder`.

    Raises FailedRunError where the run failed; InputError where it is not the folio of a run, where a newer
    version of this program made it, and where a file that a re-run needs is missing or no regular file of the
    folio.
    """
    if not folder.is_dir() or folder.is_symlink():
        raise InputError(f"{shown_path(folder)} is not a folder, so there is nothing to compute again.")
    files = take_inventory(folder).files
    if RUN_FILE not in files:
        raise InputError(
            f"{shown_path(folder)} is not the folio of a run: it has no {RUN_FILE}, so there is nothing to "
            "compute again."
        )
    record = _document(folder, files, RUN_FILE)
    require_known_format(shown_path(folder), record)
    if record.get("outcome") != "completed":
        raise FailedRunError(
            f"{shown_path(folder)} is the folio of a run that failed: it holds no report to compare with. "
            f"Its reason: {record.get('reason')}"
        )
    run = ArchivedRun(folder, files, record, _document(folder, files, ENVIRONMENT_FILE))
    try:
        paths = [path for _, _, path in run.inputs]
        _ = run.subject
    except (KeyError, TypeError) as error:
        raise _unreadable(folder, RUN_FILE, f"it lacks {error}") from error
    for path in (*paths, FINDINGS_FILE, REPORT_FILE):
        _require_file(folder, files, path)
    return run


def require_known_format(name: str, record: Mapping[str, Any]) -> None:
    """Raise InputError in words where a run's record has a format that this version does not read."""
    newer, written = newer_format(record), record.get("format")
    if newer is not None:
        raise InputError(
            f"{name} was made by a newer version of this program: its record has the format {newer}, and "
            f"this version reads {RUN_FORMAT}. Use the version that data/environment.json names."
        )
    if written != RUN_FORMAT:
        raise InputError(f"{name}: {RUN_FILE} has the format {written!r}, which is not that of a run.")


def _unreadable(folder: Path, path: str, why: str) -> InputError:
    fault = Fault(Place(shown_path(folder / path)), why)
    return InputError(f"{shown_path(folder)} cannot be read as a run's folio.", (fault,))


def _require_file(folder: Path, files: Mapping[str, FoundFile], path: Any) -> None:
    if not isinstance(path, str) or name_fault(path) is not None or path not in files:
        raise _unreadable(folder, str(path), "is not a regular file of this folio")


def _read(folder: Path, files: Mapping[str, FoundFile], path: str) -> bytes:
    _require_file(folder, files, path)
    try:
        return read_regular(folder / path)
    except OSError as error:
        raise _unreadable(folder, path, plain_reason(error)) from error


def _document(folder: Path, files: Mapping[str, FoundFile], path: str) -> dict[str, Any]:
    try:
        loaded = json.loads(_read(folder, files, path))
    except (ValueError, RecursionError) as error:
        raise _unreadable(folder, path, f"it is no JSON document: {error}") from error
    if not isinstance(loaded, dict):
        raise _unreadable(folder, path, "it is not a JSON object")
    return loaded
