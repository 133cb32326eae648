"""Options and arguments that several commands share."""

from collections.abc import Callable
from pathlib import Path
from typing import Any, TypeVar

import click

Command = TypeVar("Command", bound=Callable[..., Any])

STUDY = click.Path(path_type=Path)


def study_argument(command: Command) -> Command:
    """The study definition that a command works on."""
    return click.argument("study", type=STUDY)(command)


def workspace_option(command: Command) -> Command:
    """The workspace, where it is not the nearest folder upward."""
    return click.option(
        "--workspace",
        "named_workspace",
        type=click.Path(path_type=Path),
        metavar="DIR",
        help="The workspace; by default the nearest folder upward with configs/lab.yaml.",
    )(command)


def json_option(command: Command) -> Command:
    """Answer for programs."""
    return click.option("--json", "as_json", is_flag=True, help="Answer as one JSON document.")(command)
