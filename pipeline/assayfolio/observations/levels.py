"""Which levels stand in the rows, and whether they are those that the plan declares."""

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, field
from functools import partial

from assayfolio.observations.faults import FaultList, listed
from assayfolio.observations.labels import as_seen, first_unsettable, unprintable
from assayfolio.study.faults import shown
from assayfolio.study.plan import DataPlan
from assayfolio.study.suggestions import nearest
from assayfolio.study.vocabulary import LONGEST_LABEL

COMPARED_NAMES = 200

Where = tuple[int, int, int]
"""The position of a file, and line and column from one."""


@dataclass(slots=True)
class Tally:
    """One level as it comes in: where its rows stand, how many there are, and how many replicates.

    `surplus` is the place of the first replicate beyond the planned number, `twin` an earlier level that
    looks the same. `units` holds the replicates that have a name. `first` is None for a sound name, of which
    nobody asks where it stands; `last` is kept where a number is planned.
    """

    first: Where | None
    planned: int | None
    twin: str | None = None
    last: Callable[[], Where] | None = None
    rows: int = 0
    n: int = 0
    surplus: Where | None = None
    units: set[str] = field(default_factory=set)


class LevelCount:
    """The levels in order of first appearance in the files, counted row by row."""

    def __init__(self, plan: DataPlan) -> None:
        self._declared = None if plan.levels is None else frozenset(plan.levels)
        self._listed = plan.levels or ()
        self._replicates = plan.replicates
        self._by_level = dict(plan.replicates) if isinstance(plan.replicates, tuple) else {}
        self._tallies: dict[str, Tally] = {}
        self._seen = {as_seen(level): level for level in self._listed}

    def count(self, level: str, where: Callable[[], Where], unit: str | None = None) -> None:
        """Take one row of `level`; `where` says where its level stands, and is asked only for a fault.

        Rows with the same `unit` are repeats and count as one replicate.
        """
        tally = self._tallies.get(level)
        if tally is None:
            tally = self._tallies[level] = self._new_tally(level, where)
        tally.rows += 1
        if tally.planned is not None:
            tally.last = where
        if unit is not None:
            if unit in tally.units:
                return
            tally.units.add(unit)
        tally.n += 1
        if tally.surplus is None and tally.planned is not None and tally.n > tally.planned:
            tally.surplus = where()

    def count_many(self, level: str, count: int, where: Callable[[int], Where]) -> None:
        """Take `count` rows of `level` (one or more), the levels of which stand at `where` of 0, 1, ...

        The place is asked for only where it may be needed.
        """
        tally = self._tallies.get(level)
        if tally is None:
            tally = self._tallies[level] = self._new_tally(level, partial(where, 0))
        tally.rows += count
        tally.n += count
        if tally.planned is None:
            return
        tally.last = _known(where(count - 1))
        if tally.surplus is None and tally.n > tally.planned:
            tally.surplus = where(count - 1 - (tally.n - tally.planned - 1))

    def in_order(self) -> tuple[str, ...]:
        """The levels in the order of the plan, or of first appearance where it declares none."""
        return tuple(self._tallies) if self._declared is None else self._listed

    def received(self, level: str) -> int:
        """How many rows of `level` were taken."""
        tally = self._tallies.get(level)
        return 0 if tally is None else tally.rows

    def add_name_faults(self, faults: Sequence[FaultList]) -> None:
        """Add one fault for each level whose name cannot be taken, at its first row; a list a file."""
        for level, tally in self._tallies.items():
            if tally.first is None:
                continue
            # Finding the nearest name is slow, so it is left out for faults that are only counted.
            file, line, column = tally.first
            found, advice = ("", "") if faults[file].full else self._name_fault(level, tally.twin)
            more = f" ({tally.rows} rows, the first is here)" if tally.rows > 1 else ""
            faults[file].add(line, column, found + more, advice)

    def add_count_faults(self, faults: Sequence[FaultList]) -> None:
        """Add a fault for each level that is absent or has another number of replicates than planned.

        `faults` has a list a file; an absent level is a fault of the last.
        """
        expected = self._listed if self._declared is not None else (*self._by_level, *self._tallies)
        levels = dict.fromkeys(expected)
        for (file, line, column), found, advice in sorted(
            misfit for level in levels for misfit in self._misfit(level)
        ):
            faults[file].add(line, column, found, advice)
        for level in levels:
            if level not in self._tallies:
                advice = "add its values, or take it out of the study"
                faults[-1].add(None, None, f"level {shown(level)} has no row", advice)

    def _misfit(self, level: str) -> Iterator[tuple[Where, str, str]]:
        tally = self._tallies.get(level)
        if tally is None or tally.first is not None or tally.planned is None or tally.n == tally.planned:
            return
        place = tally.surplus or (tally.last() if tally.last else None)
        if place is None:
            return  # a level is counted with its rows, of which one is the last
        what = " replicates" if tally.units else ""
        found = f"level {shown(level)}: found {tally.n}{what}, planned {tally.planned}"
        which = "its first row too many is here" if tally.surplus else "its last row is here"
        advice = f"{which}; {what.strip() or 'rows'} and planned replicates have to agree"
        yield place, found, advice

    def _new_tally(self, level: str, where: Callable[[], Where]) -> Tally:
        planned = self._replicates if isinstance(self._replicates, int) else self._by_level.get(level)
        twin = self._seen.setdefault(as_seen(level), level)
        known = twin == level == level.strip() if self._declared is None else level in self._declared
        fits = first_unsettable(level) is None and len(level) <= LONGEST_LABEL
        first = None if known and fits else where()
        return Tally(first, planned, None if twin == level else twin)

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


def _known(where: Where) -> Callable[[], Where]:
    return lambda: where
