"""The counts of values from received to analysed, level by level, and the check that they add up."""

from collections import Counter
from collections.abc import Sequence

from assayfolio.errors import MachineError
from assayfolio.observations.values import CountFlow, Observation, SetAside


def count_flow(
    received: Sequence[tuple[str, int]], set_aside: Sequence[SetAside], rows: Sequence[Observation]
) -> tuple[CountFlow, ...]:
    """The counts of each level: `received` (level, number of rows), what was set aside, what is analysed.

    Each number is counted by itself. Raises MachineError where those of a level do not add up, for then a
    value was lost or made on the way.
    """
    causes = Counter((aside.level, aside.cause) for aside in set_aside)
    analysed = Counter(row.level for row in rows)
    merged: Counter[str] = Counter()
    for row in rows:
        if row.repeats:
            merged[row.level] += len(row.repeats) - 1
    flow = tuple(
        CountFlow(
            level=level,
            received=number,
            missing=causes[level, "missing"],
            below_limit=causes[level, "below limit"],
            above_limit=causes[level, "above limit"],
            excluded=causes[level, "excluded"],
            merged=merged[level],
            analysed=analysed[level],
        )
        for level, number in received
    )
    for counts in flow:
        require_sum(counts)
    strays = {*analysed, *(aside.level for aside in set_aside)} - {level for level, _ in received}
    if strays:
        raise MachineError(f"values of levels that were not received: {', '.join(sorted(strays))}")
    return flow


def require_sum(counts: CountFlow) -> None:
    """Raise MachineError where what was left out, merged and analysed is not all that was received."""
    left_out = counts.missing + counts.below_limit + counts.above_limit + counts.excluded
    if counts.received - left_out - counts.merged != counts.analysed:
        raise MachineError(
            f"the counts of level {counts.level!r} do not add up: received {counts.received}, missing "
            f"{counts.missing}, below a limit {counts.below_limit}, above a limit {counts.above_limit}, "
            f"excluded {counts.excluded}, merged {counts.merged}, analysed {counts.analysed}"
        )
