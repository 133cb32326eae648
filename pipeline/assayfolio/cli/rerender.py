"""`python -m assayfolio.cli.rerender FOLIO OUTPUT.pdf`: an archived report rendered again, for comparison."""

import sys
from pathlib import Path

import click

from assayfolio.cli.outcome import run_command, say
from assayfolio.errors import ExitCode, InputError


@click.command(
    epilog="\b\nExample:\n  python -m assayfolio.cli.rerender runs/WHP-101/run-0001 again.pdf\n"
    "  cmp again.pdf runs/WHP-101/run-0001/data/report.pdf"
)
@click.argument("folio", type=click.Path(path_type=Path))
@click.argument("output", type=click.Path(path_type=Path))
def rerender(folio: Path, output: Path) -> int:
    """Render the report archived in FOLIO again, from the folio alone, into OUTPUT.

    The folio is checked against its own manifests, and the findings are computed again; where either
    differs nothing is written. The folio is not touched, and OUTPUT may not exist yet.

    Exit code 0: the same bytes as the archived report; 1: something differs.
    """
    from assayfolio.workflow.rerender import rerender as rendered_again

    if output.exists():
        raise InputError(f"{output} exists already; nothing was written over it.")
    if not output.resolve().parent.is_dir():
        raise InputError(f"{output} cannot be written: there is no folder {output.parent}.")
    if output.resolve().is_relative_to(folio.resolve()):
        raise InputError(f"{output} lies in the folio, which is not to be touched.")
    report = rendered_again(folio)
    output.write_bytes(report.pdf)
    say("Findings: the same bytes as archived")
    say(f"Report: {'the same bytes as archived' if report.is_identical else 'differs from the archived one'}")
    say(f"Written to {output}")
    return int(ExitCode.DONE if report.is_identical else ExitCode.FINDING)


if __name__ == "__main__":
    sys.exit(run_command(rerender, None, "python -m assayfolio.cli.rerender"))
