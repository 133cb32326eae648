"""The command that makes the register's pages."""

import json
from pathlib import Path

import click

from assayfolio.cli.note import note_reading
from assayfolio.cli.options import json_option, workspace_option
from assayfolio.cli.outcome import complain, say

_TOLD_EVERY = 1000


@click.command(
    epilog="\b\nExamples:\n  assayfolio index\n  assayfolio index --rebuild\n\n"
    "Exit code 0: done; 1: done, and the audit trail or a folio is not as it should be."
)
@workspace_option
@click.option("--rebuild", is_flag=True, help="Read everything again, all folios with it.")
@json_option
def index(named_workspace: Path | None, rebuild: bool, as_json: bool) -> int:
    """Make the register: pages about all runs, for a browser.

    Writes runs/index.html and what belongs to it in runs/_register: every run with its state, verdicts,
    criteria and folio, a page for each study and run; search, filters and sorting work without a server. Only
    what is new in the audit trail is read, and the folios that it concerns are looked at. The register is no
    record: it comes from the audit trail and the folios, and --rebuild makes the same bytes from them.
    """
    from assayfolio.workflow.index import rebuild_register, update_register
    from assayfolio.workflow.workspace import find_workspace

    note_reading(named_workspace, "index", ["--rebuild"] if rebuild else [])
    make = rebuild_register if rebuild else update_register
    outcome = make(find_workspace(named_workspace, Path()), _tell_nothing if as_json else _tell)
    if as_json:
        say(json.dumps(outcome.document(), ensure_ascii=False, indent=1))
    else:
        for line in outcome.lines():
            say(line)
    return int(outcome.exit_code)


def _tell(done: int, of: int) -> None:
    if done and done % _TOLD_EVERY == 0:
        complain(f"{done:>7} of {of} runs")


def _tell_nothing(done: int, of: int) -> None:
    """A program that asked for JSON gets nothing else."""
