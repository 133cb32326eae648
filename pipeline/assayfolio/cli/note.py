"""Noting in the audit trail that a command is about to show something."""

from collections.abc import Sequence
from pathlib import Path

from assayfolio.cli.outcome import complain


def note_reading(
    named_workspace: Path | None, command: str, arguments: Sequence[str], start: Path | None = None
) -> None:
    """Enter it where the laboratory's settings say so; complain where that could not be done."""
    from assayfolio.workflow.reading_log import enter_reading

    words = enter_reading(named_workspace, start or Path(), command, arguments)
    if words is not None:
        complain(words)
