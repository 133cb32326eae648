"""Studies with a worksheet, and data that keep to it or not."""

from collections.abc import Sequence
from dataclasses import replace

from assayfolio.exact import parse_decimal
from assayfolio.observations.values import Observation, Observations, RawFile, SetAside
from assayfolio.study.plan import StudyDefinition
from assayfolio.study.reading import read_study
from assayfolio.worksheet.rows import WorksheetRow

PLAIN = """\
study: WHP-204
title: Moisture of whey powder from three dryers
data:
  file: moisture.csv
  response: moisture
  factor: dryer
  unit: g/100 g
  levels: [north, south, tower]
  replicates: 4
  order: position
worksheet: {seed: 20261201, item: WP}
alpha: 0.05
"""
BLOCKED = PLAIN.replace("item: WP", "item: WP, block: day, blocks: [monday, tuesday]")


def study_of(text: str = PLAIN) -> StudyDefinition:
    """The study in `text`."""
    return read_study(text.encode(), "study.yaml")


def seen(row: WorksheetRow, line: int = 0, **changes: object) -> Observation:
    """What is received when a row of the worksheet is filled in as planned, but for `changes`."""
    planned = Observation(
        line=line or row.position + 1,
        level=row.level,
        value=parse_decimal("1.25"),
        text="1.25",
        extras=(row.item or "", row.block or ""),
        order=row.position,
    )
    return replace(planned, **changes)


def data_of(
    rows: Sequence[Observation],
    set_aside: Sequence[SetAside] = (),
    columns: tuple[str, ...] = ("item", "day"),
    files: Sequence[str] = ("moisture.csv",),
) -> tuple[Observations, ...]:
    """One response with `rows`; `columns` are those of the labels and of the blocks."""
    return (
        Observations(
            files=tuple(RawFile(file, 1, "0" * 64) for file in files),
            response="moisture",
            factor="dryer",
            levels=("north", "south", "tower"),
            extra_columns=columns,
            rows=tuple(rows),
            set_aside=tuple(set_aside),
            with_excluded=tuple(rows),
        ),
    )
