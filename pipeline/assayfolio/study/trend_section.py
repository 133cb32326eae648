"""Reading `trend:` - the baseline of the control charts over lots, what they show, and the rules."""

from assayfolio.study.fields import (
    Fields,
    Reader,
    UnreadableError,
    Value,
    choice,
    distinct,
    label,
    list_of,
    one_or_more,
)
from assayfolio.study.names import Surroundings, response_in
from assayfolio.study.numbers import any_number, whole_number
from assayfolio.study.trend_plan import (
    BASELINE_KEYS,
    CHART_QUANTITIES,
    RUN_RULES,
    TREND_CRITERION_KEYS,
    TREND_KEYS,
    ChartQuantity,
    TrendCriterion,
    TrendPlan,
)

LEAST_LOTS = 5
MOST_LOTS = 1000

_first = whole_number(LEAST_LOTS, MOST_LOTS)
_lots = distinct(list_of(label, "a list of lots, such as [L-101, L-102]"))
_quantity: Reader[ChartQuantity] = choice(CHART_QUANTITIES)
_quantities = one_or_more(_quantity, "a quantity, or a list of quantities")
_rules = one_or_more(choice(RUN_RULES), "a rule, or a list of rules")
_ENTRIES = "a list of entries, each beginning with a hyphen"


def trend_in(surroundings: Surroundings) -> Reader[TrendPlan]:
    """A reader for `trend`; every quantity is charted where none is named."""

    def read(value: Value) -> TrendPlan:
        fields = Fields.of(value, TREND_KEYS)
        baseline = fields.required("baseline", _baseline)
        quantities = fields.optional("quantities", _quantities) or CHART_QUANTITIES
        rules = fields.required("rules", _rules)
        criteria = fields.optional("criteria", list_of(_criterion_in(surroundings), _ENTRIES)) or ()
        if baseline is None or rules is None:
            raise UnreadableError
        return TrendPlan(*baseline, quantities, rules, criteria, value.node.place)

    return read


def _baseline(value: Value) -> tuple[int | None, tuple[str, ...]]:
    fields = Fields.of(value, BASELINE_KEYS)
    first = fields.optional("first", _first)
    lots = fields.optional("lots", _lots) or ()
    if len(fields.keys.intersection(BASELINE_KEYS)) != 1:
        found = "`trend.baseline` does not say which lots the limits come from in one way"
        fields.faults.add(fields.place, found, "write `first: 20`, or `lots: [...]`")
        raise UnreadableError
    if lots and len(lots) < LEAST_LOTS:
        lots_value = fields.value("lots")
        assert lots_value is not None, "it has just been read"
        raise lots_value.unreadable(f"names {len(lots)} lots", f"{LEAST_LOTS} lots or more")
    if first is None and not lots:
        raise UnreadableError
    return first, lots


def _criterion_in(surroundings: Surroundings) -> Reader[TrendCriterion]:
    def read(value: Value) -> TrendCriterion:
        fields = Fields.of(value, TREND_CRITERION_KEYS)
        quantity = fields.required("quantity", _quantity)
        at_most = fields.optional("at-most", any_number)
        at_least = fields.optional("at-least", any_number)
        response = fields.optional("response", response_in(surroundings))
        if not any(key in fields or fields.unreadable(key) for key in ("at-most", "at-least")):
            found = "an entry of `trend.criteria` has no limit"
            fields.faults.add(fields.place, found, "write `at-most`, `at-least` or both")
        if at_most is not None and at_least is not None and at_least > at_most:
            found = (
                "`trend.criteria.at-least` is above `trend.criteria.at-most`, so that nothing can meet both"
            )
            fields.faults.add(fields.place_of("at-least"), found, "exchange or correct them")
        if quantity is None:
            raise UnreadableError
        return TrendCriterion(quantity, at_most, at_least, response, value.node.place)

    return read
