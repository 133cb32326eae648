"""Commands about archived folios: compute them again, take copies away."""

import json
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any, TypeVar

import click

from assayfolio.cli.options import json_option, workspace_option
from assayfolio.cli.outcome import complain, say
from assayfolio.errors import InputError

if TYPE_CHECKING:
    from assayfolio.evidence.witnesses import Witness
    from assayfolio.workflow.laboratory_folio import SealedRecord
    from assayfolio.workflow.sweep import SweepRow
    from assayfolio.workflow.sweep_record import SweepRecord

Command = TypeVar("Command", bound=Callable[..., Any])
_TOLD_EVERY = 100
_FOLDER = click.Path(path_type=Path, file_okay=False, exists=True)


def sweep_options(command: Command) -> Command:
    """Options of a sweep over many folios."""
    for option in (
        click.option(
            "--jobs", type=click.IntRange(1, 256), metavar="N", help="Processes; by default all processors."
        ),
        click.option("--seed", type=int, metavar="S", help="The seed that decides which folios are drawn."),
        click.option("--sample", type=int, metavar="N", help="Take only N folios, drawn at random."),
        click.option(
            "--all", "take_all", is_flag=True, help="Every folio of the workspace, with one summary."
        ),
    ):
        command = option(command)
    return command


@click.command(
    epilog="\b\nExamples:\n  assayfolio rerun runs/WHP-101/run-0001\n"
    "  assayfolio rerun /media/copy/run-0001 --output ~/audit\n"
    "  assayfolio rerun --all --sample 20 --seed 4711\n\n"
    "Exit code 0: identical, or equal within the stated bound; 1: something differs."
)
@click.argument("folio", required=False, type=click.Path(path_type=Path))
@workspace_option
@click.option(
    "--output",
    type=click.Path(path_type=Path, file_okay=False),
    metavar="DIR",
    help="Where the record goes, for somebody who has no workspace.",
)
@click.option(
    "--environment",
    type=click.Choice(["this", "archived"]),
    default="this",
    help="archived: also with the program and the packages that the run was made with.",
)
@click.option("--wheels", type=_FOLDER, metavar="DIR", help="Take packages from this folder, offline.")
@click.option("--trust-code", metavar="SHA256", help="Start the archived program with this digest.")
@click.option("--python", type=click.Path(path_type=Path), metavar="FILE", help="The interpreter for it.")
@sweep_options
@json_option
def rerun(
    folio: Path | None,
    named_workspace: Path | None,
    output: Path | None,
    environment: str,
    wheels: Path | None,
    trust_code: str | None,
    python: Path | None,
    take_all: bool,
    sample: int | None,
    seed: int | None,
    jobs: int | None,
    as_json: bool,
) -> int:
    """Compute an archived run again and compare.

    FOLIO alone is read: its definition and data are computed and rendered again, and findings (field by
    field), figures, text and bytes of the report compared with those archived. FOLIO is never touched; the
    dated record of the re-run is a folio of its own, runs/_laboratory/rerun-NNNN or below --output.

    With --environment archived the same is done once more with the program that made the run, on the
    packages of its lock, in a virtual environment; archived code is started only where the verified audit
    trail vouches for its digest, or --trust-code names it.

    With --all every run of the workspace, or with --sample some, on all processors; one summary (PDF, CSV) is
    sealed at the end. A sweep that was interrupted is taken up where it stood.
    """
    from assayfolio.workflow.archived_environment import ArchivedEnvironmentOptions
    from assayfolio.workflow.parallel import available_processors
    from assayfolio.workflow.rerun_folio import destination, exit_code, rerun_folio
    from assayfolio.workflow.sweep_folios import rerun_all, sample_of

    drawn = sample_of(sample, seed)
    if (folio is None) == (not take_all) or (drawn is not None and not take_all):
        raise InputError("Name one folio, or give --all (with --sample N --seed S for some of them).")
    if folio is None:
        if environment == "archived":
            raise InputError("Each run has its own environment: with --environment archived name one folio.")
        told = _tell_nothing if as_json else _tell_row
        swept, sealed = rerun_all(named_workspace, output, drawn, jobs or available_processors(), told)
        return say_sweep(swept, sealed, as_json)
    archived = ArchivedEnvironmentOptions(wheels, trust_code, python) if environment == "archived" else None
    record, sealed = rerun_folio(folio, destination(folio, named_workspace, output), archived)
    if as_json:
        say(json.dumps({**record.document, "record": str(sealed.folio)}, ensure_ascii=False, indent=1))
    else:
        for line in record.lines():
            say(line)
        say(f"Record  {sealed.folio}")
        say(f"Seal    {sealed.seal}")
    return int(exit_code(record))


