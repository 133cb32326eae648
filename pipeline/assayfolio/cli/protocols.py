"""Commands about what was fixed and what departed from it: preregister, amend, deviation."""

import json
import shlex
import sys
from pathlib import Path
from typing import TYPE_CHECKING

import click

from assayfolio.cli.options import json_option, study_argument, workspace_option
from assayfolio.cli.outcome import called_as, say

if TYPE_CHECKING:
    from assayfolio.workflow.amend import Proposal
    from assayfolio.workflow.protocol_folio import FixedPlan
    from assayfolio.workflow.workspace import Workspace


@click.command(epilog="\b\nExample:\n  assayfolio preregister configs/oat-drying.yaml")
@study_argument
@workspace_option
@json_option
def preregister(study: Path, named_workspace: Path | None, as_json: bool) -> None:
    """Fix the plan of a study before its data.

    Checks STUDY, computes the power of its tests, draws its worksheet, sets the protocol for signing, and
    seals all of it as runs/<study>/protocol-0001 with the digest of the plan. From then on only this plan
    runs under the study, or an amendment of it. Where data had been seen before, protocol and reports say so.
    """
    from assayfolio.workflow.preregister import preregister as fix
    from assayfolio.workflow.workspace import find_workspace

    place = find_workspace(named_workspace, study.parent)
    _tell(place, fix(place, study), study, as_json)


@click.command(
    epilog='\b\nExample:\n  assayfolio amend configs/oat-drying.yaml --reason "oven 3 broke down, file 12/7"'
)
@study_argument
@workspace_option
@click.option("--reason", metavar="TEXT", help="Why the plan changes; asked for where it is not given.")
@json_option
def amend(study: Path, named_workspace: Path | None, reason: str | None, as_json: bool) -> None:
    """Change a registered plan, with the reason.

    Shows field by field what differs from the plan that is registered, and whether data had been seen before.
    The changed plan is sealed as the next protocol; the earlier ones are kept. Every later report lists all
    amendments; behind one that came after the data stands the result under the earlier plan.
    """
    from assayfolio.workflow.amend import amend as change
    from assayfolio.workflow.workspace import find_workspace

    def reason_for(proposal: "Proposal") -> str:
        if not as_json:
            for line in proposal.lines():
                say(line)
        return reason if reason is not None else _asked("Reason")

    place = find_workspace(named_workspace, study.parent)
    _tell(place, change(place, study, reason_for), study, as_json)


def is_attended() -> bool:
    """Whether there is somebody at the terminal who can be asked."""
    return sys.stdin.isatty()


def _asked(what: str) -> str:
    """What a person answers; nothing where nobody can be asked."""
    if not is_attended():
        return ""
    return str(click.prompt(what, default="", show_default=False))


def _tell(place: "Workspace", fixed: "FixedPlan", study: Path, as_json: bool) -> None:
    from assayfolio.workflow.preregister import fixed_document, fixed_lines
    from assayfolio.workflow.workspace import shown_path

    if as_json:
        say(json.dumps(fixed_document(place, fixed), ensure_ascii=False, indent=1))
        return
    here = Path.cwd()
    near = fixed.folio.relative_to(here) if fixed.folio.is_relative_to(here) else fixed.folio
    for line in fixed_lines(fixed, shown_path(near)):
        say(line)
    say(f"Next, with the data in their place: {called_as()} run {shlex.quote(str(study))}")


@click.command(
    epilog="\b\nExample:\n  assayfolio deviation configs/oat-drying.yaml --when 2031-03-04 \\\n"
    '    --what "oven 3 stood open for ten minutes" --effect "none seen on the control" \\\n'
    '    --decision "values kept, see notebook 14 page 3"'
)
@study_argument
@workspace_option
@click.option("--what", metavar="TEXT", help="What was not done as planned.")
@click.option("--effect", metavar="TEXT", help="What it means for the results.")
@click.option("--decision", metavar="TEXT", help="What was decided, and where that is recorded.")
@click.option("--when", metavar="TEXT", help="When it happened, such as a date.")
@json_option
def deviation(
    study: Path,
    named_workspace: Path | None,
    what: str | None,
    effect: str | None,
    decision: str | None,
    when: str | None,
    as_json: bool,
) -> None:
    """Enter something that was not done as planned.

    It goes into the audit trail with person and time, and into every later report of STUDY; it cannot be
    taken out again. Deviations of numbers of values, measuring order, dates, late data and the clock are
    found by the program itself. What is not given is asked for.
    """
    from assayfolio.workflow.deviation import enter_deviation
    from assayfolio.workflow.workspace import find_workspace

    entered = enter_deviation(
        find_workspace(named_workspace, study.parent),
        study,
        what=_asked("What") if what is None else what,
        effect=_asked("Effect") if effect is None else effect,
        decision=_asked("Decision") if decision is None else decision,
        when=when,
    )
    if as_json:
        say(json.dumps(entered.document(), ensure_ascii=False, indent=1))
        return
    for line in entered.lines():
        say(line)
