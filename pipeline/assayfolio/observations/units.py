"""The unit of each value: that of the plan, or one that the plan gives an exact factor for."""

from collections.abc import Mapping
from fractions import Fraction

from assayfolio.observations.faults import listed
from assayfolio.study.faults import shown
from assayfolio.study.plan import DataPlan


class UnitError(ValueError):
    """A unit that values of this response may not have; `advice` says what to do."""

    def __init__(self, found: str, advice: str) -> None:
        super().__init__(found)
        self.advice = advice


class UnitConversion:
    """The factors from the units of one response in the data to the unit that the plan gives it."""

    def __init__(self, plan: DataPlan, response: str) -> None:
        self._unit = plan.unit_of(response)
        self._factors: Mapping[str, Fraction] = dict(plan.convert)

    def factor(self, cell: str) -> Fraction | None:
        """What a value with the unit in `cell` is multiplied by, exactly; None where nothing is to be done.

        Units are compared as typed, without blanks around them. Raises UnitError for a blank cell and for a
        unit that is neither the plan's nor among those that it converts.
        """
        unit = cell.strip(" \t")
        if unit == self._unit:
            return None
        if not unit:
            raise UnitError("is blank", "give the unit of the value")
        factor = self._factors.get(unit)
        if factor is None:
            wanted = "no unit" if self._unit is None else shown(self._unit)
            known = f" and converts {listed(tuple(self._factors))}" if self._factors else ""
            found = f"holds {shown(unit)}; the study has {wanted}{known}"
            key = shown(unit).strip("`")
            raise UnitError(found, f"correct it, or state the exact factor: `convert: {{{key}: ...}}`")
        return factor
