"""Which levels stand in the rows, and whether they are those that the plan declares."""

from collections.abc import Iterator
from dataclasses import dataclass

from assayfolio.observations.faults import FaultList, listed, nearest, quoted
from assayfolio.observations.labels import as_seen, label_fault
from assayfolio.study.plan import DataPlan

Spot = tuple[int, int]


@dataclass(slots=True)
class Tally:
    """One level as it comes in: where its rows stand and how many there are.

    `surplus` is the place of the first row beyond the planned number, `twin` an earlier level that looks
    the same.
    """

    first: Spot
    last: Spot
    planned: int | None
    sound: bool
    twin: str | None = None
    n: int = 0
    surplus: Spot | None = None


class LevelCount:
    """The levels of one file in order of first appearance, counted row by row."""

    def __init__(self, plan: DataPlan) -> None:
        self._declared = None if plan.levels is None else frozenset(plan.levels)
        self._listed = plan.levels or ()
        self._replicates = plan.replicates
        self._by_level = dict(plan.replicates) if isinstance(plan.replicates, tuple) else {}
        self._tallies: dict[str, Tally] = {}
        self._seen: dict[str, str] = {}

    def count(self, level: str, spot: Spot) -> None:
        """Take one row of `level` whose level stands at line and column `spot`."""
        tally = self._tallies.get(level)
        if tally is None:
            tally = self._tallies[level] = self._new_tally(level, spot)
        tally.n += 1
        tally.last = spot
        if tally.surplus is None and tally.planned is not None and tally.n > tally.planned:
            tally.surplus = spot

    def in_order(self) -> tuple[str, ...]:
        """The levels in the order of the plan, or of first appearance where it declares none."""
        return tuple(self._tallies) if self._declared is None else self._listed

    def add_name_faults(self, faults: FaultList) -> None:
        """Add one fault for each level whose name cannot be taken, at its first row."""
        for level, tally in self._tallies.items():
            if tally.sound:
                continue
            # Finding the nearest name is slow, so it is left out for faults that are only counted.
            found, advice = ("", "") if faults.full else self._name_fault(level, tally.twin)
            more = f" ({tally.n} rows, the first is here)" if tally.n > 1 else ""
            faults.add(*tally.first, found + more, advice)

    def add_count_faults(self, faults: FaultList) -> None:
        """Add a fault for each level that is absent or has another number of rows than planned."""
        expected = self._listed if self._declared is not None else (*self._by_level, *self._tallies)
        misfits = [misfit for level in dict.fromkeys(expected) for misfit in self._misfit(level)]
        for line, column, found, advice in sorted(misfits, key=lambda one: (one[0] is None, one[0] or 0)):
            faults.add(line, column, found, advice)

    def _misfit(self, level: str) -> Iterator[tuple[int | None, int | None, str, str]]:
        tally = self._tallies.get(level)
        if tally is None:
            advice = "add its values, or take it out of the study"
            yield None, None, f"level {quoted(level)} has no row", advice
        elif tally.sound and tally.planned is not None and tally.n != tally.planned:
            found = f"level {quoted(level)}: found {tally.n}, planned {tally.planned}"
            which = "its first row too many is here" if tally.surplus else "its last row is here"
            advice = f"{which}; rows and planned replicates have to agree"
            yield *(tally.surplus or tally.last), found, advice

    def _new_tally(self, level: str, spot: Spot) -> Tally:
        planned = self._replicates if isinstance(self._replicates, int) else self._by_level.get(level)
        if self._declared is not None:
            sound = level in self._declared and label_fault(level) is None
            return Tally(spot, spot, planned, sound)
        twin = self._seen.setdefault(as_seen(level), level)
        sound = twin == level == level.strip() and label_fault(level) is None
        return Tally(spot, spot, planned, sound, None if twin == level else twin)

    def _name_fault(self, level: str, twin: str | None) -> tuple[str, str]:
        unfit = label_fault(level)
        if unfit is not None:
            return f"level {quoted(level)} holds {unfit[0]}", unfit[1]
        if level != level.strip():
            return f"level {quoted(level)} begins or ends with a blank", f"write {quoted(level.strip())}"
        if twin is not None:
            first = self._tallies[twin].first[0]
            found = f"level {quoted(level)} looks like that of line {first} but holds other characters"
            return found, "type both the same way"
        near = nearest(level, self._listed)
        if near is None:
            advice = f"the study declares {listed(self._listed)}"
        elif as_seen(near) == as_seen(level):
            advice = f"it looks like {quoted(near)} but holds other characters; type it anew"
        else:
            advice = f"the nearest declared level is {quoted(near)}"
        return f"level {quoted(level)} is not declared", advice
