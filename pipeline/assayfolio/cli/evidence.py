"""Commands about evidence: verify folios and the trail, show the trail."""

import json
from collections.abc import Mapping, Sequence
from pathlib import Path

import click

from assayfolio.canonical import Json
from assayfolio.cli.archive import sweep_options, sweep_verified
from assayfolio.cli.note import note_reading
from assayfolio.cli.options import json_option, workspace_option
from assayfolio.cli.outcome import complain, say
from assayfolio.errors import ExitCode, InputError


@click.command(
    epilog="\b\nExamples:\n  assayfolio verify\n  assayfolio verify runs/WHP-101/run-0001\n"
    "  assayfolio verify --witness /mnt/witness/heads.jsonl\n\n"
    "Exit code 0: all passed; 1: something failed; 5: nothing failed, something was not checkable."
)
@click.argument("folios", metavar="[FOLIO]...", nargs=-1, type=click.Path(path_type=Path))
@workspace_option
@click.option(
    "--witness",
    "places",
    metavar="PATH",
    multiple=True,
    type=click.Path(path_type=Path),
    help="Hold the audit trail against this witness too, a file or a folder.",
)
@click.option(
    "--head",
    "heads",
    metavar="NUMBER:SHA256",
    multiple=True,
    help="Hold the audit trail against this head too, as an archived report prints it.",
)
@click.option(
    "--trust",
    "trusted",
    metavar="FILE",
    multiple=True,
    type=click.Path(path_type=Path, dir_okay=False),
    help="Believe signatures by the certificates in this file alone, not by those that the trail pins.",
)
@sweep_options
@click.option("--restored", metavar="TEXT", help="With --all: record that this came back from a backup.")
@click.option(
    "--output",
    metavar="DIR",
    type=click.Path(path_type=Path, file_okay=False),
    help="Where the summary goes.",
)
@json_option
def verify(
    folios: tuple[Path, ...],
    named_workspace: Path | None,
    places: tuple[Path, ...],
    heads: tuple[str, ...],
    trusted: tuple[Path, ...],
    take_all: bool,
    sample: int | None,
    seed: int | None,
    jobs: int | None,
    output: Path | None,
    restored: str | None,
    as_json: bool,
) -> int:
    """Verify folios and the audit trail.

    Without FOLIO, every folio of the workspace. Numbered checks, each passed, failed or not checkable with
    its reason; every changed, missing or extra file is named. The audit trail is held against the witnesses
    that the settings name, and against those that are named here. Raw data that no completed run has read are
    mentioned, too: that is information and changes no exit code. Nothing is repaired.

    With --all the files are read on all processors, and one summary (PDF, CSV) is sealed at the end; --sample
    and --seed draw some folios at random. --restored TEXT says which backup a workspace was brought back
    from; the summary is then the dated record of that.
    """
    from assayfolio.workflow.audit import (
        anchors_at,
        unfinished_data,
        verification_document,
        verification_lines,
        verify_all,
    )
    from assayfolio.workflow.register_words import unfinished_document, unfinished_lines
    from assayfolio.workflow.witnessing import printed_head, witness_at

    witnesses = (*map(witness_at, places), *map(printed_head, heads))
    if take_all or sample is not None or seed is not None or restored is not None:
        if trusted:
            raise InputError("--trust goes with named folios or the whole workspace, not with --all.")
        if folios or not take_all:
            raise InputError("Name folios, or give --all (with --sample N --seed S for some of them).")
        note_reading(named_workspace, "verify", ["--all"], None)
        return sweep_verified(named_workspace, output, sample, seed, jobs, witnesses, restored, as_json)
    start = folios[0] if folios else None
    note_reading(named_workspace, "verify", [str(folio) for folio in folios], start)
    anchors = tuple(der for path in trusted for der in anchors_at(path))
    verification = verify_all(named_workspace, folios, witnesses, anchors)
    data = None if folios else unfinished_data(named_workspace)
    if as_json:
        document = dict(verification_document(verification))
        if data is not None:
            document["raw_data"] = unfinished_document(data)
        _say_json(document)
    else:
        _say_lines(verification_lines(verification, unfinished_lines(data) if data is not None else ()))
    return int(verification.exit_code)


