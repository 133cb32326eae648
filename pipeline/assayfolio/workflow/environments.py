"""The program that makes a run: kept once in the workspace, and named by its digest in the run's record."""

from collections.abc import Mapping

from assayfolio.canonical import Json
from assayfolio.evidence.program_store import keep_program
from assayfolio.version import VERSION
from assayfolio.workflow.own_wheel import own_wheel
from assayfolio.workflow.workspace import Workspace

NOT_INSTALLED = "not installed as a package, so no wheel of it was kept"


def program_record(workspace: Workspace) -> Mapping[str, Json]:
    """Keep the wheel of this program in the workspace; what the run's record says of it.

    `wheel` and `sha256` are None where the program runs from a checkout; `note` then says so. Raises
    MachineError where it cannot be kept.
    """
    wheel = own_wheel()
    if wheel is None:
        return {"version": VERSION, "wheel": None, "sha256": None, "note": NOT_INSTALLED}
    digest = keep_program(workspace.runs, wheel.name, wheel.content)
    return {"version": VERSION, "wheel": wheel.name, "sha256": digest, "note": None}
