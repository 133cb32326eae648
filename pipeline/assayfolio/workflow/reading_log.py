"""Entering in the trail that something was shown, where the laboratory's settings say so."""

from collections.abc import Sequence
from pathlib import Path

from assayfolio.canonical import Json
from assayfolio.errors import AssayfolioError
from assayfolio.study.laboratory_file import read_laboratory
from assayfolio.study.settings_document import LABORATORY_FILE
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.recovery import found_trail
from assayfolio.workflow.workspace import find_workspace, read_input

READ = "read"


def enter_reading(
    named_workspace: Path | None, start: Path, command: str, arguments: Sequence[str]
) -> str | None:
    """Enter that `command` is about to show something, if `log-reading` is set.

    `arguments` are what it shows. Returns words where that could not be entered: whoever may only look is not
    kept from looking, and a broken trail has to be looked at. Where there is no workspace, or its settings
    cannot be read, nothing is entered.
    """
    try:
        workspace = find_workspace(named_workspace, start)
        content = read_input(workspace, workspace.settings, "laboratory's settings file")
        laboratory = read_laboratory(content, LABORATORY_FILE)
    except AssayfolioError:
        return None
    if not laboratory.log_reading:
        return None
    try:
        with trail_book(workspace, laboratory.wait_seconds) as trail:
            found_trail(workspace, trail)
            details: dict[str, Json] = {"command": command, "arguments": list(arguments)}
            trail.append(READ, f"assayfolio {command}", None, details)
    except AssayfolioError as error:
        return f"That this was read could not be entered in the audit trail: {error}"
    return None
