"""Which raw data files a study means, and reading them: listed ones, or all that fit its pattern."""

import re
from collections.abc import Iterator, Sequence
from pathlib import Path

from assayfolio.canonical import sha256_hex
from assayfolio.errors import DataError, Fault, Place
from assayfolio.evidence.manifest import collisions, name_fault
from assayfolio.study.paths import is_pattern
from assayfolio.study.plan import DataPlan
from assayfolio.workflow.workspace import MAX_FILE_BYTES, Workspace, read_input, shown_path

FOLDER = "data/inputs"
MOST_FILES = 1_000

_UNREADABLE = "The data files cannot be read."


def raw_files(workspace: Workspace, study_path: Path, plan: DataPlan) -> tuple[Path, ...]:
    """The paths of the raw data files: as the plan lists them, or those that fit its pattern, sorted by name.

    Raises DataError where no file fits the pattern, where there are more than 1,000, where a name cannot be
    kept in a folio, or where two files could not be kept side by side.
    """
    folder = study_path.resolve().parent
    paths = tuple(path for source in plan.sources for path in _named(workspace, folder, source))
    if len(paths) > MOST_FILES:
        fault = Fault(Place(plan.file), f"{len(paths):,} files, more than {MOST_FILES:,}", "divide the study")
        raise DataError(_UNREADABLE, (fault,))
    _refuse_names(paths)
    return paths


def read_raw_files(workspace: Workspace, paths: Sequence[Path]) -> Iterator[tuple[str, bytes]]:
    """The name in the workspace and the bytes of each file, one after the other.

    Raises InputError where one is missing, leads outside the workspace or is no regular file; DataError
    behind the file with which they are more than 512 MB together, or that holds the same bytes as an earlier
    one, whose values would be taken twice.
    """
    first: dict[str, Path] = {}
    size = 0
    for path in paths:
        content = read_input(workspace, path, "data file")
        yield workspace.name_of(path.resolve()), content
        size += len(content)
        earlier = first.setdefault(sha256_hex(content), path)
        if earlier is not path:
            found = f"holds the same bytes as {shown_path(earlier)}"
            advice = "take one of the two out of the study: its values would be taken twice"
            raise DataError(_UNREADABLE, (Fault(Place(shown_path(path)), found, advice),))
        if size > MAX_FILE_BYTES:
            found = f"with it the data files have more than {MAX_FILE_BYTES // 2**20} MB"
            raise DataError(_UNREADABLE, (Fault(Place(shown_path(path)), found, "divide the study"),))


def named_raw_files(workspace: Workspace, study_path: Path, plan: DataPlan) -> tuple[Path, ...]:
    """The paths that the plan names, whether a run could read them or not; none for a pattern nothing fits.

    Raises DataError where a pattern's folder lies outside the workspace.
    """
    folder = study_path.resolve().parent
    found: list[Path] = []
    for source in plan.sources:
        path = folder / source
        found += _fitting(workspace, path) if is_pattern(source) else [path]
    return tuple(found)


def some_raw_file_exists(workspace: Workspace, study_path: Path, plan: DataPlan) -> bool:
    """Whether any data file of a study is there yet; a plan can be checked before there is one."""
    folder = study_path.resolve().parent
    for source in plan.sources:
        if is_pattern(source):
            if _fitting(workspace, folder / source):
                return True
            continue
        path = folder / source
        if path.is_symlink() and not path.exists():
            fault = Fault(Place(shown_path(path)), "is a symbolic link that leads nowhere")
            raise DataError("The data file cannot be read.", (fault,))
        if path.exists():
            return True
    return False


def _named(workspace: Workspace, folder: Path, source: str) -> Sequence[Path]:
    if not is_pattern(source):
        return (folder / source,)
    found = _fitting(workspace, folder / source)
    if not found:
        advice = "put the pattern right, or add the files"
        fault = Fault(Place(shown_path(folder / source)), "no file has a name that fits", advice)
        raise DataError(_UNREADABLE, (fault,))
    return found


def _fitting(workspace: Workspace, pattern: Path) -> Sequence[Path]:
    """The files whose names fit the last part of `pattern`, sorted; hidden ones (.name) never do."""
    folder = pattern.parent
    if not folder.is_dir():
        return ()
    if not folder.resolve().is_relative_to(workspace.root):
        found = f"leads outside the workspace, to {shown_path(folder.resolve())}"
        advice = f"the data files must lie inside the workspace {workspace.root}"
        raise DataError(_UNREADABLE, (Fault(Place(shown_path(folder)), found, advice),))
    parts = {"*": ".*", "?": "."}
    fits = re.compile("".join(parts.get(sign, re.escape(sign)) for sign in pattern.name), re.DOTALL)
    names = sorted(path.name for path in folder.iterdir() if not path.name.startswith("."))
    return [folder / name for name in names if fits.fullmatch(name)]


def _refuse_names(paths: Sequence[Path]) -> None:
    faults = []
    for path in paths:
        why = name_fault(f"{FOLDER}/{path.name}")
        if why is not None:
            faults.append(Fault(Place(shown_path(path)), f"{path.name!r}: {why}", "rename the file"))
    advice = "a folio keeps the data files side by side; rename one"
    first: dict[str, Path] = {}
    faults += [
        Fault(Place(shown_path(path)), _same_name(earlier, path), advice)
        for path in paths
        if (earlier := first.setdefault(path.name, path)) is not path
    ]
    for words in collisions(list(first)):
        faults.append(Fault(Place(shown_path(paths[0].parent)), words, advice))
    if faults:
        headline = "The data file cannot be kept under its name."
        raise DataError(headline, tuple(faults))


def _same_name(earlier: Path, path: Path) -> str:
    if earlier == path:
        return "is named twice in the study"
    return f"has the same file name as {shown_path(earlier)}"
