"""The rows of a study's data as the worksheet sees them: position, level, label and block, no values."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from assayfolio.observations.guard import unguarded
from assayfolio.observations.values import Observation, Observations
from assayfolio.study.plan import StudyDefinition
from assayfolio.worksheet.columns import item_column, order_column


@dataclass(frozen=True, slots=True)
class ReceivedRow:
    """One row as received, or the repeats of one replicate under the first of them.

    `position`, `item` and `block` are None where the data do not have them. `file` is empty where there is
    one data file only.
    """

    file: str
    line: int
    level: str
    position: int | None
    item: str | None
    block: str | None
    repeats: int


@dataclass(frozen=True, slots=True)
class Received:
    """All rows with a value, and the levels of those without one, of which no more is known.

    `columns` are the names of the columns that were read beside factor and responses.
    """

    rows: tuple[ReceivedRow, ...]
    without_value: tuple[str, ...]
    columns: frozenset[str]


def received_rows(study: StudyDefinition, observations: Sequence[Observations]) -> Received:
    """The rows of `observations`, one set a response: each row once, those excluded by a person included."""
    columns = frozenset(name for observed in observations for name in observed.extra_columns)
    if study.data.order is not None:
        columns |= {study.data.order}
    found: dict[tuple[int, int], ReceivedRow] = {}
    for observed in observations:
        at = {name: place for place, name in enumerate(observed.extra_columns)}
        for row in (*observed.rows, *observed.with_excluded):
            first = min(row.repeats, key=_when) if row.repeats else row
            key = (first.file, first.line)
            if key not in found:
                found[key] = _received(study, observed, first, at, len(row.repeats))
    with_value = set(_lines_with_value(observations))
    aside = {
        (one.file, one.line): one.level
        for observed in observations
        for one in observed.set_aside
        if (one.file, one.line) not in with_value
    }
    return Received(tuple(found.values()), tuple(aside.values()), columns)


def _when(row: Observation) -> tuple[int, int]:
    return (row.order or 0, row.line)


def _lines_with_value(observations: Sequence[Observations]) -> Iterator[tuple[int, int]]:
    for observed in observations:
        for row in (*observed.rows, *observed.with_excluded):
            for one in row.repeats or (row,):
                yield one.file, one.line


def _received(
    study: StudyDefinition, observed: Observations, row: Observation, at: dict[str, int], repeats: int
) -> ReceivedRow:
    source = observed.files[row.file]

    def entry(name: str | None) -> str | None:
        """The label in the column `name`, without the guard that it has in a text file."""
        if name is None or name not in at:
            return None
        label = row.extras[at[name]].strip()
        return label if source.form == "spreadsheet" else unguarded(label)

    worksheet = study.worksheet
    labelled = worksheet is not None and worksheet.item is not None
    return ReceivedRow(
        file=source.file if len(observed.files) > 1 else "",
        line=row.line,
        level=row.level,
        position=row.order if study.data.order is not None else _number(entry(order_column(study))),
        item=entry(item_column(study)) if labelled else None,
        block=entry(worksheet.block) if worksheet is not None and worksheet.blocks else None,
        repeats=max(1, repeats),
    )


def _number(text: str | None) -> int | None:
    return int(text) if text is not None and text.isascii() and text.isdigit() and len(text) < 10 else None
