"""Reading `criteria:` - limits set in advance, each for a quantity with its level, response and unit."""

from assayfolio.study.faults import shown
from assayfolio.study.fields import Fields, Reader, UnreadableError, Value, choice, label
from assayfolio.study.names import Surroundings, level_in, response_in
from assayfolio.study.numbers import any_number
from assayfolio.study.plan import Criterion, Quantity
from assayfolio.study.vocabulary import CRITERION_KEYS, QUANTITIES

PERCENT = "%"
_quantity: Reader[Quantity] = choice(QUANTITIES)


def in_percent(quantity: Quantity) -> bool:
    """Whether the quantity is relative to a mean, in percent; any other is in the unit of the response."""
    return quantity.endswith(("-rsd", "-percent"))


def criterion_in(surroundings: Surroundings) -> Reader[Criterion]:
    """A reader for one entry of `criteria`."""

    def read(value: Value) -> Criterion:
        fields = Fields.of(value, CRITERION_KEYS)
        quantity = fields.required("quantity", _quantity)
        at_most = fields.optional("at-most", any_number)
        at_least = fields.optional("at-least", any_number)
        unit = fields.optional("unit", label)
        level = fields.optional("level", level_in(surroundings))
        response = fields.optional("response", response_in(surroundings))
        if not any(key in fields or fields.unreadable(key) for key in ("at-most", "at-least")):
            found = "an entry of `criteria` has no limit"
            fields.faults.add(fields.place, found, "write `at-most`, `at-least` or both")
        if at_most is not None and at_least is not None and at_least > at_most:
            found = "`criteria.at-least` is above `criteria.at-most`, so that nothing can meet both"
            fields.faults.add(fields.place_of("at-least"), found, "exchange or correct them")
        if quantity is None:
            raise UnreadableError
        _report_level(fields, quantity)
        if unit is not None and not fields.unreadable("response"):
            _report_unit(fields, quantity, unit, response, surroundings)
        return Criterion(quantity, at_most, at_least, unit, level, response, value.node.place)

    return read


def _report_level(fields: Fields, quantity: Quantity) -> None:
    of_one_level = quantity.startswith("level-")
    if of_one_level and "level" not in fields and not fields.unreadable("level"):
        found = f"the key `criteria.level` is missing; `{quantity}` is about one level"
        fields.faults.add(fields.place, found, "add `level: ...`")
    elif not of_one_level and "level" in fields:
        found = f"`criteria.level` stands beside `{quantity}`, which is about all levels"
        fields.faults.add(
            fields.place_of("level"), found, "leave it out, or use a quantity such as `level-sd`"
        )


def _report_unit(
    fields: Fields, quantity: Quantity, unit: str, response: str | None, surroundings: Surroundings
) -> None:
    """Report a unit other than that in which the quantity is found."""
    value = fields.value("unit")
    assert value is not None, "it has just been read"
    if in_percent(quantity):
        if unit != PERCENT:
            value.report(f"is {shown(unit)}, and `{quantity}` is in percent", '"%", or leave the key out')
        return
    units = surroundings.units or {}
    for name in units if response is None else (response,):
        wanted = units.get(name, unit)
        if wanted is None:
            found = f"is {shown(unit)}, and `data.unit` gives no unit for {shown(name)}"
            value.report(found, "the unit under `data.unit`, or leave the key out")
        elif wanted != unit:
            expected = f"{shown(wanted)}, or leave the key out"
            more = (
                "; `response` limits a criterion to one response"
                if response is None and len(units) > 1
                else ""
            )
            value.report(
                f"is {shown(unit)}, and the unit of {shown(name)} is {shown(wanted)}", expected + more
            )
