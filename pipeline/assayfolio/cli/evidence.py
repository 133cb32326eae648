"""Commands about evidence: verify folios and the trail, show the trail."""

import json
from pathlib import Path

import click

from assayfolio.cli.options import json_option, workspace_option
from assayfolio.cli.outcome import complain, say
from assayfolio.errors import ExitCode


@click.command(
    epilog="\b\nExamples:\n  assayfolio verify\n  assayfolio verify runs/WHP-101/run-0001\n\n"
    "Exit code 0: all passed; 1: something failed; 5: nothing failed, something was not checkable."
)
@click.argument("folios", metavar="[FOLIO]...", nargs=-1, type=click.Path(path_type=Path))
@workspace_option
@json_option
def verify(folios: tuple[Path, ...], named_workspace: Path | None, as_json: bool) -> int:
    """Verify folios and the audit trail.

    Without FOLIO, every folio of the workspace. Numbered checks, each passed, failed or not checkable with
    its reason; every changed, missing or extra file is named. Nothing is repaired.
    """
    from assayfolio.workflow.audit import verification_document, verification_lines, verify_all

    verification = verify_all(named_workspace, folios)
    if as_json:
        say(json.dumps(verification_document(verification), ensure_ascii=False, indent=1))
    else:
        for line in verification_lines(verification):
            say(line)
    return int(verification.exit_code)


@click.command(epilog="\b\nExample:\n  assayfolio trail --json")
@workspace_option
@json_option
def trail(named_workspace: Path | None, as_json: bool) -> int:
    """Show the audit trail.

    Oldest entry first; faults of the trail itself go to standard error, with exit code 1.
    """
    from assayfolio.workflow.audit import trail_document, trail_lines, trail_of

    reading = trail_of(named_workspace)
    if as_json:
        say(json.dumps(trail_document(reading), ensure_ascii=False, indent=1))
    else:
        for line in trail_lines(reading):
            say(line)
    for fault in reading.faults:
        complain(f"The audit trail is not whole: {fault}")
    return int(ExitCode.FINDING if reading.faults else ExitCode.DONE)
