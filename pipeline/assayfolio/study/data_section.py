"""Reading `data:` - the file, its columns, the levels and how many values each should have."""

import re

from assayfolio.study.faults import shown
from assayfolio.study.fields import (
    Fields,
    Reader,
    Value,
    choice,
    distinct,
    label,
    line_of_text,
    list_of,
    one_or_more,
)
from assayfolio.study.names import Surroundings, by_name, level_of, report_absent, response_of
from assayfolio.study.nodes import MappingNode, ScalarNode
from assayfolio.study.numbers import whole_number
from assayfolio.study.plan import DataPlan
from assayfolio.study.vocabulary import (
    BELOW_LIMIT,
    DECIMAL_MARKS,
    LONGEST_PATH,
    MISSING,
    BelowLimit,
    DecimalMark,
    Missing,
)

MOST_REPLICATES = 1_000_000

Replicates = int | tuple[tuple[str, int], ...]
_missing: Reader[Missing] = choice(MISSING)
_below_limit: Reader[BelowLimit] = choice(BELOW_LIMIT)
_decimal_mark: Reader[DecimalMark] = choice(DECIMAL_MARKS)
_path_text = line_of_text(LONGEST_PATH)
_response = one_or_more(label, "a column, or a list of columns")
_level_list = distinct(list_of(label, "a list of levels, such as [lot-a, lot-b]"))
_count = whole_number(1, MOST_REPLICATES)
_DRIVE = re.compile(r"[A-Za-z]:")


def read_data(fields: Fields) -> tuple[DataPlan | None, Surroundings]:
    """`data:` as a plan, None where a compulsory key is missing or unreadable; and what others need of it."""
    file = fields.required("file", _path)
    response = fields.required("response", _response)
    factor = fields.required("factor", label)
    unit, units = _units(fields, response)
    order = fields.optional("order", label)
    levels = fields.optional("levels", _levels)
    replicates = fields.optional("replicates", _replicates_of(levels))
    missing = fields.optional("missing", _missing) or "refuse"
    below_limit = fields.optional("below-limit", _below_limit) or "refuse"
    decimal_mark = fields.optional("decimal-mark", _decimal_mark) or "point"
    _report_shared_columns(fields, response, factor, order)
    declared = None if fields.unreadable("levels") else levels or ()
    known_units = None if fields.unreadable("unit") else dict.fromkeys(response or (), unit) | dict(units)
    surroundings = Surroundings(declared, response, known_units)
    if file is None or response is None or factor is None:
        return None, surroundings
    plan = DataPlan(
        file=file,
        response=response,
        factor=factor,
        unit=unit,
        units=units,
        order=order,
        levels=levels,
        replicates=replicates,
        missing=missing,
        below_limit=below_limit,
        decimal_mark=decimal_mark,
    )
    return plan, surroundings


def _report_shared_columns(
    fields: Fields, response: tuple[str, ...] | None, factor: str | None, order: str | None
) -> None:
    if factor is not None and factor in (response or ()):
        found = f"the column {shown(factor)} is both `data.factor` and `data.response`"
        fields.faults.add(fields.place_of("factor"), found, "name the column that holds the levels")
    if order is not None and (order == factor or order in (response or ())):
        other = "data.factor" if order == factor else "data.response"
        found = f"the column {shown(order)} is both `data.order` and `{other}`"
        fields.faults.add(fields.place_of("order"), found, "name the column that holds the measuring order")


def _units(
    fields: Fields, response: tuple[str, ...] | None
) -> tuple[str | None, tuple[tuple[str, str], ...]]:
    """The unit of all responses, and the units that are given response by response."""
    value = fields.value("unit")
    if value is None or not isinstance(value.node, MappingNode):
        return fields.optional("unit", label), ()
    return None, fields.optional("unit", _units_of(response)) or ()


def _units_of(response: tuple[str, ...] | None) -> Reader[tuple[tuple[str, str], ...]]:
    def read(value: Value) -> tuple[tuple[str, str], ...]:
        node = value.node
        assert isinstance(node, MappingNode), "other nodes are read as one unit"
        if not node.entries:
            raise value.unreadable("is an empty mapping", "a unit for each response, or leave the key out")
        report_absent(value, node, response, "unit", 'one for each response, "1" for a pure number')
        return by_name(value, node, lambda key: response_of(key, response), label)

    return read


def _path(value: Value) -> str:
    path = _path_text(value)
    expected = "a path below this file's folder, such as data/values.csv"
    parts = path.split("/")
    if "\\" in path:
        raise value.unreadable(f"is {shown(path)}, with a backslash", f"{expected}; write / between folders")
    if path.startswith("/") or _DRIVE.match(path):
        raise value.unreadable(f"is {shown(path)}, an absolute path", expected)
    if ".." in parts:
        raise value.unreadable(f"is {shown(path)}, which leaves the folder", expected)
    if "" in parts or "." in parts:
        raise value.unreadable(f"is {shown(path)}, with an empty part or a single point", expected)
    if any(part != part.strip() for part in parts):
        raise value.unreadable(f"is {shown(path)}, with a blank beside a /", expected)
    return path


def _levels(value: Value) -> tuple[str, ...]:
    levels = _level_list(value)
    if len(levels) == 1:
        found = f"declares only {shown(levels[0])}, which leaves nothing to compare"
        value.report(found, "two levels or more, or leave the key out")
    return levels


def _replicates_of(levels: tuple[str, ...] | None) -> Reader[Replicates]:
    """A reader for one number, or for a mapping that gives one for each of `levels` if they are declared."""

    def read(value: Value) -> Replicates:
        if isinstance(value.node, MappingNode):
            return _per_level(value, value.node, levels)
        if isinstance(value.node, ScalarNode):
            return _count(value)
        raise value.wrong_kind("a whole number, or a mapping of levels to whole numbers")

    return read


def _per_level(
    value: Value, node: MappingNode, levels: tuple[str, ...] | None
) -> tuple[tuple[str, int], ...]:
    if not node.entries:
        raise value.unreadable("is an empty mapping", "a whole number for each level, or leave the key out")
    report_absent(value, node, levels, "number", "one for each declared level")
    return by_name(value, node, lambda key: level_of(key, levels), _count)
