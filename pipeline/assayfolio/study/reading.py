"""Reading a study definition and a laboratory's settings from bytes: all faults of a file in one pass."""

import re

from assayfolio.errors import Place
from assayfolio.study.comparison_section import Surroundings, comparison_in, equivalence_in
from assayfolio.study.data_section import read_data
from assayfolio.study.faults import Faults, listed
from assayfolio.study.fields import (
    Fields,
    Reader,
    T,
    choice,
    distinct,
    label,
    line_of_text,
    list_of,
    mapping_of,
    matching,
    paragraphs,
    report_repeats_of,
)
from assayfolio.study.nodes import MappingNode, RefusedNode
from assayfolio.study.numbers import probability, whole_number
from assayfolio.study.plan import ChecksPlan, DesignPlan, Laboratory, StudyDefinition
from assayfolio.study.small_sections import (
    read_checks,
    read_criterion,
    read_design,
    read_outliers,
    read_power,
    read_precision,
    read_sign_off,
)
from assayfolio.study.vocabulary import (
    CHECK_KEYS,
    DATA_KEYS,
    DESIGN_KEYS,
    LABORATORY_KEYS,
    LONGEST_NOTE,
    LONGEST_PARAGRAPHS,
    LONGEST_TITLE,
    PAPERS,
    REQUIREMENTS,
    STUDY_KEYS,
    Paper,
    Variances,
)

MOST_WAIT_SECONDS = 600
DEFAULT_ACCENT = "#0f5b66"
DEFAULT_WAIT_SECONDS = 10
_identifier = matching(
    re.compile(r"[A-Z0-9][A-Z0-9-]{0,39}", re.ASCII),
    "1 to 40 capital letters, digits and hyphens, such as LOT-2024-07",
)
_colour = matching(re.compile(r"#[0-9A-Fa-f]{6}", re.ASCII), 'a colour in quotation marks, such as "#0f5b66"')
_paper: Reader[Paper] = choice(PAPERS)
_ENTRIES = "a list of entries, each beginning with a hyphen"
_REQUIREMENT_LIST = f"a list of {listed(REQUIREMENTS)}"


def read_study(content: bytes, file: str) -> StudyDefinition:
    """The study definition in `content`; `file` is its name in messages.

    Raises StudyError with every fault of the file, each with line and column.
    """
    faults = Faults(file)
    fields = _root(content, STUDY_KEYS, faults)
    study = None if fields is None else _study(fields)
    faults.raise_if_any("the study definition")
    assert study is not None, "a definition without faults is complete"
    return study


def read_laboratory(content: bytes, file: str) -> Laboratory:
    """The laboratory's settings in `content`; `file` is its name in messages.

    Raises StudyError with every fault of the file, each with line and column.
    """
    faults = Faults(file)
    fields = _root(content, LABORATORY_KEYS, faults)
    laboratory = None if fields is None else _laboratory(fields)
    faults.raise_if_any("the laboratory's settings")
    assert laboratory is not None, "settings without faults are complete"
    return laboratory


def _root(content: bytes, keys: tuple[str, ...], faults: Faults) -> Fields | None:
    from assayfolio.study.document import compose  # loads the YAML parser, when there is something to parse

    node = compose(content, faults)
    if node is None or isinstance(node, RefusedNode):
        return None
    if isinstance(node, MappingNode):
        return Fields(node, "", keys, faults)
    found = "the file is no mapping of keys to values"
    faults.add(node.place, found, f"write lines such as `{keys[0]}: ...`, with a blank behind the colon")
    return None


def _study(fields: Fields) -> StudyDefinition | None:
    study = fields.required("study", _identifier)
    title = fields.required("title", line_of_text(LONGEST_TITLE))
    purpose = fields.optional("purpose", paragraphs(LONGEST_PARAGRAPHS))
    alpha = fields.required("alpha", probability)
    data_fields = fields.required("data", mapping_of(DATA_KEYS))
    data, levels = (None, None) if data_fields is None else read_data(data_fields)
    design_fields = fields.optional("design", mapping_of(DESIGN_KEYS))
    design = DesignPlan() if design_fields is None else read_design(design_fields)
    checks_fields = fields.optional("checks", mapping_of(CHECK_KEYS))
    checks = ChecksPlan() if checks_fields is None else read_checks(checks_fields)
    surroundings = Surroundings(levels, _variances(fields, design_fields, design))
    comparisons = _named_entries(fields, "comparisons", "name", comparison_in(surroundings))
    equivalence = _named_entries(fields, "equivalence", "name", equivalence_in(surroundings))
    outliers = fields.optional("outliers", read_outliers)
    precision = fields.optional("precision", read_precision)
    power = fields.optional("power", read_power)
    criteria = fields.optional("criteria", list_of(read_criterion, _ENTRIES)) or ()
    sign_off = _named_entries(fields, "sign-off", "role", read_sign_off)
    if design.effects == "random":
        _refuse_comparisons_of_random_levels(fields)
    if study is None or title is None or alpha is None or data is None:
        return None
    return StudyDefinition(
        study,
        title,
        purpose,
        data,
        design,
        alpha,
        comparisons,
        equivalence,
        outliers,
        checks,
        precision,
        power,
        criteria,
        sign_off,
        _places(fields, data_fields, design_fields, checks_fields),
    )


def _variances(fields: Fields, design_fields: Fields | None, design: DesignPlan) -> Variances | None:
    if design_fields is None:
        return None if fields.unreadable("design") else design.variances
    return None if design_fields.unreadable("variances") else design.variances


def _named_entries(fields: Fields, key: str, name: str, reader: Reader[T]) -> tuple[T, ...]:
    """The entries of the list under `key`, which differ in what stands under `name`; none where absent."""
    entries = fields.optional(key, list_of(reader, _ENTRIES)) or ()
    value = fields.value(key)
    if value is not None:
        report_repeats_of(value, name)
    return entries


def _refuse_comparisons_of_random_levels(fields: Fields) -> None:
    for key in ("comparisons", "equivalence"):
        if key in fields:
            found = f"`{key}` compares levels, but with `design.effects: random` they are a mere sample"
            advice = "use `precision` for the spread between levels, or `effects: fixed`"
            fields.faults.add(fields.place_of(key), found, advice)


def _places(*sections: Fields | None) -> tuple[tuple[str, Place], ...]:
    places = [place for section in sections if section is not None for place in section.places()]
    return tuple(sorted(places, key=lambda item: (item[1].line or 0, item[1].column or 0)))


def _laboratory(fields: Fields) -> Laboratory | None:
    name = fields.required("laboratory", label)
    address = fields.optional("address", list_of(label, "a list of lines")) or ()
    note = fields.optional("note", line_of_text(LONGEST_NOTE))
    accent = fields.optional("accent", _colour) or DEFAULT_ACCENT
    paper = fields.optional("paper", _paper) or "A4"
    require = fields.optional("require", distinct(list_of(choice(REQUIREMENTS), _REQUIREMENT_LIST))) or ()
    wait = fields.optional("wait-seconds", whole_number(0, MOST_WAIT_SECONDS))
    if name is None:
        return None
    wait_seconds = DEFAULT_WAIT_SECONDS if wait is None else wait
    return Laboratory(name, address, note, accent, paper, require, wait_seconds)
