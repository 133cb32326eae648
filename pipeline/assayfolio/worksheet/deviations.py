"""How what was measured departs from the planned measuring order: row by row, and said in words.

Two positions that hold what was planned for each other are one exchange; what is left is told position by
position.
"""

from collections import Counter
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from typing import Literal

from assayfolio.observations.values import Observations
from assayfolio.study.plan import StudyDefinition
from assayfolio.worksheet.columns import item_column, order_column
from assayfolio.worksheet.exchanges import exchanges, label_differs, level_and_label
from assayfolio.worksheet.matching import Matching, Met, matched
from assayfolio.worksheet.received import Received, ReceivedRow, received_rows
from assayfolio.worksheet.rows import WorksheetRow, planned_rows

What = Literal[
    "not comparable",
    "rows exchanged",
    "another level",
    "another label",
    "missing row",
    "additional row",
    "another block",
    "number of values",
]


@dataclass(frozen=True, slots=True)
class Deviation:
    """One departure from the worksheet: its kind, in words, and the lines of the data that show it."""

    what: What
    detail: str
    lines: tuple[int, ...] = ()


def study_deviations(study: StudyDefinition, observations: Sequence[Observations]) -> tuple[Deviation, ...]:
    """The departures of the data of a study from its worksheet; none where the study has no `worksheet`.

    Raises StudyError where no worksheet follows from the plan (`check_worksheet` tells before).
    """
    if study.worksheet is None:
        return ()
    return worksheet_deviations(study, planned_rows(study), observations)


def worksheet_deviations(
    study: StudyDefinition, planned: Sequence[WorksheetRow], observations: Sequence[Observations]
) -> tuple[Deviation, ...]:
    """Every departure of `observations`, one set a response, from the `planned` rows of the worksheet.

    Their order: what could not be compared; exchanges and single rows by position; missing rows; additional
    rows; blocks; numbers of values. Labels and blocks are compared where the data have a column for them.
    Empty where the worksheet was kept.
    """
    received = received_rows(study, observations)
    matching = matched(planned, received)
    return (
        *_not_comparable(study, planned, received, matching),
        *(() if matching is None else _of_rows(matching, received)),
        *_counts(planned, received),
    )


def _not_comparable(
    study: StudyDefinition, planned: Sequence[WorksheetRow], received: Received, matching: Matching | None
) -> Iterator[Deviation]:
    columns = [(order_column(study), "the measuring order")]
    if any(row.item is not None for row in planned):
        columns.append((item_column(study), "the labels of the items"))
    if study.worksheet is not None and study.worksheet.block is not None and planned[0].block is not None:
        columns.append((study.worksheet.block, "the blocks"))
    for name, what in columns:
        if name not in received.columns:
            detail = f"the data have no column {name}, so {what} cannot be compared with the worksheet"
            yield Deviation("not comparable", detail)
    if matching is None and order_column(study) in received.columns:
        without = tuple(row for row in received.rows if row.position is None)
        why = (
            "some rows have no whole number for a position"
            if without
            else "the number of replicates is not the planned one, and no labels tell which are there"
        )
        yield _deviation("not comparable", f"the measuring order cannot be compared: {why}", without)


def _of_rows(matching: Matching, received: Received) -> Iterator[Deviation]:
    exchanged = exchanges(matching.met)
    settled = {met.position for pair in exchanged for met in (pair.first, pair.second)}
    others = [met for met in matching.met if met.position not in settled]
    found = {
        pair.first.position: _deviation(
            "rows exchanged", pair.detail, (pair.first.received, pair.second.received)
        )
        for pair in exchanged
    }
    found.update((met.position, single) for met in others for single in _single(met))
    yield from (found[position] for position in sorted(found))
    yield from _missing(matching.missing, received)
    for row in matching.additional:
        detail = (
            f"position {row.position}: {level_and_label(row.level, row.item)}, a row beyond the worksheet"
        )
        yield _deviation("additional row", detail, (row,))
    yield from _blocks(others)


def _single(met: Met) -> Iterator[Deviation]:
    planned, received = met.planned, met.received
    if planned.level != received.level:
        label = None if received.item is None else planned.item
        was, wanted = level_and_label(received.level, received.item), level_and_label(planned.level, label)
        detail = f"position {met.position}: {was}, where {wanted} was planned"
        yield _deviation("another level", detail, (received,))
    elif label_differs(met):
        was = f"the label {received.item}" if received.item else "no label"
        detail = f"position {met.position}: {was}, where {planned.item} was planned, both of {planned.level}"
        yield _deviation("another label", detail, (received,))


def _missing(missing: Sequence[WorksheetRow], received: Received) -> Iterator[Deviation]:
    """The rows that are not there; a row of that level that was received without a value stands for one."""
    without_value = Counter(received.without_value)
    for row in missing:
        if without_value[row.level]:
            without_value[row.level] -= 1
            continue
        yield Deviation(
            "missing row", f"position {row.position}: no row for {level_and_label(row.level, row.item)}"
        )


def _blocks(met: Iterable[Met]) -> Iterator[Deviation]:
    moved = [one for one in met if one.received.block not in (None, one.planned.block)]
    if moved:
        positions = _ranges([one.position for one in moved])
        detail = f"recorded in another block than the planned one: {positions}"
        yield _deviation("another block", detail, [one.received for one in moved])


def _ranges(positions: Sequence[int]) -> str:
    """Rising numbers in words: "position 3", "positions 3, 5 to 8"."""
    runs: list[list[int]] = []
    for position in positions:
        if runs and position == runs[-1][1] + 1:
            runs[-1][1] = position
        else:
            runs.append([position, position])
    words = ", ".join(f"{first}" if first == last else f"{first} to {last}" for first, last in runs)
    return f"position{'' if len(positions) == 1 else 's'} {words}"


def _counts(planned: Sequence[WorksheetRow], received: Received) -> Iterator[Deviation]:
    wanted = Counter(row.level for row in planned)
    placed = Counter(row.level for row in received.rows)
    without_value = Counter(received.without_value)
    repeats = any(row.repeats > 1 for row in received.rows)
    for level, count in wanted.items():
        aside = without_value[level]
        if repeats:  # a repeat without a value is no replicate more
            aside = min(aside, max(0, count - placed[level]))
        if placed[level] + aside != count:
            detail = f"{level}: {count} values planned, {placed[level] + aside} received"
            yield Deviation("number of values", detail)


def _deviation(what: What, detail: str, rows: Sequence[ReceivedRow]) -> Deviation:
    """A deviation that the lines of `rows` show; with several data files the words say which."""
    where = ", ".join(f"{row.file} line {row.line}" for row in rows if row.file)
    return Deviation(what, f"{detail} ({where})" if where else detail, tuple(row.line for row in rows))
