"""The rows of a worksheet in the planned measuring order, from the plan alone.

Before the shuffle the rows stand by level, in the order of the plan, and within a level by replicate from 1.
A complete shuffle mixes all of them. With blocks each block holds an equal share of every level, the first
block the first replicates; the blocks come in the order of the plan, and each is shuffled within itself.
"""

from collections.abc import Iterator
from dataclasses import dataclass

from assayfolio.canonical import canonical_digest
from assayfolio.errors import Fault, Place, StudyError
from assayfolio.study.faults import shown
from assayfolio.study.plan import StudyDefinition, WorksheetPlan
from assayfolio.worksheet.order import ALGORITHM, shuffled, words

MOST_ROWS = 2_000

_Planned = tuple[str, int]  # level, replicate


@dataclass(frozen=True, slots=True)
class WorksheetRow:
    """One measurement to be made: its place in the order from 1, its block, level, replicate and label.

    `item` is unique and does not tell the level; None where the plan gives no beginning for labels.
    """

    position: int
    block: str | None
    level: str
    replicate: int
    item: str | None


def planned_rows(study: StudyDefinition) -> tuple[WorksheetRow, ...]:
    """The worksheet of `study`, row by row in the measuring order; the same for the same plan, always.

    Raises StudyError as `check_worksheet` does.
    """
    plan, levels = check_worksheet(study)
    stream = words(study.study, plan.seed)
    placed = [
        (block, level, replicate)
        for block, share in _shares(plan, levels)
        for level, replicate in shuffled(share, stream)
    ]
    return tuple(
        WorksheetRow(position, block, level, replicate, _label(plan.item, position, len(placed)))
        for position, (block, level, replicate) in enumerate(placed, start=1)
    )


def order_digest(study: StudyDefinition, rows: tuple[WorksheetRow, ...]) -> str:
    """The SHA-256 of the order in canonical JSON: algorithm, study, seed, and the rows field by field."""
    seed = None if study.worksheet is None else str(study.worksheet.seed)
    listed = [[row.position, row.block, row.level, row.replicate, row.item] for row in rows]
    return canonical_digest({"algorithm": ALGORITHM, "study": study.study, "seed": seed, "rows": listed})


def _shares(plan: WorksheetPlan, levels: dict[str, int]) -> Iterator[tuple[str | None, list[_Planned]]]:
    """Each block with what is measured in it, by level and replicate."""
    blocks: tuple[str | None, ...] = plan.blocks or (None,)
    for at, block in enumerate(blocks):
        yield (
            block,
            [
                (level, replicate)
                for level, count in levels.items()
                for replicate in range(count * at // len(blocks) + 1, count * (at + 1) // len(blocks) + 1)
            ],
        )


def _label(beginning: str | None, position: int, count: int) -> str | None:
    if beginning is None:
        return None
    joint = "-" if beginning[-1:].isalnum() else ""
    return f"{beginning}{joint}{position:0{len(str(count))}d}"


def check_worksheet(study: StudyDefinition) -> tuple[WorksheetPlan, dict[str, int]]:
    """What the order is drawn from: the plan of the worksheet, and the number of replicates of each level.

    Raises StudyError that names each of `worksheet`, `data.levels` and `data.replicates` that is missing,
    a layout that has no row for each value, a block that cannot have an equal share, and a sheet that is too
    long to be filled in.
    """
    plan, levels, data = study.worksheet, study.data.levels, study.data
    missing = [
        (key, advice)
        for key, absent, advice in (
            ("worksheet", plan is None, "add it, such as `worksheet: {seed: 20261201}`"),
            ("data.levels", levels is None, "list the levels that will be measured"),
            ("data.replicates", data.replicates is None, "say how many values each level will have"),
        )
        if absent
    ]
    if plan is None or levels is None or missing:
        found = "`{}` is missing, without which no measuring order can be drawn"
        raise _refusal(study, [Fault(_place(study, key), found.format(key), do) for key, do in missing])
    counts = {level: data.planned_replicates(level) or 0 for level in levels}
    faults = [*_layout_faults(study), *_size_faults(plan, counts)]
    if faults:
        raise _refusal(study, faults)
    return plan, counts


def _layout_faults(study: StudyDefinition) -> Iterator[Fault]:
    if study.data.layout == "wide":
        found = "the layout is wide, which has no row for each value and so no measuring order"
        yield Fault(_place(study, "data.layout"), found, "use `layout: long`, or take `worksheet` out")


def _size_faults(plan: WorksheetPlan, counts: dict[str, int]) -> Iterator[Fault]:
    total, blocks = sum(counts.values()), len(plan.blocks)
    if total > MOST_ROWS:
        found = f"the worksheet would have {total:,} rows, more than the {MOST_ROWS:,} that can be drawn"
        yield Fault(plan.place, found, "give the levels fewer replicates, or divide the study")
    for level, count in counts.items():
        if blocks and count % blocks:
            found = f"level {shown(level)} has {count} replicates, which {blocks} blocks cannot share equally"
            yield Fault(plan.place, found, f"give it a multiple of {blocks}, or change `worksheet.blocks`")


def _place(study: StudyDefinition, key: str) -> Place:
    above = key.partition(".")[0]
    return study.place_of(key) or study.place_of(above) or study.places[0][1]


def _refusal(study: StudyDefinition, faults: list[Fault]) -> StudyError:
    return StudyError(f"{study.places[0][1].file}: the measuring order cannot be drawn", tuple(faults))
