"""The intake register of a workspace: entering raw data in the trail, and their state today.

What a run enters and what its report says of earlier executions is derived from the trail alone. The states
of all data files need the workspace as well: what the study definitions in `configs/` name, and what lies in
the folders called `data` below it.
"""

import hashlib
import os
from collections import Counter
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from assayfolio.canonical import Json
from assayfolio.errors import AssayfolioError
from assayfolio.evidence.data_states import DataFile, StandingFile, data_files
from assayfolio.evidence.history import run_name
from assayfolio.evidence.register import (
    RECEIVED,
    DataUse,
    Executions,
    Register,
    inputs_details,
    read_register,
    received_details,
)
from assayfolio.evidence.states import RunStanding, run_standings
from assayfolio.evidence.trail import TrailEntry, TrailReading, TrailWriter
from assayfolio.study.reading import read_study
from assayfolio.workflow.intake import AnyInput, SeenFiles
from assayfolio.workflow.raw_files import named_raw_files
from assayfolio.workflow.steps import Step
from assayfolio.workflow.workspace import Workspace, shown_path

HISTORY_FORMAT = "assayfolio-history/1"
HISTORY_FILE = "data/context/history.json"
DEFINITION_ENDINGS = frozenset({".yaml", ".yml"})
DATA_FOLDER = "data"


def enter_received(trail: TrailWriter, seen: SeenFiles) -> None:
    """Enter every raw data file among `seen` whose bytes the trail does not know yet."""
    known = set(read_register(trail.entries).digests)
    for file in seen.files:
        if file.role == "raw data" and file.sha256 not in known:
            known.add(file.sha256)
            details = received_details(file.path, file.size, file.sha256, seen.study_id)
            subject = seen.study_id or "workspace"
            trail.append(RECEIVED, subject, None, {"step": int(Step.READ), **details})


def input_details(files: Sequence[AnyInput]) -> dict[str, Json]:
    """What the entry of a run says of its inputs: digests by path, and which of them are what."""
    by_role: dict[str, list[str]] = {}
    for file in files:
        by_role.setdefault(file.role, []).append(file.path)
    return inputs_details(
        {file.path: file.sha256 for file in files},
        plan=next(iter(by_role.get("study definition", ())), None),
        exclusions=next(iter(by_role.get("exclusions", ())), None),
        data=by_role.get("raw data", []),
    )


def execution_history(trail: TrailWriter, subject: str) -> dict[str, Json]:
    """The executions before the run `subject` on its data, as the trail knows them when it is allotted.

    `execution` is the run's own place from one; `earlier` the executions before it, `also_used_by` other runs
    on these data or a part of them, each with the digest of its plan and what had become of it.
    """
    register = read_register(trail.entries)
    executions = register.executions(subject)
    assert executions is not None, "an allotted run has read its data"
    data = executions.use.data
    return {
        "format": HISTORY_FORMAT,
        "study": executions.use.study,
        "run": run_name(executions.use.number),
        "plan": executions.use.plan,
        "exclusions": executions.use.exclusions,
        "trail_head": {"seq": trail.head.seq, "sha256": trail.head.sha256},
        "data": [
            {"path": file.path, "sha256": file.sha256, "first_seen": file.time, "first_seen_seq": file.seq}
            for file in register.received
            if file.sha256 in data
        ],
        "execution": executions.number,
        "earlier": [_use_document(use) for use in executions.earlier],
        "also_used_by": [
            {**_use_document(use), "data": "all" if use.data == data else "some"} for use in executions.others
        ],
        "void": _void_runs(trail.entries, (*executions.earlier, *executions.others)),
    }


def _void_runs(entries: Sequence[TrailEntry], uses: Sequence[DataUse]) -> list[Json]:
    """Those of `uses` that are void by now, with the reference of the investigation."""
    standings = run_standings(entries)
    voided = ((use, standings[use.subject].voided) for use in uses)
    return [
        {"run": use.subject, "time": void.time, "investigation": void.investigation}
        for use, void in voided
        if void is not None
    ]


def _use_document(use: DataUse) -> dict[str, Json]:
    return {
        "study": use.study,
        "run": run_name(use.number),
        "outcome": use.outcome,
        "plan": use.plan,
        "exclusions": use.exclusions,
    }


