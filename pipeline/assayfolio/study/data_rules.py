"""What the sections on data, measurements and worksheet rule out in one another."""

from assayfolio.study.nodes import MappingNode, ScalarNode, SequenceNode
from assayfolio.study.rule import Broken, Outline, Rule, mappings, word_of
from assayfolio.study.vocabulary import ENCODINGS, MEASUREMENT_KEYS

_SPREADSHEET = ".xlsx"


def _wide(outline: Outline, _: MappingNode) -> bool:
    """Whether each level has a column of its own."""
    return any(word_of(data, "layout") == "wide" for data in mappings(outline.root, "data"))


def _wide_and_several_responses(outline: Outline, data: MappingNode) -> bool:
    return _wide(outline, data) and len(outline.responses or ()) > 1


def _wide_and_a_column(key: str) -> Broken:
    def broken(outline: Outline, measurement: MappingNode) -> bool:
        entry = measurement.entry(key)
        return _wide(outline, measurement) and entry is not None and isinstance(entry.value, MappingNode)

    return broken


def _spreadsheets(data: MappingNode) -> tuple[bool, ...]:
    """Which of the data files are spreadsheets, as far as they can be read."""
    entry = data.entry("file")
    node = None if entry is None else entry.value
    nodes = node.items if isinstance(node, SequenceNode) else (node,)
    return tuple(
        item.text.lower().endswith(_SPREADSHEET)
        for item in nodes
        if isinstance(item, ScalarNode) and not item.empty
    )


def _no_spreadsheet(_: Outline, data: MappingNode) -> bool:
    files = _spreadsheets(data)
    return bool(files) and not any(files)


def _spreadsheets_alone(_: Outline, data: MappingNode) -> bool:
    files = _spreadsheets(data)
    return bool(files) and all(files)


def _refused(key: str) -> Broken:
    """Whether what the policy under `key` would be about is refused, in words or for want of them."""
    return lambda outline, data: word_of(data, key) == "refuse" or key in outline.absent


def _absent(key: str) -> Broken:
    return lambda outline, _: key in outline.absent


def _several_units(outline: Outline, _: MappingNode) -> bool:
    return len(set((outline.units or {}).values())) > 1


_OWN_COLUMN = ", and with `data.layout: wide` every level has a column of its own"
_ONE_ROW = "use `layout: long`, with one row a value, or leave it out"

DATA_RULES = (
    # the wide layout
    *(
        Rule(key, (), _wide, f" names a column beside the values{_OWN_COLUMN}", _ONE_ROW)
        for key in ("data.unit-column", "data.order", "data.replicate-unit")
    ),
    *(
        Rule(
            f"measurement.{key}",
            (),
            _wide_and_a_column(key),
            f" names a column beside the values{_OWN_COLUMN}",
            "use `layout: long`, with one row a value, or write one text for all values",
        )
        for key in MEASUREMENT_KEYS
    ),
    Rule(
        "data.response",
        (),
        _wide_and_several_responses,
        f" names several{_OWN_COLUMN}, for one response",
        "use `layout: long`, with a column a response",
    ),
    Rule(
        "data.layout",
        ("wide",),
        _absent("levels"),
        ", and `data.levels` does not say which columns are those of levels",
        "list the levels under `data.levels`",
    ),
    # spreadsheets
    Rule(
        "data.sheet",
        (),
        _no_spreadsheet,
        f" is for spreadsheets, and `data.file` names no {_SPREADSHEET} file",
        "leave it out",
    ),
    Rule(
        "data.encoding",
        tuple(encoding for encoding in ENCODINGS if encoding != "utf-8"),
        _spreadsheets_alone,
        f", and a {_SPREADSHEET} file states its own encoding",
        "leave it out; it is for text files",
    ),
    # units
    Rule(
        "data.unit-column",
        (),
        _absent("unit"),
        " has nothing to agree with, for `data.unit` is missing",
        "add the unit of the values, such as `unit: mg/L`",
    ),
    Rule(
        "data.unit-column",
        (),
        _several_units,
        " is one for all responses, and `data.unit` gives them different units",
        "leave it out, or use one unit for all responses",
    ),
    Rule(
        "data.convert",
        (),
        _absent("unit-column"),
        " has nothing to convert, for no column gives the unit of each value",
        "name that column, such as `unit-column: unit`, or leave it out",
    ),
    Rule(
        "data.convert",
        (),
        _absent("unit"),
        " has no unit to convert to, for `data.unit` is missing",
        "add the unit to convert to, such as `unit: mg/L`",
    ),
    # codes
    Rule(
        "data.missing-codes",
        (),
        _refused("missing"),
        " is for missing values, and `data.missing` is refuse, as it is when left out",
        "use `missing: omit`, or leave the codes out: an entry that is no number is refused anyway",
    ),
    Rule(
        "data.limit-codes",
        (),
        _refused("below-limit"),
        " is for values below a limit, and `data.below-limit` is refuse, as it is when left out",
        "use `below-limit: omit`, `half-limit` or `limit`, or leave the codes out: they are refused anyway",
    ),
    # the worksheet
    Rule(
        "worksheet",
        (),
        _absent("levels"),
        " is drawn from the levels, and `data.levels` is missing",
        "list what will be measured under `data.levels`",
    ),
    Rule(
        "worksheet",
        (),
        _absent("replicates"),
        " needs to know how often each level is measured, and `data.replicates` is missing",
        "say how many values each level will have, such as `replicates: 6`",
    ),
    Rule(
        "worksheet",
        (),
        _wide,
        " has one row a measurement, and `data.layout` is wide",
        "use `layout: long`, with one row a value",
    ),
)
