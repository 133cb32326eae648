"""Reading `data:` - the files, their columns, the levels and how many values each should have."""

from assayfolio.study.entries import conversions_to, limit_codes_for, missing_codes, report_shared_codes
from assayfolio.study.faults import shown
from assayfolio.study.fields import Fields, Reader, Value, choice, distinct, label, list_of, one_or_more
from assayfolio.study.names import Surroundings, by_name, level_of, report_absent, response_of
from assayfolio.study.nodes import MappingNode, ScalarNode
from assayfolio.study.numbers import whole_number
from assayfolio.study.paths import is_pattern, path_such_as, sources
from assayfolio.study.plan import DataPlan, Encoding
from assayfolio.study.vocabulary import (
    ABOVE_LIMIT,
    BELOW_LIMIT,
    DECIMAL_MARKS,
    ENCODINGS,
    LAYOUTS,
    MISSING,
    AboveLimit,
    BelowLimit,
    DecimalMark,
    Layout,
    Missing,
)

LAST_HEADER_ROW = 10_000
MOST_REPLICATES = 1_000_000

Replicates = int | tuple[tuple[str, int], ...]
_encoding: Reader[Encoding] = choice(ENCODINGS)
_layout: Reader[Layout] = choice(LAYOUTS)
_missing: Reader[Missing] = choice(MISSING)
_below_limit: Reader[BelowLimit] = choice(BELOW_LIMIT)
_above_limit: Reader[AboveLimit] = choice(ABOVE_LIMIT)
_decimal_mark: Reader[DecimalMark] = choice(DECIMAL_MARKS)
_header_row = whole_number(1, LAST_HEADER_ROW)
_exclusions = path_such_as("data/exclusions.yaml")
_response = one_or_more(label, "a column, or a list of columns")
_level_list = distinct(list_of(label, "a list of levels, such as [lot-a, lot-b]"))
_count = whole_number(1, MOST_REPLICATES)

# Keys that name one column each, and what that column holds.
_COLUMNS = {
    "factor": "the levels",
    "order": "the measuring order",
    "unit-column": "the units",
    "replicate-unit": "what was measured repeatedly",
}


def read_data(fields: Fields) -> tuple[DataPlan | None, Surroundings]:
    """`data:` as a plan, None where a compulsory key is missing or unreadable; and what others need of it."""
    files = fields.required("file", sources) or ()
    response = fields.required("response", _response) or ()
    columns = {key: fields.optional(key, label) for key in _COLUMNS if key != "factor"}
    columns["factor"] = factor = fields.required("factor", label)
    unit, units = _units(fields, response or None)
    known_units = None if fields.unreadable("unit") else dict.fromkeys(response, unit) | dict(units)
    levels = fields.optional("levels", _levels)
    replicates = fields.optional("replicates", _replicates_of(levels))
    below_limit = fields.optional("below-limit", _below_limit) or "refuse"
    plan = DataPlan(
        file=files[0] if files else "",
        files=files if len(files) > 1 or not _names_one_file(fields) else (),
        encoding=fields.optional("encoding", _encoding) or "utf-8",
        sheet=fields.optional("sheet", label),
        header_row=fields.optional("header-row", _header_row) or 1,
        layout=fields.optional("layout", _layout) or "long",
        response=response,
        factor=factor or "",
        unit=unit,
        units=units,
        unit_column=columns["unit-column"],
        convert=fields.optional("convert", conversions_to(known_units or {})) or (),
        order=columns["order"],
        levels=levels,
        replicates=replicates,
        replicate_unit=columns["replicate-unit"],
        missing=fields.optional("missing", _missing) or "refuse",
        missing_codes=fields.optional("missing-codes", missing_codes) or (),
        below_limit=below_limit,
        limit_codes=fields.optional("limit-codes", limit_codes_for(below_limit)) or (),
        above_limit=fields.optional("above-limit", _above_limit) or "refuse",
        decimal_mark=fields.optional("decimal-mark", _decimal_mark) or "point",
        exclusions=fields.optional("exclusions", _exclusions),
    )
    report_shared_codes(fields, plan)
    _report_data_as_exclusions(fields, plan)
    surroundings = Surroundings(
        levels=None if fields.unreadable("levels") else levels or (),
        responses=response or None,
        units=known_units,
        replicates=replicates,
        columns=_told_apart(fields, response, columns),
    )
    return plan if files and response and factor else None, surroundings


def _names_one_file(fields: Fields) -> bool:
    text = fields.text("file")
    return text is not None and not is_pattern(text)


def _told_apart(fields: Fields, response: tuple[str, ...], columns: dict[str, str | None]) -> dict[str, str]:
    """Each column with the key that names it; a column that two keys name is reported."""
    named = dict.fromkeys(response, "data.response")
    for key, content in _COLUMNS.items():
        column = columns[key]
        if column is not None and column in named:
            found = f"the column {shown(column)} is both `data.{key}` and `{named[column]}`"
            fields.faults.add(fields.place_of(key), found, f"name the column that holds {content}")
        elif column is not None:
            named[column] = f"data.{key}"
    return named


def _report_data_as_exclusions(fields: Fields, plan: DataPlan) -> None:
    value = fields.value("exclusions")
    if value is not None and plan.exclusions is not None and plan.exclusions in plan.sources:
        value.report("is a data file, too", "a file of its own that names rows with reasons")


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
