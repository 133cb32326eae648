"""The measuring order: whole numbers, each of them once."""

from assayfolio.observations.faults import FaultList
from assayfolio.observations.levels import Where
from assayfolio.study.faults import shown

MOST_DIGITS = 9


class MeasuringOrder:
    """The places in the measuring order that rows have taken so far."""

    def __init__(self, column: str) -> None:
        self._column = shown(column)
        self._taken: dict[int, int] = {}

    def place(self, cell: str, where: Where, faults: FaultList) -> int | None:
        """The place that `cell` gives; None, with a fault added, where it is no place or is taken already."""
        text = cell.strip(" \t")
        _, line, column = where
        if not (text.isascii() and text.isdigit() and len(text) <= MOST_DIGITS):
            found = (
                f"column {self._column} is blank"
                if not text
                else f"column {self._column} holds {shown(text)}"
            )
            advice = f"give the place in the measuring order, a whole number of 1 to {MOST_DIGITS} digits"
            faults.add(line, column, found, advice)
            return None
        order = int(text)
        first = self._taken.setdefault(order, line)
        if first != line:
            found = f"column {self._column} holds {order} a second time"
            advice = f"the first is on line {first}; each row has its own place in the order"
            faults.add(line, column, found, advice)
            return None
        return order
