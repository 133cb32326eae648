"""Commands about the laboratory: enter a change of its settings, void a run."""

import json
import sys
from pathlib import Path

import click

from assayfolio.cli.options import json_option, workspace_option
from assayfolio.cli.outcome import complain, say
from assayfolio.errors import ExitCode, InputError


@click.command(
    epilog="\b\nExamples:\n  assayfolio settings\n"
    '  assayfolio settings --reason "B. Berg joined as reviewer, training record TR-021"\n'
    "  assayfolio settings --confirm"
)
@workspace_option
@click.option("--reason", metavar="TEXT", help="Why the settings change; asked for where it is left out.")
@click.option("--second", metavar="ACCOUNT", help="Who is to confirm, where a second person is needed.")
@click.option("--confirm", is_flag=True, help="Confirm the change that another person has proposed.")
@json_option
def settings(
    named_workspace: Path | None, reason: str | None, second: str | None, confirm: bool, as_json: bool
) -> int:
    """Enter a change of the laboratory's settings.

    Edit configs/lab.yaml or configs/people.yaml, then run this: it shows what differs field by field, asks
    for the reason, and enters both in the audit trail. Until then nothing is run. A change of people,
    separation, one-person or witnesses is in force when a second person has run it with --confirm. Where
    nothing differs, it says since when the settings are in force.
    """
    from assayfolio.workflow.settings import confirm_settings, enter_settings, settings_now
    from assayfolio.workflow.workspace import find_workspace

    if confirm and (reason is not None or second is not None):
        raise InputError("--confirm takes the reason from the proposal; leave --reason and --second out.")
    workspace = find_workspace(named_workspace, Path())
    outcome = confirm_settings(workspace) if confirm else settings_now(workspace)
    if outcome.state == "to be entered" and reason is None:
        for line in outcome.lines():
            complain(line)
        reason = _asked("Reason for the change")
    if outcome.state in ("to be entered", "never entered") and reason is not None:
        outcome = enter_settings(workspace, outcome, reason, second)
    elif reason is not None:
        raise InputError("\n".join(["Nothing was entered.", *outcome.lines()]))
    if as_json:
        say(json.dumps(outcome.document(), ensure_ascii=False, indent=1))
    else:
        for line in outcome.lines():
            say(line)
    return int(ExitCode.DONE)


def _asked(what: str) -> str:
    """The answer of the person at the terminal. Raises InputError where there is none."""
    if not sys.stdin.isatty():
        raise InputError("A reason is needed: give it with --reason.")
    answer: str = click.prompt(what, err=True)
    return answer


@click.command(
    epilog="\b\nExample:\n  assayfolio void runs/WHP-101/run-0001 \\\n"
    '    --reason "Balance out of tolerance on 4 March" --investigation INV-2031-014'
)
@click.argument("folio", type=click.Path(path_type=Path))
@workspace_option
@click.option("--reason", required=True, metavar="TEXT", help="What was wrong with the run.")
@click.option("--investigation", required=True, metavar="REF", help="The reference of the investigation.")
@json_option
def void(folio: Path, named_workspace: Path | None, reason: str, investigation: str, as_json: bool) -> None:
    """Declare a completed run void.

    Nothing of the run is touched: it keeps its folio and its number and stays listed, as void. The reason and
    the reference go into the audit trail and into a sealed folder of their own, runs/_laboratory/void-NNNN.
    A corrected run is made with `assayfolio run STUDY --replaces RUN --reason TEXT`.
    """
    from assayfolio.workflow.void import void_run
    from assayfolio.workflow.workspace import find_workspace

    voided = void_run(find_workspace(named_workspace, folio.parent), folio, reason, investigation)
    if as_json:
        say(json.dumps(voided.document(), ensure_ascii=False, indent=1))
        return
    say(f"{voided.run} is void: {voided.reason}")
    say(f"  investigation  {voided.investigation}")
    say(f"  folio          {voided.folio}")
    say(f"  seal           {voided.seal}")
