"""Step 1 of a run: read every input once, and validate what was read.

The bytes that are hashed are the bytes that are parsed. `Intake` grows as files are read, so that a refused
run can still say which bytes it saw.
"""

from dataclasses import dataclass, field
from pathlib import Path
from typing import Literal

from assayfolio.canonical import sha256_hex
from assayfolio.errors import DataError, Fault, InputError, Place, StudyError
from assayfolio.evidence.folio import name_fault
from assayfolio.fit import check_fit
from assayfolio.observations.reading import read_all_observations
from assayfolio.observations.values import Observations
from assayfolio.study.availability import check_available, check_required
from assayfolio.study.plan import Laboratory, StudyDefinition
from assayfolio.study.reading import read_laboratory, read_study
from assayfolio.workflow.workspace import Workspace, read_input, shown_path

Role = Literal["study definition", "raw data", "laboratory settings"]


PLACEHOLDER = "Name of your laboratory"


@dataclass(frozen=True, slots=True)
class InputFile:
    """One input as read: what it is, its path in the workspace and in the folio, its bytes."""

    role: Role
    path: str
    folio_path: str
    content: bytes

    @property
    def sha256(self) -> str:
        """The digest of the bytes that were read."""
        return sha256_hex(self.content)


@dataclass(slots=True)
class SeenFiles:
    """The inputs that have been read so far, for the record of a run that is refused."""

    study_id: str | None = None
    files: list[InputFile] = field(default_factory=list)


@dataclass(frozen=True, slots=True)
class Intake:
    """The validated inputs of a run; the observations of each response, in the order of the plan."""

    study: StudyDefinition
    laboratory: Laboratory
    observations: tuple[Observations, ...]
    files: tuple[InputFile, ...]


def read_plan(workspace: Workspace, study_path: Path, seen: SeenFiles) -> tuple[StudyDefinition, Laboratory]:
    """Read and validate the laboratory's settings and the study definition; the data file is not needed.

    Raises InputError with every fault of the first file that has any.
    """
    settings = read_input(workspace, workspace.settings, "laboratory's settings file")
    lab_file = workspace.name_of(workspace.settings)
    seen.files.append(InputFile("laboratory settings", lab_file, "data/context/lab.yaml", settings))
    content = read_input(workspace, study_path, "study definition")
    study_file = workspace.name_of(study_path.resolve())
    seen.files.append(InputFile("study definition", study_file, "data/study.yaml", content))
    laboratory = read_laboratory(settings, lab_file)
    _require_name(laboratory, lab_file)
    study = read_study(content, study_file)
    seen.study_id = study.study
    check_available(study)
    check_required(study, laboratory)
    return study, laboratory


def _require_name(laboratory: Laboratory, lab_file: str) -> None:
    if laboratory.name == PLACEHOLDER:
        fault = Fault(Place(lab_file), f"it still says {PLACEHOLDER!r}", "put your laboratory's name there")
        raise StudyError("The laboratory has no name yet.", (fault,))


def read_intake(workspace: Workspace, study_path: Path, seen: SeenFiles) -> Intake:
    """Read and validate plan and data, and make sure that the one fits the other."""
    study, laboratory = read_plan(workspace, study_path, seen)
    data_path = study_path.resolve().parent / study.data.file
    fault = name_fault(f"data/inputs/{data_path.name}")
    if fault is not None:
        advice = "rename the file"
        raise DataError(
            "The data file cannot be kept under its name.",
            (Fault(Place(shown_path(data_path)), f"{data_path.name!r}: {fault}", advice),),
        )
    content = read_input(workspace, data_path, "data file")
    data_file = workspace.name_of(data_path.resolve())
    seen.files.append(InputFile("raw data", data_file, f"data/inputs/{data_path.name}", content))
    return validated(study, laboratory, tuple(seen.files))


def validated(study: StudyDefinition, laboratory: Laboratory, files: tuple[InputFile, ...]) -> Intake:
    """The intake made of a plan and its files, the raw data among them."""
    raw = next(file for file in files if file.role == "raw data")
    observations = read_all_observations(raw.content, study.data, raw.path)
    check_fit(study, observations)
    return Intake(study, laboratory, observations, files)


def data_file_exists(study_path: Path, study: StudyDefinition) -> bool:
    """Whether the data file of `study` is there yet; a plan can be checked before it is."""
    path = study_path.resolve().parent / study.data.file
    if path.is_symlink() and not path.exists():
        fault = Fault(Place(shown_path(path)), "is a symbolic link that leads nowhere")
        raise DataError("The data file cannot be read.", (fault,))
    return path.exists()


def folio_intake(folio: Path, inputs: tuple[tuple[Role, str, str], ...]) -> Intake:
    """The intake of an archived run, from its folio alone.

    `inputs` are (role, path in the workspace, path in the folio), as the run recorded them.
    """
    seen = []
    for role, path, folio_path in inputs:
        try:
            content = (folio / folio_path).read_bytes()
        except OSError as error:
            fault = Fault(Place(f"{folio.name}/{folio_path}"), str(error.strerror))
            raise InputError(f"{folio} cannot be read as a run's folio.", (fault,)) from error
        seen.append(InputFile(role, path, folio_path, content))
    by_role = {file.role: file for file in seen}
    study_file, lab_file = by_role["study definition"], by_role["laboratory settings"]
    study = read_study(study_file.content, study_file.path)
    laboratory = read_laboratory(lab_file.content, lab_file.path)
    return validated(study, laboratory, tuple(seen))
