"""What one cell says: a number, nothing, or a limit that the value lies beyond; what the plan makes of it.

Nothing is guessed: an entry counts as missing where it is blank or a code that the plan declares, as beyond a
limit where it begins with < or > or is a declared code.
"""

from collections.abc import Mapping
from dataclasses import replace
from typing import Final, Literal, NamedTuple

from assayfolio.exact import Decimal10, NotADecimalError, decimal_of, parse_decimal
from assayfolio.observations.values import BelowLimit, Observation
from assayfolio.study.faults import shown
from assayfolio.study.plan import DataPlan

MISSING: Final = "missing"
BELOW: Final = "below limit"
ABOVE: Final = "above limit"
MEASURED: Final = "measured"

POLICIES: tuple[BelowLimit, ...] = ("omit", "half-limit", "limit")


class Reading(NamedTuple):
    """One cell as understood: its kind, its number (the limit where it is beyond one, None where missing).

    A named tuple, since one is made for each of perhaps a million values. `coded` says that the number is
    that of a declared code, and so in the unit of the plan.
    """

    kind: Literal["measured", "missing", "below limit", "above limit"]
    number: Decimal10 | None
    coded: bool = False


class CellReader:
    """Reads cells by the codes and the decimal mark of a plan."""

    def __init__(self, plan: DataPlan) -> None:
        self._mark = "," if plan.decimal_mark == "comma" else "."
        codes: dict[str, Reading] = dict.fromkeys(("", *plan.missing_codes), Reading(MISSING, None))
        codes |= {code: Reading(BELOW, decimal_of(limit), True) for code, limit in plan.limit_codes}
        self._codes: Mapping[str, Reading] = codes

    def read(self, cell: str) -> Reading:
        """What `cell` says; blanks and tabs around it are not part of it.

        Raises NotADecimalError, saying why, for what is neither a number nor a declared code nor a number
        behind < or >.
        """
        text = cell.strip(" \t")
        known = self._codes.get(text)
        if known is not None:
            return known
        if text[0] == "<":
            return Reading(BELOW, self._limit(text))
        if text[0] == ">":
            return Reading(ABOVE, self._limit(text))
        return Reading(MEASURED, parse_decimal(text, self._mark))

    def _limit(self, text: str) -> Decimal10:
        if not text[1:].strip(" \t"):
            raise NotADecimalError(f"no limit stands behind {text[0]}")
        return parse_decimal(text[1:], self._mark)


def refusal_of(reading: Reading, cell: str, plan: DataPlan) -> tuple[str, str] | None:
    """What a cell that the plan refuses holds, and what to do about it; None where the plan has it."""
    if reading.kind == MISSING and plan.missing == "refuse":
        found = f"holds {shown(cell)}, which stands for a missing value" if cell.strip() else "is blank"
        return found, _MISSING_ADVICE
    against = f"holds {shown(cell)}: a value reported against a limit"
    if reading.kind == BELOW and plan.below_limit == "refuse":
        return against, _LIMIT_ADVICE.format(key="below-limit")
    if reading.kind == ABOVE and plan.above_limit == "refuse":
        return against, _LIMIT_ADVICE.format(key="above-limit")
    if reading.kind == BELOW and plan.below_limit == "half-limit" and not has_half(reading.number):
        return f"holds {shown(cell)}: half of a limit that is not above zero is no value below it", (
            "keep the original; plan `below-limit: limit` or `omit` for this response"
        )
    return None


_MISSING_ADVICE = (
    "keep the original; where the plan leaves missing values out, state `missing: omit` in the study's data"
)
_LIMIT_ADVICE = "keep the original; state in the study's data, under `{key}`, what such values become"


def number_advice(reason: str, cell: str) -> str:
    """What to do about a cell that is no number for this reason."""
    if "against a limit" in reason or "no limit" in reason:
        return "keep the original; a limit is written as < or > and a number, such as <0.05"
    if "decimal comma is declared" in reason:
        return "write the value with a comma, or take decimal-mark out of the study's data"
    if "comma" in reason and cell.count(",") == 1:
        return "if it is a decimal comma, state `decimal-mark: comma` in the study's data"
    if "digits" in reason or "power of ten" in reason:
        return "give the value as it was recorded"
    return "give a plain number such as 12.50, or state in the study's data what this entry stands for"


def has_half(limit: Decimal10 | None) -> bool:
    """Whether half the limit lies below it, as it does where it is above zero."""
    return limit is not None and limit.mantissa > 0


def put_in(row: Observation, plan: DataPlan, below_limit: BelowLimit) -> Observation | None:
    """What is analysed for `row`, whose value is the limit where it lies beyond one; None for nothing.

    With half-limit the value is half the limit, exactly, with the limit's decimal places.
    """
    if row.kind == BELOW:
        if below_limit == "omit":
            return None
        if below_limit == "half-limit":
            limit = row.value
            return replace(row, value=Decimal10(limit.mantissa, limit.exponent, 2 * limit.divisor))
    if row.kind == ABOVE and plan.above_limit == "omit":
        return None
    return row
