"""What is gathered of long texts, file after file: faults, numbers of rows a level, and sums."""

from collections import Counter
from collections.abc import Callable, Iterable, Sequence
from functools import partial
from typing import Final

import numpy as np

from assayfolio.observations.assembling import Assembly
from assayfolio.observations.exclusions import ExclusionMatch
from assayfolio.observations.faults import Faults
from assayfolio.observations.flow import require_sum
from assayfolio.observations.layout import MOST_LEVELS, too_many_levels
from assayfolio.observations.levels import LevelCount, Where
from assayfolio.observations.plain_stretch import Stretch
from assayfolio.observations.received import Received
from assayfolio.observations.summing import Summing
from assayfolio.observations.totals import Totals
from assayfolio.observations.values import CountFlow, Observation, Observations, RawFile
from assayfolio.study.plan import DataPlan, MeasurementFact

MOST_FAULTS: Final = 1_000


class Gathering:
    """Takes stretches and single rows of the files of a plan, in their order."""

    def __init__(self, names: Sequence[str], plan: DataPlan, measurement: Sequence[MeasurementFact]) -> None:
        self.faults = Faults.in_files(names)
        self._plan = plan
        self._assembly = Assembly(plan, measurement, ExclusionMatch((), ()), self.faults)
        self._counts = self._assembly.levels
        self._summings = [Summing() for _ in plan.response]
        self._missing: list[Counter[str]] = [Counter() for _ in plan.response]
        self._numbers: dict[str, int] = {}

    @property
    def full(self) -> bool:
        """Whether there are so many faults that more of them help nobody."""
        return self.faults.count >= MOST_FAULTS

    def take_levels(
        self, file: int, stretch: Stretch, labels: Sequence[str], place: Callable[[int], Where]
    ) -> None:
        """Count the levels of a stretch under `labels`; `place` says where the level of a row of it is."""
        counts = np.bincount(stretch.codes, minlength=len(labels))
        for code, label in enumerate(labels):
            if not label.strip():
                continue
            where = partial(_place_of, stretch, code, place)
            self._counts.count_many(label, int(counts[code]), where)
            self._number(file, label, partial(where, 0))

    def take_values(self, stretch: Stretch, labels: Sequence[str]) -> None:
        """Add the numbers of the rows of a stretch that are not odd; its levels have been taken."""
        levels = np.array([self._numbers.get(label, 0) for label in labels], dtype=np.int64)[stretch.codes]
        plain = not stretch.odd.any()
        for summing, pieces in zip(self._summings, stretch.values, strict=True):
            for piece in pieces:
                rows, mantissas = piece.rows, piece.mantissas
                if not plain:
                    sound = ~stretch.odd[rows]
                    rows, mantissas = rows[sound], mantissas[sound]
                if len(rows):
                    own = levels if len(rows) == len(levels) else levels[rows]
                    summing.add(piece.exponent, own, mantissas, len(self._numbers))

    def take_counted_rows(self, file: int, received: Iterable[Received]) -> None:
        """Take rows whose levels have been counted."""
        self._assembly.levels = LevelCount(self._plan)
        self.take_rows(file, received)
        self._assembly.levels = self._counts

    def take_rows(self, file: int, received: Iterable[Received]) -> None:
        """Take rows one by one."""
        for row in received:
            self._assembly.take(row)
            if self.full:
                self.faults.lost_values = self.faults.stopped = True  # what stands below is not counted
                break
        for part, summing, missing in zip(self._assembly.parts, self._summings, self._missing, strict=True):
            levels = [self._number(file, value.level, partial(_place_of_value, value)) for value in part.kept]
            summing.add_values(levels, [value.value for value in part.kept], len(self._numbers))
            missing.update(aside.level for aside in part.set_aside)
            part.kept.clear()
            part.set_aside.clear()

    def observations(
        self, files: tuple[RawFile, ...], extra_columns: tuple[str, ...]
    ) -> tuple[Observations, ...]:
        """The totals of each response. Raises DataError with all faults, if there are any."""
        self._assembly.raise_faults()
        levels = self._counts.in_order()
        observed = []
        for at, response in enumerate(self._plan.response):
            totals = self._summings[at].totals(levels, self._numbers)
            observed.append(
                Observations(
                    files=files,
                    response=response,
                    factor=self._plan.factor,
                    levels=levels,
                    extra_columns=extra_columns,
                    rows=(),
                    flow=self._flow(levels, self._missing[at], totals),
                    totals=totals,
                )
            )
        return tuple(observed)

    def _flow(self, levels: Sequence[str], missing: Counter[str], totals: Totals) -> tuple[CountFlow, ...]:
        analysed = {level.level: level.sums.n for level in totals.levels}
        flow = [
            CountFlow(level, self._counts.received(level), missing[level], 0, 0, 0, 0, analysed.get(level, 0))
            for level in levels
        ]
        for counts in flow:
            require_sum(counts)
        return tuple(flow)

    def _number(self, file: int, level: str, where: Callable[[], Where]) -> int:
        number = self._numbers.setdefault(level, len(self._numbers))
        if number >= MOST_LEVELS:
            raise too_many_levels(self.faults.of[file].file, self._plan.factor, *where()[1:])
        return number


def _place_of(stretch: Stretch, code: int, place: Callable[[int], Where], at: int) -> Where:
    """Where row number `at` of those with one level stands."""
    return place(int(np.flatnonzero(stretch.codes == code)[at]))


def _place_of_value(value: Observation) -> Where:
    return (value.file, value.line, 1)