def executions_record(history: Mapping[str, Any]) -> dict[str, Json]:
    """What the run's own record says of its execution history: its number, and the plan versions so far."""
    versions = Counter((use["plan"], use["exclusions"]) for use in (*history["earlier"], history))
    return {
        "number": history["execution"],
        "plan_versions": [
            {"plan": plan, "exclusions": exclusions, "runs": runs}
            for (plan, exclusions), runs in versions.items()
        ],
        "also_used_by": [f"{use['study']}/{use['run']}" for use in history["also_used_by"]],
    }


@dataclass(frozen=True, slots=True)
class DataRegister:
    """Every data file with its state; `unread` names the definitions that could not be read, with the reason.

    What an unread definition names is not known, so a file that only it names counts as named by none.
    """

    register: Register
    files: tuple[DataFile, ...]
    unread: tuple[tuple[str, str], ...]
    standings: Mapping[str, RunStanding]

    def in_state(self, state: str) -> tuple[DataFile, ...]:
        """The files in this state."""
        return tuple(file for file in self.files if file.state == state)

    def executions(self, use: DataUse) -> Executions | None:
        """The place of a run among the executions on its data."""
        return self.register.executions(use.subject)


def data_register(workspace: Workspace, reading: TrailReading) -> DataRegister:
    """The register of the workspace as the trail and its folders stand now. Nothing is written."""
    register = read_register(reading.entries)
    named, exclusions, unread = _named_files(workspace)
    places = {path: frozenset(studies) for path, studies in named.items()}
    for path in _files_in_data_folders(workspace.root / "configs"):
        if path not in exclusions:
            places.setdefault(path, frozenset())
    for file in register.received:
        places.setdefault(workspace.root / file.path, frozenset())
    standing = [_standing(workspace, path, studies) for path, studies in places.items() if path.is_file()]
    return DataRegister(
        register, data_files(register, standing), tuple(unread), run_standings(reading.entries)
    )


def _named_files(
    workspace: Workspace,
) -> tuple[dict[Path, set[str]], set[Path], list[tuple[str, str]]]:
    """What definitions name, raw data files with the studies and files of exclusions; the faulty ones."""
    named: dict[Path, set[str]] = {}
    exclusions: set[Path] = set()
    unread = []
    for path in _definitions(workspace):
        file = workspace.name_of(path)
        try:
            study = read_study(path.read_bytes(), file)
            sources = named_raw_files(workspace, path, study.data)
        except (AssayfolioError, OSError) as error:
            unread.append((file, str(error).splitlines()[0]))
            continue
        if study.data.exclusions is not None:
            exclusions.add((path.parent / study.data.exclusions).resolve())
        for source in sources:
            real = source.resolve()
            if real.is_relative_to(workspace.root):
                named.setdefault(real, set()).add(study.study)
    return named, exclusions, unread


def _definitions(workspace: Workspace) -> Iterator[Path]:
    settings = (workspace.settings, workspace.people)
    for path in _files_below(workspace.root / "configs"):
        inside = path.relative_to(workspace.root / "configs").parts[:-1]
        if path.suffix in DEFINITION_ENDINGS and DATA_FOLDER not in inside and path not in settings:
            yield path


def _files_in_data_folders(configs: Path) -> Iterator[Path]:
    for path in _files_below(configs):
        if DATA_FOLDER in path.relative_to(configs).parts[:-1]:
            yield path


def _files_below(folder: Path) -> Iterator[Path]:
    """Regular files that are not hidden, in a fixed order; links are left out, what they lead to counts."""
    for place, folders, names in os.walk(folder):
        folders[:] = sorted(name for name in folders if not name.startswith("."))
        for name in sorted(names):
            path = Path(place, name)
            if not name.startswith(".") and path.is_file() and not path.is_symlink():
                yield path


def _standing(workspace: Workspace, path: Path, studies: frozenset[str]) -> StandingFile:
    try:
        with path.open("rb") as stream:
            size = os.fstat(stream.fileno()).st_size
            digest = hashlib.file_digest(stream, "sha256").hexdigest()
    except OSError:
        size, digest = 0, None
    return StandingFile(shown_path(path.relative_to(workspace.root)), size, digest, tuple(sorted(studies)))