def sweep_verified(
    named_workspace: Path | None,
    output: Path | None,
    sample: int | None,
    seed: int | None,
    jobs: int | None,
    witnesses: "Sequence[Witness]",
    restored: str | None,
    as_json: bool,
) -> int:
    """Verify every folio of the workspace, or a sample, and say what came of it; the exit code."""
    from assayfolio.workflow.parallel import available_processors
    from assayfolio.workflow.sweep_folios import Sought, sample_of, verify_sweep

    drawn = sample_of(sample, seed)
    asked = Sought(drawn, jobs or available_processors(), tuple(witnesses), restored)
    swept, sealed = verify_sweep(named_workspace, output, asked)
    return say_sweep(swept, sealed, as_json)


def say_sweep(swept: "SweepRecord", sealed: "SealedRecord", as_json: bool) -> int:
    """The end of a sweep; return its exit code."""
    if as_json:
        say(json.dumps({**swept.document, "record": str(sealed.folio)}, ensure_ascii=False, indent=1))
    else:
        for line in swept.lines():
            say(line)
        say(f"Record  {sealed.folio}")
        say(f"Seal    {sealed.seal}")
    return int(swept.exit_code)


def _tell_row(done: int, total: int, row: "SweepRow") -> None:
    """A line for what is not fine, and one for every hundredth part."""
    step = max(1, total // _TOLD_EVERY)
    if not row.is_fine or done % step == 0 or done == total:
        complain(f"{done:>6} of {total}  {row.subject}  {row.outcome}")


def _tell_nothing(done: int, total: int, row: "SweepRow") -> None:
    """A program that asked for JSON gets nothing else."""


@click.command(
    epilog="\b\nExamples:\n  assayfolio archive runs/WHP-101/run-0001 --to /media/WHP-101 --with-wheels\n"
    '  assayfolio archive runs/WHP-101/run-0001 --dispose --reason "kept ten years"'
)
@click.argument("folios", metavar="FOLIO...", nargs=-1, required=True, type=click.Path(path_type=Path))
@workspace_option
@click.option(
    "--to", "place", type=click.Path(path_type=Path), metavar="DIR", help="The new folder that is made."
)
@click.option(
    "--with-wheels", is_flag=True, help="Add the programs and packages that the runs were made with."
)
@click.option(
    "--wheels", type=_FOLDER, metavar="DIR", help="Take packages from this folder, not from an index."
)
@click.option("--dispose", is_flag=True, help="Propose to dispose of the folio, after its retention.")
@click.option("--confirm", is_flag=True, help="With --dispose: another person confirms, and it is removed.")
@click.option("--reason", metavar="TEXT", help="With --dispose: why.")
@json_option
def archive(
    folios: tuple[Path, ...],
    named_workspace: Path | None,
    place: Path | None,
    with_wheels: bool,
    wheels: Path | None,
    dispose: bool,
    confirm: bool,
    reason: str | None,
    as_json: bool,
) -> None:
    """Make a true copy of folios for somebody else.

    DIR holds the folios byte for byte, the audit trail's lines from their first entry on, a certificate (PDF
    and JSON), and with --with-wheels everything that computes them again without a network. Nothing is copied
    that does not verify.

    With --dispose one folio is disposed of, after the retention that the settings give: one person proposes
    it with a reason, another confirms. A tombstone with its seal stays, runs/_laboratory/disposal-NNNN.
    """
    if dispose == (place is not None) or (not dispose and (confirm or reason is not None)):
        raise InputError("Either --to DIR for a copy, or --dispose with --reason TEXT or --confirm.")
    if dispose:
        _dispose(named_workspace, folios, reason, confirm, as_json)
        return
    from assayfolio.workflow.archive import export
    from assayfolio.workflow.wheels import WheelSource
    from assayfolio.workflow.workspace import find_workspace

    assert place is not None, "a copy has a place"
    source = WheelSource(wheels) if with_wheels or wheels is not None else None
    copy = export(find_workspace(named_workspace, folios[0]), folios, place, source)
    if as_json:
        document = {**copy.document, "place": str(copy.place), "record": str(copy.record.folio)}
        say(json.dumps(document, ensure_ascii=False, indent=1))
        return
    for one in copy.folios:
        say(f"{one.subject}: {one.files} files, {one.size:,} bytes, seal {one.seal}")
    if copy.wheels:
        say(f"{len(copy.wheels)} wheels")
    say(f"Copy    {copy.place}")
    say(f"Record  {copy.record.folio}")


def _dispose(
    named_workspace: Path | None, folios: tuple[Path, ...], reason: str | None, confirm: bool, as_json: bool
) -> None:
    """Propose a disposal, or confirm it."""
    from assayfolio.workflow.retention import confirm_disposal, propose_disposal
    from assayfolio.workflow.workspace import find_workspace

    if len(folios) != 1 or (reason is None) == (not confirm):
        raise InputError("Name one folio, with --reason TEXT to propose its disposal, or --confirm.")
    workspace = find_workspace(named_workspace, folios[0])
    if reason is None:
        disposal = confirm_disposal(workspace, folios[0])
    else:
        disposal = propose_disposal(workspace, folios[0], reason)
    if as_json:
        say(json.dumps(disposal.document, ensure_ascii=False, indent=1))
    else:
        for line in disposal.lines():
            say(line)