@click.command(
    epilog="\b\nExamples:\n  assayfolio trail --study WHP-101 --when 2031-03-01..2031-03-31\n"
    "  assayfolio trail --exceptions\n  assayfolio trail --csv march.csv --when 2031-03\n"
    "  assayfolio trail --review runs/WHP-101/run-0001 \\\n"
    '    --outcome "Entries 1 to 48 read; one exclusion, its reason holds; the clock was kept"'
)
@workspace_option
@click.option("--who", metavar="TEXT", help="Only entries of this account, person or role.")
@click.option("--what", metavar="TEXT", help="Only entries with this in action, subject or details.")
@click.option(
    "--when", metavar="FROM..TO", help="Only entries of this time (UTC); either side may be left out."
)
@click.option("--why", metavar="TEXT", help="Only entries with this in their reason.")
@click.option("--study", metavar="STUDY", help="Only entries about this study.")
@click.option("--exceptions", is_flag=True, help="Show first what a reviewer should see, by kind.")
@click.option("--csv", "csv_file", metavar="FILE", type=click.Path(path_type=Path), help="Write a table.")
@click.option("--review", metavar="RUN", type=click.Path(path_type=Path), help="Record your review of a run.")
@click.option("--outcome", metavar="TEXT", help="What the review came to.")
@click.option("--data", "about_data", is_flag=True, help="Show the register of raw data files instead.")
@json_option
def trail(
    named_workspace: Path | None,
    who: str | None,
    what: str | None,
    when: str | None,
    why: str | None,
    study: str | None,
    exceptions: bool,
    csv_file: Path | None,
    review: Path | None,
    outcome: str | None,
    about_data: bool,
    as_json: bool,
) -> int:
    """Show the audit trail, or record that it was reviewed.

    Or, with --data, every raw data file that it knows. Oldest entry first; faults of the trail itself
    go to standard error, with exit code 1. With --exceptions, failures, repeated runs, exclusions, late
    amendments, deviations, changes of roles and the like come before everything else. With --data, each
    raw data file with its state: used in a completed run; open, not in one yet; orphan, where no study
    definition in configs/ would bring it into one.
    """
    asked = {"who": who, "what": what, "when": when, "why": why, "study": study, "csv": csv_file}
    filters = {name: value for name, value in asked.items() if value is not None}
    if review is not None or outcome is not None:
        _only(not (filters or exceptions or about_data), "--review stands alone")
        if review is None or outcome is None:
            raise InputError("A review is recorded with both --review RUN and --outcome TEXT.")
        return _review(named_workspace, review, outcome, as_json)
    if about_data:
        _only(not (filters or exceptions), "--data shows another list than the trail's entries")
        return _show_data(named_workspace, as_json)
    return _show_trail(named_workspace, filters, exceptions, as_json)


def _only(allowed: bool, why: str) -> None:
    if not allowed:
        raise InputError(f"These options do not go together: {why}.")


def _show_trail(
    named_workspace: Path | None, filters: Mapping[str, str | Path], exceptions: bool, as_json: bool
) -> int:
    from assayfolio.evidence.trail_filters import TrailFilter, parse_period
    from assayfolio.workflow.trail_view import (
        exception_document,
        exception_lines,
        trail_document,
        trail_lines,
        trail_view,
        write_csv,
    )

    texts = {name: value for name, value in filters.items() if isinstance(value, str)}
    when = texts.pop("when", None)
    wanted = TrailFilter(**texts, when=parse_period(when) if when is not None else None)
    note_reading(named_workspace, "trail", [f"--{name}={value}" for name, value in filters.items()])
    view = trail_view(named_workspace, wanted)
    csv_file = filters.get("csv")
    if isinstance(csv_file, Path):
        say(write_csv(view, csv_file))
    elif as_json:
        _say_json(exception_document(view) if exceptions else trail_document(view))
    else:
        _say_lines(exception_lines(view) if exceptions else trail_lines(view))
    return _faults_told(view.reading.faults)


def _show_data(named_workspace: Path | None, as_json: bool) -> int:
    from assayfolio.workflow.audit import register_of
    from assayfolio.workflow.register_words import register_document, register_lines

    note_reading(named_workspace, "trail", ["--data"])
    register, reading = register_of(named_workspace)
    if as_json:
        _say_json(register_document(register))
    else:
        _say_lines(register_lines(register))
    return _faults_told(reading.faults)


def _review(named_workspace: Path | None, review: Path, outcome: str, as_json: bool) -> int:
    from assayfolio.workflow.trail_review import review_trail
    from assayfolio.workflow.workspace import find_workspace

    done = review_trail(find_workspace(named_workspace, review.parent), review, outcome)
    if as_json:
        _say_json(done.document())
    else:
        _say_lines(done.lines())
    return int(ExitCode.DONE)


def _faults_told(faults: Sequence[object]) -> int:
    for fault in faults:
        complain(f"The audit trail is not whole: {fault}")
    return int(ExitCode.FINDING if faults else ExitCode.DONE)


def _say_json(document: Mapping[str, Json]) -> None:
    say(json.dumps(document, ensure_ascii=False, indent=1))


def _say_lines(lines: Sequence[str]) -> None:
    for line in lines:
        say(line)
