"""Founding a new workspace: settings, a first study to edit, and the audit trail from its first entry on."""

from importlib.resources import files
from pathlib import Path

from assayfolio.errors import InputError, MachineError
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.settings_files import enter_provisional_settings, settings_texts
from assayfolio.workflow.workspace import SETTINGS, Workspace

STARTER_FILES = ("configs/lab.yaml", "configs/first-study.yaml", "configs/data/first-study.csv")


def found_workspace(folder: Path) -> Workspace:
    """Found a new workspace in `folder`: settings, a first study to edit, `runs/` with its audit trail.

    Raises InputError where `folder` already holds a workspace or any file that would be overwritten.
    """
    root = folder.resolve()
    if (root / SETTINGS).exists():
        raise InputError(f"{folder} is a workspace already: it has {SETTINGS}.")
    taken = [name for name in (*STARTER_FILES, "runs") if (root / name).exists()]
    if taken:
        raise InputError(f"{folder} already has {', '.join(taken)}; nothing was changed.")
    starter = files("assayfolio.workflow") / "starter"
    try:
        for name in reversed(STARTER_FILES):  # the settings last: they make the folder a workspace
            target = root / name
            target.parent.mkdir(parents=True, exist_ok=True)
            target.write_bytes((starter / Path(name).name).read_bytes())
        (root / "runs").mkdir()
    except OSError as error:
        raise MachineError(f"The workspace could not be founded: {error}.") from error
    workspace = Workspace(root)
    with trail_book(workspace, 10.0) as trail:
        trail.append("founded", "workspace", "a new workspace was founded")
        enter_provisional_settings(trail, settings_texts(workspace))
    return workspace
