"""Commands about studies: found a workspace, check a study, run it."""

import json
import shlex
from contextlib import suppress
from pathlib import Path

import click

from assayfolio.cli.options import json_option, study_argument, workspace_option
from assayfolio.cli.outcome import called_as, complain, say
from assayfolio.workflow.steps import Step


@click.command(epilog="\b\nExample:\n  assayfolio workspace ~/comparisons")
@click.argument("folder", metavar="DIR", type=click.Path(path_type=Path))
def workspace(folder: Path) -> None:
    """Found a new workspace in DIR.

    It gets the laboratory's settings, a first study to edit with invented data, and an audit trail.
    """
    from assayfolio.workflow.workspace import SETTINGS, STARTER_FILES, found_workspace

    founded = found_workspace(folder)
    say(f"Workspace founded in {founded.root}")
    for name in STARTER_FILES:
        say(f"  {name}")
    say("  runs/audit-trail.jsonl")
    say(f"Next: put your laboratory's name into {founded.root / SETTINGS}, then")
    say(f"  {called_as()} run {shlex.quote(str(founded.root / 'configs/first-study.yaml'))}")


@click.command(epilog="\b\nExample:\n  assayfolio check configs/whey-moisture.yaml")
@study_argument
@workspace_option
@json_option
def check(study: Path, named_workspace: Path | None, as_json: bool) -> None:
    """Check a study definition and its data.

    The data file need not exist yet. Every fault is listed with its place; nothing is written.
    """
    from assayfolio.workflow.check import check_study
    from assayfolio.workflow.workspace import find_workspace

    result = check_study(find_workspace(named_workspace, study.parent), study)
    if as_json:
        say(json.dumps(result.document(), ensure_ascii=False, indent=1))
    else:
        for line in result.lines():
            say(line)


@click.command(epilog="\b\nExample:\n  assayfolio run configs/whey-moisture.yaml")
@study_argument
@workspace_option
@json_option
def run(study: Path, named_workspace: Path | None, as_json: bool) -> None:
    """Run a study and seal its report.

    Reads STUDY and its data once, computes, renders the report, and seals all of it in a numbered folder,
    runs/<study>/run-NNNN. Nothing is overwritten; every started run leaves a record in the audit trail.
    """
    from assayfolio.workflow.run import run_study
    from assayfolio.workflow.summary import outcome_document, outcome_lines
    from assayfolio.workflow.workspace import find_workspace

    place = find_workspace(named_workspace, study.parent)
    outcome = run_study(place, study, _say_nothing if as_json else _say_step)
    if as_json:
        say(json.dumps(outcome_document(place, outcome), ensure_ascii=False, indent=1))
    else:
        for line in outcome_lines(outcome, Path.cwd(), called_as()):
            say(line)


def _say_step(step: Step, text: str) -> None:
    with suppress(OSError):  # a run does not fail because nobody can be told of its progress
        complain(f"{int(step)}  {step.name.lower().replace('_', '-'):<11} {text}")


def _say_nothing(step: Step, text: str) -> None:
    """A program that asked for JSON gets nothing else."""
