"""The command for control charts over lots."""

import json
from pathlib import Path

import click

from assayfolio.cli.options import json_option, study_argument, workspace_option
from assayfolio.cli.outcome import say


@click.command(
    epilog="\b\nExamples:\n  assayfolio trend configs/whey-moisture.yaml\n"
    "  assayfolio trend configs/whey-moisture.yaml --csv ~/whey.csv\n\n"
    "Exit code 0: charted, with signals or without; 1: the folio of a run is not as it was sealed."
)
@study_argument
@workspace_option
@click.option(
    "--csv",
    "csv_file",
    type=click.Path(path_type=Path, dir_okay=False),
    metavar="FILE",
    help="Write the values and signals as a table, too.",
)
@click.option(
    "--output",
    type=click.Path(path_type=Path, file_okay=False),
    metavar="DIR",
    help="Where the record goes; by default runs/_laboratory of the workspace.",
)
@json_option
def trend(
    study: Path, named_workspace: Path | None, csv_file: Path | None, output: Path | None, as_json: bool
) -> int:
    """Chart the lots of a study against limits and rules.

    STUDY has to have `trend`. Every completed run of it that stands (not void, not superseded) is read from
    its folio, after its seal was compared with the audit trail. Lot means, repeatability and differences to
    a reference are charted with limits from the planned baseline and judged by the planned rules; how many
    signals chance alone would give stands beside. The record (PDF, CSV, JSON) is sealed as
    runs/_laboratory/trend-NNNN. A signal informs; nothing is decided or stopped by it.
    """
    from assayfolio.workflow.trend import study_trend
    from assayfolio.workflow.trend_record import (
        seal_trend,
        trend_csv,
        trend_document,
        trend_lines,
        write_trend_csv,
    )
    from assayfolio.workflow.workspace import find_workspace

    charted = study_trend(find_workspace(named_workspace, study.parent), study)
    sealed = seal_trend(charted, output)
    if csv_file is not None:
        write_trend_csv(csv_file, trend_csv(charted))
    if as_json:
        document = {**trend_document(charted), "record": str(sealed.folio)}
        say(json.dumps(document, ensure_ascii=False, indent=1))
    else:
        for line in trend_lines(charted):
            say(line)
        say(f"Record  {sealed.folio}")
        say(f"Seal    {sealed.seal}")
    return int(charted.exit_code)
