"""Which planned row and which received row belong together: those of one position."""

from collections.abc import Sequence
from dataclasses import dataclass

from assayfolio.worksheet.received import Received, ReceivedRow
from assayfolio.worksheet.rows import WorksheetRow


@dataclass(frozen=True, slots=True)
class Met:
    """A planned row, and the row that was received in its place."""

    planned: WorksheetRow
    received: ReceivedRow

    @property
    def position(self) -> int:
        """The place in the planned order."""
        return self.planned.position


@dataclass(frozen=True, slots=True)
class Matching:
    """The rows that have met, by position, and those that are left on either side."""

    met: tuple[Met, ...]
    missing: tuple[WorksheetRow, ...]
    additional: tuple[ReceivedRow, ...]


def matched(planned: Sequence[WorksheetRow], received: Received) -> Matching | None:
    """The rows of the worksheet and those of the data, side by side; None where the data cannot tell.

    With repeats the positions in the data are those of single measurements; the replicates then meet in the
    order of their first measurements. Where some of them are missing or additional, only labels tell which.
    """
    if any(row.position is None for row in received.rows):
        return None
    if all(row.repeats == 1 for row in received.rows):
        return _by_position(planned, received.rows)
    in_order = sorted(received.rows, key=lambda row: row.position or 0)
    if all(row.item for row in received.rows) and all(row.item for row in planned):
        return _by_label(planned, in_order)
    if len(in_order) != len(planned):
        return None
    return Matching(tuple(map(Met, planned, in_order)), (), ())


def _by_position(planned: Sequence[WorksheetRow], rows: Sequence[ReceivedRow]) -> Matching:
    at: dict[int | None, ReceivedRow] = {}
    wanted = {row.position for row in planned}
    additional = []
    for row in rows:
        if row.position in wanted and row.position not in at:
            at[row.position] = row
        else:
            additional.append(row)
    return Matching(
        tuple(Met(row, at[row.position]) for row in planned if row.position in at),
        tuple(row for row in planned if row.position not in at),
        tuple(additional),
    )


def _by_label(planned: Sequence[WorksheetRow], in_order: Sequence[ReceivedRow]) -> Matching:
    labels = {row.item for row in planned}
    known: dict[str | None, ReceivedRow] = {}
    additional = []
    for row in in_order:
        if row.item in labels and row.item not in known:
            known[row.item] = row
        else:
            additional.append(row)
    there = [row for row in planned if row.item in known]
    return Matching(
        tuple(map(Met, there, known.values())),
        tuple(row for row in planned if row.item not in known),
        tuple(additional),
    )
