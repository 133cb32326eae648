"""`python -m assayfolio.cli.rerender FOLIO OUTPUT.pdf`: an archived report rendered again, for comparison."""

import sys
from pathlib import Path

import click

from assayfolio.cli.outcome import run_command, say
from assayfolio.errors import InputError


@click.command(
    epilog="\b\nExample:\n  python -m assayfolio.cli.rerender runs/WHP-101/run-0001 again.pdf\n"
    "  cmp again.pdf runs/WHP-101/run-0001/data/report.pdf"
)
@click.argument("folio", type=click.Path(path_type=Path))
@click.argument("output", type=click.Path(path_type=Path))
def rerender(folio: Path, output: Path) -> None:
    """Render the report archived in FOLIO again, from the folio alone, into OUTPUT.

    The findings are computed again first; where they differ from the archived ones nothing is written. The
    folio is not touched, and OUTPUT may not exist yet.
    """
    from assayfolio.workflow.rerender import rerender as rendered_again

    if output.exists():
        raise InputError(f"{output} exists already; nothing was written over it.")
    report = rendered_again(folio)
    output.write_bytes(report.pdf)
    say(f"{output}  {len(report.pdf)} bytes")


if __name__ == "__main__":
    sys.exit(run_command(rerender, None, "python -m assayfolio.cli.rerender"))
