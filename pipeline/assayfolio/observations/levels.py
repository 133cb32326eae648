"""Which levels stand in the rows, and whether they are those that the plan declares."""

from collections.abc import Iterator
from dataclasses import dataclass

from assayfolio.observations.faults import FaultList, listed
from assayfolio.observations.labels import as_seen, first_unsettable, unprintable
from assayfolio.study.faults import shown
from assayfolio.study.plan import DataPlan
from assayfolio.study.suggestions import nearest
from assayfolio.study.vocabulary import LONGEST_LABEL

COMPARED_NAMES = 200

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
        self._seen = {as_seen(level): level for level in self._listed}

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
            yield None, None, f"level {shown(level)} has no row", advice
        elif tally.sound and tally.planned is not None and tally.n != tally.planned:
            found = f"level {shown(level)}: found {tally.n}, planned {tally.planned}"
            which = "its first row too many is here" if tally.surplus else "its last row is here"
            advice = f"{which}; rows and planned replicates have to agree"
            yield *(tally.surplus or tally.last), found, advice

    def _new_tally(self, level: str, spot: Spot) -> Tally:
        planned = self._replicates if isinstance(self._replicates, int) else self._by_level.get(level)
        twin = self._seen.setdefault(as_seen(level), level)
        known = twin == level == level.strip() if self._declared is None else level in self._declared
        fits = first_unsettable(level) is None and len(level) <= LONGEST_LABEL
        return Tally(spot, spot, planned, known and fits, None if twin == level else twin)

    def _name_fault(self, level: str, twin: str | None) -> tuple[str, str]:
        bad = first_unsettable(level)
        if bad is not None:
            found, advice = unprintable(bad)
            return f"level {shown(level)} holds {found}", advice
        if level != level.strip():
            return f"level {shown(level)} begins or ends with a blank", f"write {shown(level.strip())}"
        if len(level) > LONGEST_LABEL:
            found = f"level {shown(level)} has {len(level):,} characters, more than {LONGEST_LABEL}"
            return found, "give it a shorter name"
        if twin is not None:
            found = f"level {shown(level)} looks like {shown(twin)} but holds other characters"
            return found, "type both the same way"
        near = nearest(level, self._listed[:COMPARED_NAMES])
        advice = f"the nearest is {shown(near)}" if near else f"the study declares {listed(self._listed)}"
        return f"level {shown(level)} is not declared", advice
