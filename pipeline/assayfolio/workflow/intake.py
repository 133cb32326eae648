"""Step 1 of a run: read every input once, and validate what was read.

The bytes that are hashed are the bytes that are parsed. `Intake` grows as files are read, so that a refused
run can still say which bytes it saw.
"""

from dataclasses import dataclass, field
from pathlib import Path
from typing import Literal

from assayfolio.canonical import sha256_hex
from assayfolio.errors import Fault, InputError, Place, StudyError
from assayfolio.fit import check_fit
from assayfolio.observations.reading import read_all_observations
from assayfolio.observations.values import Observations
from assayfolio.study.availability import check_required
from assayfolio.study.exclusions import read_exclusions
from assayfolio.study.plan import Laboratory, StudyDefinition
from assayfolio.study.reading import read_laboratory, read_study
from assayfolio.workflow.large_intake import LargeInputFile, archived_file, large_files, streamed, streams
from assayfolio.workflow.raw_files import FOLDER, raw_files, read_raw_files, some_raw_file_exists
from assayfolio.workflow.workspace import PEOPLE, Workspace, read_input
from assayfolio.worksheet.rows import check_worksheet

Role = Literal["study definition", "raw data", "exclusions", "laboratory settings", "people"]


PLACEHOLDER = "Name of your laboratory"


@dataclass(frozen=True, slots=True)
class InputFile:
    """One input as read: what it is, its path in the workspace and in the folio, its bytes."""

    role: Role
    path: str
    folio_path: str
    content: bytes

    @property
    def size(self) -> int:
        """The number of bytes."""
        return len(self.content)

    @property
    def sha256(self) -> str:
        """The digest of the bytes that were read."""
        return sha256_hex(self.content)


AnyInput = InputFile | LargeInputFile


@dataclass(slots=True)
class SeenFiles:
    """The inputs that have been read so far, for the record of a run that is refused."""

    study_id: str | None = None
    files: list[AnyInput] = field(default_factory=list)


@dataclass(frozen=True, slots=True)
class Intake:
    """The validated inputs of a run; the observations of each response, in the order of the plan."""

    study: StudyDefinition
    laboratory: Laboratory
    observations: tuple[Observations, ...]
    files: tuple[AnyInput, ...]


def read_plan(workspace: Workspace, study_path: Path, seen: SeenFiles) -> tuple[StudyDefinition, Laboratory]:
    """Read and validate the laboratory's settings and the study definition; the data file is not needed.

    Raises InputError with every fault of the first file that has any.
    """
    settings = read_input(workspace, workspace.settings, "laboratory's settings file")
    lab_file = workspace.name_of(workspace.settings)
    seen.files.append(InputFile("laboratory settings", lab_file, "data/context/lab.yaml", settings))
    if workspace.people.exists():
        people = read_input(workspace, workspace.people, "list of people")
        seen.files.append(InputFile("people", PEOPLE, "data/context/people.yaml", people))
    content = read_input(workspace, study_path, "study definition")
    study_file = workspace.name_of(study_path.resolve())
    seen.files.append(InputFile("study definition", study_file, "data/study.yaml", content))
    laboratory = read_laboratory(settings, lab_file)
    _require_name(laboratory, lab_file)
    study = read_study(content, study_file)
    seen.study_id = study.study
    check_required(study, laboratory)
    if study.worksheet is not None:
        check_worksheet(study)
    return study, laboratory


def _require_name(laboratory: Laboratory, lab_file: str) -> None:
    if laboratory.name == PLACEHOLDER:
        fault = Fault(Place(lab_file), f"it still says {PLACEHOLDER!r}", "put your laboratory's name there")
        raise StudyError("The laboratory has no name yet.", (fault,))


def read_intake(workspace: Workspace, study_path: Path, seen: SeenFiles) -> Intake:
    """Read and validate plan and data, and make sure that the one fits the other."""
    study, laboratory = read_files(workspace, study_path, seen)
    return validated(study, laboratory, tuple(seen.files))


def read_files(workspace: Workspace, study_path: Path, seen: SeenFiles) -> tuple[StudyDefinition, Laboratory]:
    """Read and validate the plan, and read the files that it names; the data are not looked into yet.

    Raises InputError where the plan is faulty or a file cannot be read; `seen` then holds those that were.
    """
    study, laboratory = read_plan(workspace, study_path, seen)
    paths = raw_files(workspace, study_path, study.data)
    if streams(paths, study.data, workspace.root):
        for file in large_files(workspace, paths, FOLDER):
            seen.files.append(file)
    else:
        for path, (name, content) in zip(paths, read_raw_files(workspace, paths), strict=True):
            seen.files.append(InputFile("raw data", name, f"{FOLDER}/{path.name}", content))
    if study.data.exclusions is not None:
        exclusions = study_path.resolve().parent / study.data.exclusions
        content = read_input(workspace, exclusions, "exclusions file")
        name = workspace.name_of(exclusions.resolve())
        seen.files.append(InputFile("exclusions", name, "data/context/exclusions.yaml", content))
    return study, laboratory


def validated(study: StudyDefinition, laboratory: Laboratory, files: tuple[AnyInput, ...]) -> Intake:
    """The intake made of a plan and its files, the raw data among them."""
    observations = _observations(study, files)
    check_fit(study, observations)
    return Intake(study, laboratory, observations, files)


def _observations(study: StudyDefinition, files: tuple[AnyInput, ...]) -> tuple[Observations, ...]:
    large = [file for file in files if isinstance(file, LargeInputFile)]
    if large:
        return streamed(large, study)
    held = [file for file in files if isinstance(file, InputFile)]
    raw = [(file.path, file.content) for file in held if file.role == "raw data"]
    exclusions = [
        exclusion
        for file in held
        if file.role == "exclusions"
        for exclusion in read_exclusions(file.content, file.path)
    ]
    return read_all_observations(raw, study.data, study.measurement, exclusions)


def data_file_exists(workspace: Workspace, study_path: Path, study: StudyDefinition) -> bool:
    """Whether any data file of `study` is there yet; a plan can be checked before it is."""
    return some_raw_file_exists(workspace, study_path, study.data)


def folio_intake(folio: Path, inputs: tuple[tuple[Role, str, str], ...]) -> Intake:
    """The intake of an archived run, from its folio alone.

    `inputs` are (role, path in the workspace, path in the folio), as the run recorded them.
    """
    held = {
        role: InputFile(role, path, folio_path, _archived(folio, folio_path))
        for role, path, folio_path in inputs
        if role != "raw data"
    }
    study_file, lab_file = held["study definition"], held["laboratory settings"]
    study = read_study(study_file.content, study_file.path)
    laboratory = read_laboratory(lab_file.content, lab_file.path)
    raw = [folio / inside for role, _, inside in inputs if role == "raw data"]
    large = streams(raw, study.data, folio.resolve())
    files: list[AnyInput] = []
    for role, path, folio_path in inputs:
        if role != "raw data":
            files.append(held[role])
        elif large:
            files.append(archived_file(path, folio_path, folio / folio_path))
        else:
            files.append(InputFile(role, path, folio_path, _archived(folio, folio_path)))
    return validated(study, laboratory, tuple(files))


def _archived(folio: Path, folio_path: str) -> bytes:
    try:
        return (folio / folio_path).read_bytes()
    except OSError as error:
        fault = Fault(Place(f"{folio.name}/{folio_path}"), str(error.strerror))
        raise InputError(f"{folio} cannot be read as a run's folio.", (fault,)) from error
