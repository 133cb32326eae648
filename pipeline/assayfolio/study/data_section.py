"""Reading `data:` - the file, its columns, the levels and how many values each should have."""

import re

from assayfolio.study.faults import shown
from assayfolio.study.fields import (
    Fields,
    Reader,
    T,
    Value,
    choice,
    distinct,
    each,
    label,
    line_of_text,
    list_of,
)
from assayfolio.study.nodes import MappingNode, ScalarNode
from assayfolio.study.numbers import whole_number
from assayfolio.study.plan import DataPlan
from assayfolio.study.suggestions import nearest
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
_columns = distinct(list_of(label, "a column, or a list of columns"))
_level_list = distinct(list_of(label, "a list of levels, such as [lot-a, lot-b]"))
_count = whole_number(1, MOST_REPLICATES)
_DRIVE = re.compile(r"[A-Za-z]:")


def read_data(fields: Fields) -> tuple[DataPlan | None, tuple[str, ...] | None]:
    """`data:` as a plan, None where a compulsory key is missing or unreadable; and the declared levels.

    The levels are empty where none are declared and None where they cannot be read.
    """
    file = fields.required("file", _path)
    response = fields.required("response", _response)
    factor = fields.required("factor", label)
    unit = fields.optional("unit", label)
    levels = fields.optional("levels", _levels)
    replicates = fields.optional("replicates", _replicates_of(levels))
    missing = fields.optional("missing", _missing) or "refuse"
    below_limit = fields.optional("below-limit", _below_limit) or "refuse"
    decimal_mark = fields.optional("decimal-mark", _decimal_mark) or "point"
    declared = None if fields.unreadable("levels") else levels or ()
    if factor is not None and factor in (response or ()):
        found = f"the column {shown(factor)} is both `data.factor` and `data.response`"
        fields.faults.add(fields.place_of("factor"), found, "name the column that holds the levels")
    if file is None or response is None or factor is None:
        return None, declared
    plan = DataPlan(file, response, factor, unit, levels, replicates, missing, below_limit, decimal_mark)
    return plan, declared


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


def _response(value: Value) -> tuple[str, ...]:
    return (label(value),) if isinstance(value.node, ScalarNode) else _columns(value)


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
    present = {entry.key.text for entry in node.entries}
    absent = [level for level in levels or () if level not in present]
    if absent:
        names = ", ".join(shown(level) for level in absent[:3])
        more = f" and {len(absent) - 3} more" if len(absent) > 3 else ""
        value.report(f"gives no number for {names}{more}", "one for each declared level")
    return by_level(value, node, levels, _count)


def by_level(
    value: Value, node: MappingNode, levels: tuple[str, ...] | None, reader: Reader[T]
) -> tuple[tuple[str, T], ...]:
    """The levels that are the keys of a mapping, each with what stands under it."""
    keys = [Value(entry.key, value.name, value.faults) for entry in node.entries]
    values = [Value(entry.value, value.name, value.faults) for entry in node.entries]
    names = each(lambda key: level_of(key, levels), keys)
    return tuple(zip(names, each(reader, values), strict=True))


def level_of(value: Value, levels: tuple[str, ...] | None) -> str:
    """A level by name; where `levels` are declared it must be one of them."""
    name = label(value)
    if levels is None or name in levels:
        return name
    near = None if value.faults.full else nearest(name, levels)
    expected = "one of `data.levels`" + (f"; did you mean {shown(near)}?" if near else "")
    raise value.unreadable(f"names the level {shown(name)}, which is not declared", expected)
