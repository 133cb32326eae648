"""Raw data too many to be held in memory: hashed in blocks, then summed as they stream by.

Files of more than 100,000 lines or 32 MB together are taken so, where the plan asks for nothing that needs
the single rows; the decision follows from plan and files alone, so that a report that is rendered again
takes the same way.
"""

import gzip
import os
import stat
import zlib
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import partial
from hashlib import sha256
from pathlib import Path
from typing import BinaryIO, Final, Literal

from assayfolio.errors import DataError, Fault, InputError, MachineError, Place
from assayfolio.observations.decoding import MAX_BYTES, MAX_LINES
from assayfolio.observations.long_text import BLOCK, MOST_BYTES, LongFile, line_count
from assayfolio.observations.reading import WORKBOOK
from assayfolio.observations.streaming import kept_from_streaming, stream_observations
from assayfolio.observations.values import Observations
from assayfolio.study.plan import DataPlan, StudyDefinition
from assayfolio.workflow.workspace import Workspace, real_input, shown_path

STREAM_FROM_BYTES: Final = 32_000_000
STREAM_FROM_LINES: Final = 100_000

_SHORTEST_LINE: Final = 4  # a level, a separator, a digit, a line end


@dataclass(frozen=True, slots=True)
class LargeInputFile:
    """A raw data file that stays where it is: its path in the workspace and in the folio, where it lies."""

    role: Literal["raw data"]
    path: str
    folio_path: str
    source: Path
    size: int
    sha256: str


def streams(paths: Sequence[Path], plan: DataPlan, root: Path) -> bool:
    """Whether the files at `paths` are summed as they stream by.

    Raises DataError where they are too large for anything else and the plan needs their single rows. A file
    that is missing, or leads out of `root`, is not looked at; whoever reads it says so.
    """
    if any(path.name.lower().endswith(WORKBOOK) for path in paths):
        return False
    inside = [path for path in paths if Path(os.path.realpath(path)).is_relative_to(root)]
    sizes = [_text_size(path) for path in inside]
    lines = [_line_count(path) for path in inside] if _may_be_many(sum(sizes)) else [0]
    if sum(sizes) <= STREAM_FROM_BYTES and sum(lines) <= STREAM_FROM_LINES:
        return False
    key = kept_from_streaming(plan)
    if key is None:
        return True
    for counts, most, what in ((sizes, MAX_BYTES, "bytes of text"), (lines, MAX_LINES, "lines")):
        if sum(counts) > most:
            raise _too_many(paths, sum(counts), most, what, key)
    return False


def _may_be_many(size: int) -> bool:
    """Whether so many bytes are worth counting the lines in; so many that all is streamed are not."""
    return _SHORTEST_LINE * STREAM_FROM_LINES < size <= MAX_BYTES


def _too_many(paths: Sequence[Path], count: int, most: int, what: str, key: str) -> DataError:
    """The refusal of files that can be read neither way."""
    one = len(paths) == 1
    place = Place(shown_path(paths[0] if one else paths[0].parent))
    found = (
        f"{'has' if one else 'the data files have'} {count:,} {what}; `{key}` needs every single row, "
        f"for which {most:,} {what} are the most"
    )
    advice = f"divide the study, leave out columns that it does not need, or take `{key}` out of it"
    return DataError("The data files cannot be read.", (Fault(place, found, advice),))


def _line_count(path: Path) -> int:
    """How many lines end in a file, as far as it can be read."""
    lines = 0
    try:
        if not stat.S_ISREG(path.stat().st_mode):
            return 0
        with gzip.open(path) if path.name.lower().endswith(".gz") else path.open("rb") as file:
            for _ in range(0, MAX_BYTES, BLOCK):
                lines += line_count(file.read(BLOCK))
    except (OSError, EOFError, zlib.error):
        return lines  # whoever reads it says what is wrong
    return lines


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
