"""From rows as received to observations: numbers, limits, units, repeats and exclusions as planned.

Every value that was received ends in one of three places: among the rows that are analysed (by itself or in a
mean of repeats), among those set aside with the cause, or in a fault.
"""

from collections.abc import Sequence
from dataclasses import replace

from assayfolio.exact import Decimal10, NotADecimalError
from assayfolio.observations.censoring import MEASURED, CellReader, Reading, number_advice, refusal_of
from assayfolio.observations.exclusions import ExclusionMatch
from assayfolio.observations.faults import FaultList, Faults
from assayfolio.observations.levels import LevelCount
from assayfolio.observations.order import MeasuringOrder
from assayfolio.observations.parts import Part, excluded
from assayfolio.observations.received import Received, ReceivedRows
from assayfolio.observations.repeats import ReplicateUnits
from assayfolio.observations.units import UnitConversion, UnitError
from assayfolio.observations.values import Cause, Observation, Observations, RawFile, SetAside
from assayfolio.study.exclusions import Exclusion
from assayfolio.study.faults import shown
from assayfolio.study.plan import DataPlan, MeasurementFact


def assemble(
    received: ReceivedRows,
    files: Sequence[RawFile],
    plan: DataPlan,
    measurement: Sequence[MeasurementFact],
    exclusions: Sequence[Exclusion],
    faults: Faults,
) -> tuple[Observations, ...]:
    """The observations of each response of `plan`, in its order, from the rows of `files`.

    Raises DataError with the faults that reading has put into `faults` (it goes on doing so while the rows
    are taken) and those found here, in the order of the files: cells that are no number or are refused by
    the plan, units, blank entries of the columns that `measurement` names, orders, replicates, levels;
    numbers of rows are compared with the plan only if every row could be read. Then with those of the
    exclusions, each of which has to mean one value. MachineError where the counts do not add up.
    """
    assembly = Assembly(plan, measurement, ExclusionMatch(exclusions, files), faults)
    for row in received:
        assembly.take(row)
    assembly.raise_faults()
    assembly.exclusions.require_each()
    levels = assembly.levels.in_order()
    counts = [(level, assembly.levels.received(level)) for level in levels]
    return tuple(
        part.observations(plan, tuple(files), received.extra_columns, counts) for part in assembly.parts
    )


