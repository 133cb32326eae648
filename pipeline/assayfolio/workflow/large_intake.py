"""Raw data files too large to be held in memory: hashed in blocks, then summed as they stream by.

Files of more than 32 MB together are taken so, where the plan asks for nothing that needs the single rows;
the decision follows from plan and files alone, so that a report that is rendered again takes the same way.
"""

import stat
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import partial
from hashlib import sha256
from pathlib import Path
from typing import BinaryIO, Final, Literal

from assayfolio.errors import DataError, Fault, InputError, MachineError, Place
from assayfolio.observations.decoding import MAX_BYTES
from assayfolio.observations.long_text import BLOCK, MOST_BYTES, LongFile
from assayfolio.observations.reading import WORKBOOK
from assayfolio.observations.streaming import kept_from_streaming, stream_observations
from assayfolio.observations.values import Observations
from assayfolio.study.plan import DataPlan, StudyDefinition
from assayfolio.workflow.workspace import Workspace, real_input, shown_path

STREAM_FROM_BYTES: Final = 32_000_000


@dataclass(frozen=True, slots=True)
class LargeInputFile:
    """A raw data file that stays where it is: its path in the workspace and in the folio, where it lies."""

    role: Literal["raw data"]
    path: str
    folio_path: str
    source: Path
    size: int
    sha256: str


def streams(paths: Sequence[Path], plan: DataPlan) -> bool:
    """Whether the files at `paths` are summed as they stream by.

    Raises DataError where one of them is too large for anything else and the plan needs its single rows.
    A missing file has no size; whoever reads it says so.
    """
    sizes = [_text_size(path) for path in paths]
    if sum(sizes) <= STREAM_FROM_BYTES or any(path.name.lower().endswith(WORKBOOK) for path in paths):
        return False
    key = kept_from_streaming(plan)
    for path, size in zip(paths, sizes, strict=True):
        if key is not None and size > MAX_BYTES:
            found = f"has {size:,} bytes of text; with `{key}` in the plan {MAX_BYTES:,} are the most"
            advice = "divide the study, or leave out columns that it does not need"
            raise DataError(
                "The data files cannot be read.", (Fault(Place(shown_path(path)), found, advice),)
            )
    return key is None


def _text_size(path: Path) -> int:
    """The size of a file, or of the text in a compressed one as its end states it (RFC 1952, 2.3.1)."""
    try:
        status = path.stat()
        size = status.st_size
        if not path.name.lower().endswith(".gz") or size < 8 or not stat.S_ISREG(status.st_mode):
            return size
        with path.open("rb") as file:
            file.seek(-4, 2)
            return max(size, int.from_bytes(file.read(4), "little"))
    except OSError:
        return 0


def large_files(workspace: Workspace, paths: Sequence[Path], folder: str) -> Iterator[LargeInputFile]:
    """Each file, hashed in blocks; `folder` is where the folio keeps them.

    Raises InputError where one is missing, leads outside the workspace or is no regular file, DataError where
    two hold the same bytes.
    """
    first: dict[str, Path] = {}
    for path in paths:
        real = real_input(workspace, path, "data file", MOST_BYTES)
        size, digest = _hashed(real)
        yield LargeInputFile("raw data", workspace.name_of(real), f"{folder}/{path.name}", real, size, digest)
        earlier = first.setdefault(digest, path)
        if earlier is not path:
            found = f"holds the same bytes as {shown_path(earlier)}"
            advice = "take one of the two out of the study: its values would be taken twice"
            raise DataError(
                "The data files cannot be read.", (Fault(Place(shown_path(path)), found, advice),)
            )


def archived_file(path: str, folio_path: str, source: Path) -> LargeInputFile:
    """A raw data file as it stands in a folio. Raises InputError where it cannot be read."""
    try:
        regular = stat.S_ISREG(source.lstat().st_mode)
        size, digest = _hashed(source) if regular else (0, "")
    except (OSError, MachineError) as error:
        raise InputError(
            "The folio cannot be read.", (Fault(Place(shown_path(source)), str(error)),)
        ) from error
    if not regular:
        raise InputError(
            "The folio cannot be read.", (Fault(Place(shown_path(source)), "is not a regular file"),)
        )
    return LargeInputFile("raw data", path, folio_path, source, size, digest)


def _hashed(path: Path) -> tuple[int, str]:
    digest, size = sha256(), 0
    try:
        with path.open("rb") as file:
            while block := file.read(BLOCK):
                digest.update(block)
                size += len(block)
    except OSError as error:
        raise MachineError(f"{shown_path(path)}: the data file cannot be read: {error.strerror}.") from error
    return size, digest.hexdigest()


def _opened(path: Path) -> BinaryIO:
    return path.open("rb")


def streamed(files: Sequence[LargeInputFile], study: StudyDefinition) -> tuple[Observations, ...]:
    """The observations of each response, as totals. Raises DataError with all faults of the files."""
    long = [LongFile(file.path, partial(_opened, file.source), sha256=file.sha256) for file in files]
    return stream_observations(long, study.data, study.measurement)
