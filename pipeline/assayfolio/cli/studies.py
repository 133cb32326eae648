"""Commands about studies: found a workspace, check a study, run it."""

import json
import shlex
from contextlib import suppress
from pathlib import Path
from shutil import get_terminal_size

import click

from assayfolio.cli.note import note_reading
from assayfolio.cli.options import json_option, study_argument, workspace_option
from assayfolio.cli.outcome import called_as, complain, say
from assayfolio.workflow.steps import Step


@click.command(epilog="\b\nExample:\n  assayfolio workspace ~/comparisons")
@click.argument("folder", metavar="DIR", type=click.Path(path_type=Path))
def workspace(folder: Path) -> None:
    """Found a new workspace in DIR.

    It gets the laboratory's settings, a first study to edit with invented data, and an audit trail.
    """
    from assayfolio.workflow.founding import STARTER_FILES, found_workspace
    from assayfolio.workflow.workspace import SETTINGS

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

    note_reading(named_workspace, "check", [str(study)], study.parent)
    result = check_study(find_workspace(named_workspace, study.parent), study)
    if as_json:
        say(json.dumps(result.document(), ensure_ascii=False, indent=1))
    else:
        for line in result.lines():
            say(line)


@click.command(epilog="\b\nExample:\n  assayfolio power configs/oat-drying.yaml")
@study_argument
@workspace_option
@click.option(
    "--figure",
    type=click.Path(path_type=Path, dir_okay=False),
    metavar="FILE",
    help="Where the figure goes; by default beside STUDY, as <name of STUDY>-power.svg.",
)
@json_option
def power(study: Path, named_workspace: Path | None, figure: Path | None, as_json: bool) -> None:
    """Say what a plan can show, before there are data.

    Prints the power of every planned test, the numbers of values that would reach the target, and the
    smallest difference that could be seen; and draws how power rises with the number of values. The plan
    alone is read: `power`, `data.levels` and `data.replicates` have to be in it.
    """
    from assayfolio.workflow.power import study_power, write_figure
    from assayfolio.workflow.workspace import find_workspace

    note_reading(named_workspace, "power", [str(study)], study.parent)
    planned = study_power(find_workspace(named_workspace, study.parent), study)
    target = figure or study.with_name(f"{study.stem}-power.svg")
    write_figure(target, planned.figure)
    if as_json:
        say(json.dumps(planned.document(str(target)), ensure_ascii=False, indent=1))
        return
    for line in planned.lines(get_terminal_size((100, 24)).columns):
        say(line)
    say(f"  Figure: {target}")


@click.command(epilog="\b\nExample:\n  assayfolio worksheet configs/oat-drying.yaml")
@study_argument
@workspace_option
@click.option(
    "--output",
    type=click.Path(path_type=Path, file_okay=False),
    metavar="DIR",
    help="Where the files go; by default beside STUDY.",
)
@json_option
def worksheet(study: Path, named_workspace: Path | None, output: Path | None, as_json: bool) -> None:
    """Write the sheet to measure by.

    The measurements stand in a random order that is drawn from the plan, with blank cells for the results:
    as <name of STUDY>-worksheet.xlsx and .csv, as .pdf to print, and .json with the digests. STUDY has to
    have `worksheet`, `data.levels` and `data.replicates`. A file that is there already is never replaced.
    """
    from assayfolio.workflow.worksheet import write_worksheet
    from assayfolio.workflow.workspace import find_workspace

    written = write_worksheet(find_workspace(named_workspace, study.parent), study, output)
    if as_json:
        say(json.dumps(written.document(), ensure_ascii=False, indent=1))
        return
    for line in written.lines():
        say(line)


@click.command(
    epilog="\b\nExample:\n  assayfolio run configs/whey-moisture.yaml\n\n"
    "Exit code 0: done, and every criterion of the study is met; 1: done, but a criterion is not met."
)
@study_argument
@workspace_option
@click.option("--replaces", metavar="RUN", help="The run of this study that the new one replaces.")
@click.option("--reason", metavar="TEXT", help="What is corrected; goes with --replaces.")
@json_option
def run(
    study: Path, named_workspace: Path | None, replaces: str | None, reason: str | None, as_json: bool
) -> int:
    """Run a study and seal its report.

    Reads STUDY and its data once, computes, renders the report, and seals all of it in a numbered folder,
    runs/<study>/run-NNNN. Nothing is overwritten; every started run leaves a record in the audit trail.
    A corrected run names the one that it replaces, which stays where it is and counts as superseded.
    """
    from assayfolio.workflow.replacing import replacement_of
    from assayfolio.workflow.run import run_study
    from assayfolio.workflow.summary import outcome_document, outcome_lines
    from assayfolio.workflow.workspace import find_workspace

    place = find_workspace(named_workspace, study.parent)
    replacement = replacement_of(replaces, reason)
    outcome = run_study(place, study, _say_nothing if as_json else _say_step, replacement)
    if as_json:
        say(json.dumps(outcome_document(place, outcome), ensure_ascii=False, indent=1))
    else:
        for line in outcome_lines(outcome, Path.cwd(), called_as()):
            say(line)
    return int(outcome.exit_code)


def _say_step(step: Step, text: str) -> None:
    with suppress(OSError):  # a run does not fail because nobody can be told of its progress
        complain(f"{int(step)}  {step.name.lower().replace('_', '-'):<11} {text}")


def _say_nothing(step: Step, text: str) -> None:
    """A program that asked for JSON gets nothing else."""
