"""The witnesses of a workspace's audit trail, as its settings name them."""

from collections.abc import Iterable, Sequence
from contextlib import suppress
from pathlib import Path

from assayfolio.errors import AssayfolioError, InputError
from assayfolio.evidence.entries import TrailEntry, TrailHead, is_digest
from assayfolio.evidence.settings import open_proposal, settings_in_force
from assayfolio.evidence.time_stamps import StampWitness
from assayfolio.evidence.witnesses import FileWitness, FolderWitness, PrintedHead, Witness
from assayfolio.study.laboratory_file import read_laboratory
from assayfolio.study.settings_document import LABORATORY_FILE
from assayfolio.workflow.workspace import Workspace, read_input


def witnesses_of(workspace: Workspace, entries: Sequence[TrailEntry]) -> tuple[Witness, ...]:
    """Every witness that the settings name: those in force, those proposed, and those in the file as it lies.

    A file that was edited takes no witness away before the change is in force. Settings that cannot be read
    name none.
    """
    contents: list[bytes] = []
    for known in (settings_in_force(entries), open_proposal(entries)):
        text = None if known is None else known.texts[LABORATORY_FILE]
        contents.extend([] if text is None else [text.encode("utf-8")])
    with suppress(AssayfolioError):
        contents.append(read_input(workspace, workspace.settings, "laboratory's settings file"))
    named = [witness for content in dict.fromkeys(contents) for witness in _named(workspace, content)]
    return distinct(named)


def distinct(witnesses: Iterable[Witness]) -> tuple[Witness, ...]:
    """Each witness once, in their order."""
    return tuple({witness.name: witness for witness in witnesses}.values())


def _named(workspace: Workspace, content: bytes) -> list[Witness]:
    if b"witnesses" not in content:
        return []
    try:
        laboratory = read_laboratory(content, LABORATORY_FILE)
    except AssayfolioError:
        return []
    found: list[Witness] = []
    for each in laboratory.witnesses:
        if each.kind == "file":
            found.append(FileWitness(Path(each.target)))
        elif each.kind == "folder":
            found.append(FolderWitness(Path(each.target)))
        else:
            found.append(StampWitness(each.target, workspace.runs))
    return found


def witness_at(place: Path) -> Witness:
    """The witness at a path that is given by hand. Raises InputError where nothing is there."""
    if place.is_dir():
        return FolderWitness(place.absolute())
    if place.is_file():
        return FileWitness(place.absolute())
    raise InputError(f"{place} is neither a file nor a folder, so no witness can be read there.")


def printed_head(text: str) -> Witness:
    """The head that is given as NUMBER:SHA256. Raises InputError for anything else."""
    number, _, digest = text.partition(":")
    if not (number.isascii() and number.isdecimal() and 0 < len(number) < 16 and is_digest(digest)):
        raise InputError(f"{text!r} is no trail head; write number, colon and the 64 hexadecimal digits.")
    if int(number) == 0:
        raise InputError("The head before the first entry tells nothing.")
    return PrintedHead(TrailHead(int(number), digest))
