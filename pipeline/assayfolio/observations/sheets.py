"""What reading a file of any form comes to: a header and rows of cells, with the facts of the file."""

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass

from assayfolio.observations.received import SheetRow
from assayfolio.observations.rows import Broken
from assayfolio.observations.values import RawFile
from assayfolio.study.plan import DataPlan, MeasurementFact


@dataclass(frozen=True, slots=True)
class Sheet:
    """One file as a table: its facts, the names of its columns, the rows below them, to be gone through once.

    `loose` says of a cell whether its decimal comma, if it had one, would be a separator; None where that
    cannot be.
    """

    raw: RawFile
    names: tuple[str, ...]
    rows: Iterator[SheetRow | Broken]
    loose: Callable[[SheetRow, int], bool] | None = None


def wanted_columns(plan: DataPlan, measurement: Sequence[MeasurementFact]) -> tuple[str, ...]:
    """The columns that a file has to have, each once; in the wide layout these are the declared levels."""
    if plan.layout == "wide":
        return tuple(plan.levels or ())
    single = (plan.order, plan.unit_column, plan.replicate_unit, *(fact.column for fact in measurement))
    named = (name for name in single if name is not None)
    return tuple(dict.fromkeys((*plan.response, plan.factor, *named)))