class Assembly:
    """Takes rows one by one: the good ones become parts of the observations, the others faults."""

    def __init__(
        self,
        plan: DataPlan,
        measurement: Sequence[MeasurementFact],
        exclusions: ExclusionMatch,
        faults: Faults,
    ) -> None:
        self.levels = LevelCount(plan)
        self.exclusions = exclusions
        self.parts = [
            Part(response, UnitConversion(plan, response) if plan.unit_column is not None else None)
            for response in plan.response
        ]
        self._excluding = exclusions.any
        self._plan = plan
        self._facts = [fact for fact in measurement if fact.column is not None]
        self._faults = faults
        self._reader = CellReader(plan)
        self._units = ReplicateUnits(plan.replicate_unit) if plan.replicate_unit is not None else None
        self._order = MeasuringOrder(plan.order) if plan.order is not None else None
        self._countable = True

    def take(self, row: Received) -> None:
        """Take one row, with a value of each response; after a fault nothing that was taken is used."""
        faults = self._faults.of[row.file]
        unit = self._level(row, faults)
        order = None
        if self._order is not None and row.columns.order is not None:
            order = self._order.place(row.order or "", (row.file, *row.row.spot(row.columns.order)), faults)
        if self._facts:
            self._check_facts(row, faults)
        for at, part in enumerate(self.parts):
            self._take_value(row, at, part, unit, order, faults)

    def _check_facts(self, row: Received, faults: FaultList) -> None:
        """Add a fault for each blank entry of a column that `measurement` names."""
        for fact, at, cell in zip(self._facts, row.columns.measurement, row.measurement, strict=True):
            if not cell.strip():
                found = f"column {shown(fact.column or '')} is blank"
                faults.add(*row.row.spot(at), found, f"give the {fact.key} of this measurement")

    def raise_faults(self) -> None:
        """Raise DataError with all faults of rows, levels and numbers of rows, if there is any."""
        of_levels = [faults.beside() for faults in self._faults.of]
        of_counts = [faults.beside() for faults in self._faults.of]
        self.levels.add_name_faults(of_levels)
        if self._countable and not self._faults.lost_values:
            self.levels.add_count_faults(of_counts)
        self._faults.raise_any(of_levels, of_counts)

    def _level(self, row: Received, faults: FaultList) -> str | None:
        """Count the level of the row; its replicate, where the plan has a column for it."""
        if not row.level.strip():
            found = f"column {shown(self._plan.factor)} is blank"
            faults.add(*row.level_spot, found, "give the level that the value belongs to")
            return None
        unit = None
        if self._units is not None and row.columns.replicate_unit is not None:
            where = (row.file, *row.row.spot(row.columns.replicate_unit))
            unit = self._units.name(row.replicate_unit or "", row.level, where, faults)
            if unit is None:
                self._countable = False
        self.levels.count(row.level, row.level_place, unit)
        return unit

    def _take_value(
        self, row: Received, at: int, part: Part, unit: str | None, order: int | None, faults: FaultList
    ) -> None:
        """Give the value of response number `at` to its part, as planned or excluded; or add a fault."""
        cell = row.texts[at]
        text = cell.strip(" \t")
        exclusion = self.exclusions.of(row.file, row.line, text) if self._excluding else None
        try:
            reading = self._reader.read(text)
        except NotADecimalError as error:
            if exclusion is None:
                found = f"holds {shown(cell)}: {error}"
                self._refuse(row, at, found, number_advice(str(error), cell), faults)
            else:
                part.set_aside.append(_set_aside(row, text, "excluded", None, exclusion))
            return
        refusal = None if reading.kind == MEASURED else refusal_of(reading, cell, self._plan)
        if refusal is not None and exclusion is None:
            self._refuse(row, at, *refusal, faults)
            return
        number = reading.number
        if number is not None and part.conversion is not None:
            number = self._in_unit(row, part.conversion, reading, number, faults)
        if number is None or refusal is not None:
            cause: Cause = "missing" if exclusion is None else "excluded"
            part.set_aside.append(_set_aside(row, text, cause, number, exclusion))
            return
        column = row.columns.responses[at] + 1
        value = Observation(row.line, row.level, number, text, row.extras, order, row.file, column)
        if reading.kind == "below limit" or reading.kind == "above limit":
            value = replace(value, kind=reading.kind, limit=number)
        part.keep(value, unit, exclusion)

    def _in_unit(
        self,
        row: Received,
        conversion: UnitConversion,
        reading: Reading,
        number: Decimal10,
        faults: FaultList,
    ) -> Decimal10:
        """The number of a reading in the unit of the plan."""
        if row.columns.unit is None:
            return number
        try:
            factor = conversion.factor(row.unit or "")
        except UnitError as error:
            found = f"column {shown(self._plan.unit_column or '')} {error}"
            faults.add(*row.row.spot(row.columns.unit), found, error.advice)
            return number
        return number if factor is None or reading.coded else number.times(factor)

    def _refuse(self, row: Received, at: int, found: str, advice: str, faults: FaultList) -> None:
        """Add a fault of the cell of response number `at`; a wide layout names its column by the level."""
        column = row.level if row.columns.level is None else self._plan.response[at]
        spot = row.row.spot(row.columns.responses[at])
        faults.add(*spot, f"column {shown(column)} {found}", advice)


def _set_aside(
    row: Received, text: str, cause: Cause, number: Decimal10 | None, exclusion: Exclusion | None
) -> SetAside:
    bare = SetAside(row.file, row.line, row.level, text, cause, number)
    return bare if exclusion is None else excluded(bare, exclusion)
