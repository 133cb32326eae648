"""Reading what stands in a data file in place of numbers: codes, and units to be converted."""

from collections.abc import Mapping
from fractions import Fraction

from assayfolio.study.faults import shown
from assayfolio.study.fields import Fields, Reader, Value, label, one_or_more
from assayfolio.study.names import by_name
from assayfolio.study.nodes import MappingNode
from assayfolio.study.numbers import ends_as_decimal, number
from assayfolio.study.plan import DataPlan

_LIMIT_SIGNS = "<>\u2264\u2265"
_ENDS = "one that ends as a decimal"
_limit = number(f"a number, such as 0.05, and {_ENDS}", ends_as_decimal)
_limit_to_halve = number(
    f"a number above 0, for `half-limit` halves it, and {_ENDS}", lambda x: x > 0 and ends_as_decimal(x)
)
_factor = number(f"a number above 0, such as 1/1000, and {_ENDS}", lambda x: x > 0 and ends_as_decimal(x))


def code(value: Value) -> str:
    """An entry as it stands in a data file, which may not begin with the sign of a limit."""
    text = label(value)
    if text[0] in _LIMIT_SIGNS:
        found = f"is {shown(text)}, which begins with the sign of a limit"
        raise value.unreadable(found, "codes alone; `below-limit` and `above-limit` are for such values")
    return text


missing_codes = one_or_more(code, "a code, or a list of codes")


def limit_codes_for(below_limit: str) -> Reader[tuple[tuple[str, Fraction], ...]]:
    """A reader for codes with their limits, which must be above 0 where `below_limit` has them halved."""
    limit = _limit_to_halve if below_limit == "half-limit" else _limit

    def read(value: Value) -> tuple[tuple[str, Fraction], ...]:
        return by_name(value, _mapping(value, "codes with their limits, such as {ND: 0.05}"), code, limit)

    return read


def report_shared_codes(fields: Fields, plan: DataPlan) -> None:
    """Report each code that stands both for a missing value and for one below a limit."""
    value = fields.value("limit-codes")
    if value is None or not isinstance(value.node, MappingNode):
        return
    missing = frozenset(plan.missing_codes)
    for entry in value.node.entries:
        if entry.key.text in missing:
            found = f"the code {shown(entry.key.text)} is also one of `data.missing-codes`"
            fields.faults.add(entry.key.place, found, "keep it under one of the two keys")


def conversions_to(units: Mapping[str, str | None]) -> Reader[tuple[tuple[str, Fraction], ...]]:
    """A reader for exact factors by unit; `units` are those of the responses, which need none."""

    def other_unit(value: Value) -> str:
        unit = label(value)
        if unit not in units.values():
            return unit
        raise value.unreadable(f"converts {shown(unit)}, the unit of the plan itself", "other units")

    def read(value: Value) -> tuple[tuple[str, Fraction], ...]:
        node = _mapping(value, "units with their factors, such as {ug/L: 1/1000}")
        return by_name(value, node, other_unit, _factor)

    return read


def _mapping(value: Value, expected: str) -> MappingNode:
    if not isinstance(value.node, MappingNode):
        raise value.wrong_kind(expected)
    if not value.node.entries:
        raise value.unreadable("is an empty mapping", f"{expected}, or leave the key out")
    return value.node
