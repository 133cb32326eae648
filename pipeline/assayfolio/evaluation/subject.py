"""What one response brings to the evaluation: its values by level, and their analysis of variance."""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction

from assayfolio.exact import Decimal10, ExactSums
from assayfolio.findings import NotReported
from assayfolio.observations.totals import Totals
from assayfolio.observations.values import Observation, Observations
from assayfolio.statistics.oneway import NotComputableError, OneWay, one_way
from assayfolio.statistics.resolution import recorded_step

Groups = tuple[tuple[str, tuple[Decimal10, ...]], ...]


@dataclass(frozen=True, slots=True)
class Subject:
    """One response: `rows` holds the observations of each level, `groups` their values; levels as planned.

    `files` are the names of the data files, by the positions that the rows give. Where the values are too
    many to be kept, `rows` and `groups` are empty and `totals` has what is known of them.
    """

    response: str
    unit: str | None
    rows: tuple[tuple[str, tuple[Observation, ...]], ...]
    groups: Groups
    analysis: OneWay
    files: tuple[str, ...] = ()
    totals: Totals | None = None

    @property
    def extremes(self) -> tuple[tuple[Fraction, Fraction], ...]:
        """The smallest and the largest value of each level."""
        if self.totals is not None:
            return tuple((level.lowest, level.highest) for level in self.totals.levels)
        fractions = ([value.fraction for value in values] for _, values in self.groups)
        return tuple((min(values), max(values)) for values in fractions)

    @property
    def step(self) -> Fraction | None:
        """The step in which the values are recorded; None where each was put in for one beyond a limit."""
        if self.totals is not None:
            return self.totals.step
        recorded = [(level, [row.value for row in rows if row.limit is None]) for level, rows in self.rows]
        return recorded_step(recorded) if any(values for _, values in recorded) else None

    @property
    def step_or_finest(self) -> Fraction:
        """The step in which the values are recorded, that of the values put in where there are no others."""
        return self.step or recorded_step(self.groups)

    def require_values(self) -> None:
        """Raise NotComputableError where the single values were too many to be kept."""
        if self.totals is not None:
            raise NotComputableError(
                f"it needs every single value, and {self.totals.n:,} are too many to be kept one by one"
            )

    def unreported(self, what: str, reason: object) -> NotReported:
        """The entry that says why `what` cannot be given for this response."""
        return NotReported(what, str(reason), self.response)


def subject_of(
    observations: Observations, unit: str | None, rows: Sequence[Observation] | None = None
) -> Subject:
    """The subject that `observations` are about, with other `rows` of theirs where these are given.

    Raises NotComputableError where a level has no value, or every level has one.
    """
    if observations.totals is not None:
        return _summed(observations, observations.totals, unit)
    by_level: dict[str, list[Observation]] = {level: [] for level in observations.levels}
    for row in observations.rows if rows is None else rows:
        by_level[row.level].append(row)
    groups = tuple((level, tuple(row.value for row in rows)) for level, rows in by_level.items())
    return Subject(
        response=observations.response,
        unit=unit,
        rows=tuple((level, tuple(rows)) for level, rows in by_level.items()),
        groups=groups,
        analysis=one_way([(level, ExactSums.of(values)) for level, values in groups]),
        files=tuple(file.file for file in observations.files),
    )


def _summed(observations: Observations, totals: Totals, unit: str | None) -> Subject:
    return Subject(
        response=observations.response,
        unit=unit,
        rows=(),
        groups=(),
        analysis=one_way([(level.level, level.sums) for level in totals.levels]),
        files=tuple(file.file for file in observations.files),
        totals=totals,
    )
