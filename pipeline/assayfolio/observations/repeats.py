"""Repeats of one replicate: averaged exactly to one value. Repeats are not replicates.

Rows of one level with the same entry in the column `replicate-unit` are repeats. A repeat that is missing,
excluded, or omitted as beyond a limit is left out of the mean; one that was replaced by a limit as planned
enters the mean as replaced. A replicate with one value left is that value; one with none is gone.
"""

from collections.abc import Sequence
from dataclasses import replace

from assayfolio.exact import exact_mean
from assayfolio.observations.faults import FaultList
from assayfolio.observations.levels import Where
from assayfolio.observations.values import Observation
from assayfolio.study.faults import shown


class ReplicateUnits:
    """The entries of the replicate-unit column, each of which belongs to one level."""

    def __init__(self, column: str) -> None:
        self._column = shown(column)
        self._levels: dict[str, tuple[str, int]] = {}

    def name(self, cell: str, level: str, where: Where, faults: FaultList) -> str | None:
        """The replicate of the row at `where`; None, with a fault added, where it cannot be told."""
        unit = cell.strip(" \t")
        _, line, column = where
        if not unit:
            found = f"column {self._column} is blank"
            faults.add(line, column, found, "give the replicate that the value is a repeat of")
            return None
        known, first = self._levels.setdefault(unit, (level, line))
        if known != level:
            found = f"column {self._column} holds {shown(unit)} under level {shown(level)}"
            advice = f"line {first} has it under {shown(known)}; a replicate belongs to one level"
            faults.add(line, column, found, advice)
            return None
        return unit


def averaged(rows: Sequence[Observation], units: Sequence[str]) -> tuple[Observation, ...]:
    """`rows` with the repeats of each replicate in `units` (one a row) made one, in order of appearance.

    The mean stands at the place of the first repeat and in the earliest measuring order; of the carried
    columns it has what all repeats share.
    """
    together: dict[str, list[Observation]] = {}
    for row, unit in zip(rows, units, strict=True):
        together.setdefault(unit, []).append(row)
    return tuple(repeats[0] if len(repeats) == 1 else _mean(repeats) for repeats in together.values())


def _mean(repeats: Sequence[Observation]) -> Observation:
    first = repeats[0]
    orders = [row.order for row in repeats if row.order is not None]
    shared = zip(*(row.extras for row in repeats), strict=True)
    return replace(
        first,
        value=exact_mean([row.value for row in repeats]),
        text="; ".join(row.text for row in repeats),
        extras=tuple(cells[0] if len(set(cells)) == 1 else "" for cells in shared),
        order=min(orders, default=None),
        kind="mean of repeats",
        repeats=tuple(repeats),
        limit=None,
    )
