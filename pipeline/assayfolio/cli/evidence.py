"""Commands about evidence: verify folios and the trail, show the trail."""

import json
from collections.abc import Mapping
from pathlib import Path

import click

from assayfolio.canonical import Json
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
    its reason; every changed, missing or extra file is named. Raw data that no completed run has read are
    mentioned, too: that is information and changes no exit code. Nothing is repaired.
    """
    from assayfolio.workflow.audit import (
        unfinished_data,
        verification_document,
        verification_lines,
        verify_all,
    )
    from assayfolio.workflow.register_words import unfinished_document, unfinished_lines

    verification = verify_all(named_workspace, folios)
    data = None if folios else unfinished_data(named_workspace)
    if as_json:
        document = dict(verification_document(verification))
        if data is not None:
            document["raw_data"] = unfinished_document(data)
        say(json.dumps(document, ensure_ascii=False, indent=1))
    else:
        for line in verification_lines(verification, unfinished_lines(data) if data is not None else ()):
            say(line)
    return int(verification.exit_code)


@click.command(epilog="\b\nExamples:\n  assayfolio trail --json\n  assayfolio trail --data")
@workspace_option
@click.option("--data", "about_data", is_flag=True, help="Show the register of raw data files instead.")
@json_option
def trail(named_workspace: Path | None, about_data: bool, as_json: bool) -> int:
    """Show the audit trail, or every raw data file that it knows.

    Oldest entry first; faults of the trail itself go to standard error, with exit code 1. With --data, each
    raw data file with its state: used in a completed run; open, not in one yet; orphan, where no study
    definition in configs/ would bring it into one. Runs are counted: execution 2 of 3 on these data.
    """
    from assayfolio.workflow.audit import register_of, trail_document, trail_lines, trail_of
    from assayfolio.workflow.register_words import register_document, register_lines

    if about_data:
        register, reading = register_of(named_workspace)
        lines: list[str] = register_lines(register)
        document: Mapping[str, Json] = register_document(register)
    else:
        reading = trail_of(named_workspace)
        lines, document = trail_lines(reading), trail_document(reading)
    if as_json:
        say(json.dumps(document, ensure_ascii=False, indent=1))
    else:
        for line in lines:
            say(line)
    for fault in reading.faults:
        complain(f"The audit trail is not whole: {fault}")
    return int(ExitCode.FINDING if reading.faults else ExitCode.DONE)
