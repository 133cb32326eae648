"""The values of one response as received, and what the policies of the plan make of them."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field, replace

from assayfolio.observations.censoring import BELOW, POLICIES, has_half, put_in
from assayfolio.observations.flow import count_flow
from assayfolio.observations.repeats import averaged
from assayfolio.observations.units import UnitConversion
from assayfolio.observations.values import BelowLimit, Cause, Observation, Observations, RawFile, SetAside
from assayfolio.study.exclusions import Exclusion
from assayfolio.study.plan import DataPlan

Rows = tuple[Observation, ...]


@dataclass(slots=True)
class Part:
    """What was received for one response.

    `kept` holds the values in the order of the files, with the limit as the value of what lies beyond it;
    `units` the replicate of each where the plan has them; `excluded` the exclusions by position in `kept`.
    What gives no number is in `set_aside`. `beyond_limits` says whether a value lies beyond a limit.
    """

    response: str
    conversion: UnitConversion | None
    kept: list[Observation] = field(default_factory=list)
    units: list[str] = field(default_factory=list)
    excluded: dict[int, Exclusion] = field(default_factory=dict)
    set_aside: list[SetAside] = field(default_factory=list)
    beyond_limits: bool = False

    def keep(self, value: Observation, unit: str | None, exclusion: Exclusion | None) -> None:
        """Take a value with its replicate and with the exclusion that means it."""
        if exclusion is not None:
            self.excluded[len(self.kept)] = exclusion
        if value.limit is not None:
            self.beyond_limits = True
        self.kept.append(value)
        if unit is not None:
            self.units.append(unit)

    def observations(
        self,
        plan: DataPlan,
        files: tuple[RawFile, ...],
        extra_columns: tuple[str, ...],
        received: Sequence[tuple[str, int]],
    ) -> Observations:
        """The observations, with the counts of each level from `received` (level, number) to analysed.

        Raises MachineError where the counts do not add up.
        """
        # A value below a limit is refused where the plan has no policy for it, so that this one is not used.
        planned: BelowLimit = "limit" if plan.below_limit == "refuse" else plan.below_limit
        if self.excluded or self.beyond_limits:
            rows, set_aside = self._analysed(plan, planned), self._all_set_aside(plan, planned)
        else:
            rows, set_aside = tuple(self.kept), tuple(self.set_aside)
            rows = averaged(rows, self.units) if self.units else rows
        return Observations(
            files=files,
            response=self.response,
            factor=plan.factor,
            levels=tuple(level for level, _ in received),
            extra_columns=extra_columns,
            rows=rows,
            set_aside=set_aside,
            with_excluded=self._rows(lambda _, row: put_in(row, plan, planned)) if self.excluded else rows,
            flow=count_flow(received, set_aside, rows),
            under_policies=tuple(self._under_policies(plan, planned, rows)),
        )

    def _analysed(self, plan: DataPlan, below_limit: BelowLimit) -> Rows:
        """What is analysed under a policy for values below a limit."""
        return self._rows(lambda at, row: None if at in self.excluded else put_in(row, plan, below_limit))

    def _rows(self, wanted: Callable[[int, Observation], Observation | None]) -> Rows:
        """What `wanted` makes of each value at its position (None: nothing), with repeats averaged."""
        found = [(at, row) for at, kept in enumerate(self.kept) if (row := wanted(at, kept)) is not None]
        rows = tuple(row for _, row in found)
        return averaged(rows, [self.units[at] for at, _ in found]) if self.units else rows

    def _all_set_aside(self, plan: DataPlan, below_limit: BelowLimit) -> tuple[SetAside, ...]:
        """Everything that was received and is not analysed, in the order of the files."""
        aside = list(self.set_aside)
        for at, row in enumerate(self.kept):
            exclusion = self.excluded.get(at)
            if exclusion is not None:
                bare = SetAside(row.file, row.line, row.level, row.text, "excluded", row.value)
                aside.append(excluded(bare, exclusion))
            elif put_in(row, plan, below_limit) is None:
                cause: Cause = "below limit" if row.kind == BELOW else "above limit"
                aside.append(SetAside(row.file, row.line, row.level, row.text, cause, row.value))
        return tuple(sorted(aside, key=lambda one: (one.file, one.line)))

    def _under_policies(
        self, plan: DataPlan, planned: BelowLimit, rows: Rows
    ) -> Sequence[tuple[BelowLimit, Rows]]:
        """What would be analysed under each policy, where a value that is not excluded lies below a limit."""
        if not self.beyond_limits:
            return ()
        below = [
            row.value for at, row in enumerate(self.kept) if row.kind == BELOW and at not in self.excluded
        ]
        if not below:
            return ()
        possible = [policy for policy in POLICIES if policy != "half-limit" or all(map(has_half, below))]
        return [(policy, rows if policy == planned else self._analysed(plan, policy)) for policy in possible]


def excluded(bare: SetAside, exclusion: Exclusion) -> SetAside:
    """A value set aside, as the exclusion that means it has it."""
    return replace(
        bare,
        cause="excluded",
        reason=exclusion.reason,
        decided_by=exclusion.decided_by,
        decided_at=exclusion.decided_at,
        approved_by=exclusion.approved_by or "",
    )
