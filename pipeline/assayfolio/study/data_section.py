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
    whole_number,
)
from assayfolio.study.nodes import MappingNode, ScalarNode, SequenceNode
from assayfolio.study.plan import DataPlan
from assayfolio.study.suggestions import nearest
from assayfolio.study.vocabulary import (
    BELOW_LIMIT,
    DATA_KEYS,
    DECIMAL_MARKS,
    LONGEST_PATH,
    MISSING,
)

MOST_REPLICATES = 1_000_000

Replicates = int | tuple[tuple[str, int], ...]
_path_text = line_of_text(LONGEST_PATH)
_columns = distinct(list_of(label, "a column, or a list of columns"))
_count = whole_number(1, MOST_REPLICATES)
_DRIVE = re.compile(r"[A-Za-z]:")


def read_data(value: Value) -> DataPlan | None:
    """`data:` as a plan; None where a compulsory key is missing or unreadable."""
    fields = Fields.of(value, DATA_KEYS)
    if fields is None:
        return None
    file = fields.required("file", _path)
    response = fields.required("response", _response)
    factor = fields.required("factor", label)
    unit = fields.optional("unit", label, None)
    levels = fields.optional("levels", _levels, None)
    replicates = fields.optional("replicates", _replicates_of(levels), None)
    missing = fields.optional("missing", choice(MISSING), "refuse")
    below_limit = fields.optional("below-limit", choice(BELOW_LIMIT), "refuse")
    decimal_mark = fields.optional("decimal-mark", choice(DECIMAL_MARKS), "point")
    if file is None or response is None or factor is None:
        return None
    if factor in response:
        found = f"the column {shown(factor)} is both `data.factor` and `data.response`"
        fields.faults.add(fields.place_of("factor"), found, "name the column that holds the levels")
    return DataPlan(file, response, factor, unit, levels, replicates, missing, below_limit, decimal_mark)


def _path(value: Value) -> str | None:
    path = _path_text(value)
    if path is None:
        return None
    expected = "a path below this file's folder, such as data/values.csv"
    parts = path.split("/")
    if "\\" in path:
        value.refuse(f"is {shown(path)}, with a backslash", f"{expected}; write / between folders")
    elif path.startswith("/") or _DRIVE.match(path):
        value.refuse(f"is {shown(path)}, an absolute path", expected)
    elif ".." in parts:
        value.refuse(f"is {shown(path)}, which leaves the folder", expected)
    elif "" in parts or "." in parts:
        value.refuse(f"is {shown(path)}, with an empty part or a single point", expected)
    elif any(part != part.strip() for part in parts):
        value.refuse(f"is {shown(path)}, with a blank beside a /", expected)
    else:
        return path
    return None


def _response(value: Value) -> tuple[str, ...] | None:
    if isinstance(value.node, ScalarNode):
        column = label(value)
        return None if column is None else (column,)
    return _columns(value)


def _levels(value: Value) -> tuple[str, ...] | None:
    levels = distinct(list_of(label, "a list of levels, such as [lot-a, lot-b]"))(value)
    if levels is not None and len(levels) == 1:
        found = f"declares only {shown(levels[0])}, which leaves nothing to compare"
        value.refuse(found, "two levels or more, or leave the key out")
    return levels


def _replicates_of(levels: tuple[str, ...] | None) -> Reader[Replicates]:
    """A reader for one number, or for a mapping that gives one for each of `levels` if they are declared."""

    def read(value: Value) -> Replicates | None:
        node = value.node
        if isinstance(node, MappingNode):
            return _per_level(value, node, levels)
        if isinstance(node, SequenceNode):
            value.refuse("is a list", "a whole number, or a mapping of levels to whole numbers")
            return None
        return _count(value)

    return read


def _per_level(
    value: Value, node: MappingNode, levels: tuple[str, ...] | None
) -> tuple[tuple[str, int], ...] | None:
    if not node.entries:
        value.refuse("is an empty mapping", "a whole number for each level, or leave the key out")
        return None
    pairs: list[tuple[str, int]] = []
    for entry in node.entries:
        level = level_of(Value(entry.key, value.name, value.faults), levels)
        count = _count(Value(entry.value, f"{value.name}.{entry.key.text[:40]}", value.faults))
        if level is not None and count is not None:
            pairs.append((level, count))
    absent = [level for level in levels or () if node.entry(level) is None]
    if absent:
        names = ", ".join(shown(level) for level in absent[:3])
        more = f" and {len(absent) - 3} more" if len(absent) > 3 else ""
        value.refuse(f"gives no number for {names}{more}", "one for each declared level")
    return tuple(pairs) if len(pairs) == len(node.entries) and not absent else None


def level_of(value: Value, levels: tuple[str, ...] | None) -> str | None:
    """A level by name; where `levels` are declared it must be one of them."""
    name = label(value)
    if name is None or levels is None or name in levels:
        return name
    near = nearest(name, levels)
    expected = "one of `data.levels`" + (f"; did you mean {shown(near)}?" if near else "")
    value.refuse(f"names the level {shown(name)}, which is not declared", expected)
    return None
