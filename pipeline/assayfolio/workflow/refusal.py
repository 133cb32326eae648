"""What the first step of a run leaves in the trail where it refuses: what was read, and every fault."""

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from assayfolio.canonical import Json
from assayfolio.errors import AssayfolioError, InputError, MachineError
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.intake import SeenFiles
from assayfolio.workflow.recovery import found_trail
from assayfolio.workflow.register import enter_received, input_details
from assayfolio.workflow.steps import Step
from assayfolio.workflow.workspace import Workspace, shown_path

DEFAULT_WAIT_SECONDS = 10.0


@contextmanager
def refusal_entered(workspace: Workspace, study_path: Path, seen: SeenFiles) -> Iterator[None]:
    """Enter a `refused` run for any error of ours that is raised inside, and let the error go on.

    Raises MachineError with both where the refusal cannot be entered.
    """
    try:
        yield
    except AssayfolioError as error:
        try:
            enter_refusal(workspace, study_path, seen, error)
        except AssayfolioError as second:
            raise MachineError(f"{error}\nThe refusal could not be entered in the trail: {second}") from error
        raise


def enter_refusal(workspace: Workspace, study_path: Path, seen: SeenFiles, error: AssayfolioError) -> None:
    """Enter that a run was refused: the study or its file, the reason, the digests of what was read."""
    subject = seen.study_id or _relative_name(workspace, study_path)
    details: dict[str, Json] = {
        "step": int(Step.READ),
        **input_details(seen.files),
        "faults": [holdable(str(fault)) for fault in error.faults] if isinstance(error, InputError) else [],
        "more_faults": error.hidden if isinstance(error, InputError) else 0,
    }
    reason = error.headline if isinstance(error, InputError) else str(error)
    with trail_book(workspace, DEFAULT_WAIT_SECONDS) as trail:
        found_trail(workspace, trail)
        enter_received(trail, seen)
        trail.append("refused", holdable(subject), holdable(reason), details)


def holdable(text: str) -> str:
    """`text` as UTF-8 can hold it; lone surrogates appear escaped."""
    return text.encode("utf-8", "backslashreplace").decode("utf-8")


def _relative_name(workspace: Workspace, path: Path) -> str:
    resolved = path.resolve()
    inside = resolved.is_relative_to(workspace.root)
    return shown_path(resolved.relative_to(workspace.root) if inside else resolved)
