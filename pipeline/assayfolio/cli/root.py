"""The command line: one group, its commands, and the way out."""

import sys
from collections.abc import Sequence

import click

from assayfolio.cli.archive import archive, rerun
from assayfolio.cli.evidence import trail, verify
from assayfolio.cli.index import index
from assayfolio.cli.laboratory import settings, void
from assayfolio.cli.outcome import run_command
from assayfolio.cli.protocols import amend, deviation, preregister
from assayfolio.cli.signing import sign, signer
from assayfolio.cli.studies import check, power, run, worksheet, workspace
from assayfolio.cli.trend import trend as trend_command
from assayfolio.version import VERSION

EXIT_CODES = """\b
Exit codes:
  0  done, and every criterion of a study is met
  1  done, but a criterion is not met, or a verification found a change
  2  the study, the data or the command line is wrong; nothing was lost
  3  the machine failed: disk, permission, font, clock
  4  busy: another writer holds the workspace
  5  verified as far as could be checked; something was not checkable
"""


@click.group(
    context_settings={"help_option_names": ["--help", "-h"], "max_content_width": 100},
    epilog=f"{EXIT_CODES}\n\n\b\nExample:\n  assayfolio run configs/whey-moisture.yaml",
)
@click.version_option(VERSION, prog_name="assayfolio", message="%(prog)s %(version)s")
def cli() -> None:
    """Planned one-way comparisons for a testing laboratory.

    A study definition and a raw data file go in; a report ready for signature comes out, in a sealed,
    numbered folder that can be verified later.
    """


for command in (
    workspace,
    check,
    power,
    worksheet,
    preregister,
    amend,
    deviation,
    run,
    verify,
    rerun,
    archive,
    trail,
    trend_command,
    index,
    settings,
    void,
    sign,
    signer,
):
    cli.add_command(command)


def main(arguments: Sequence[str] | None = None) -> None:
    """Run the command line and end the process with its exit code."""
    sys.exit(run_command(cli, arguments))
