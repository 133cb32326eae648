"""Reading a study definition and a laboratory's settings from bytes: all faults of a file in one pass."""

import re
from fractions import Fraction

from assayfolio.errors import Place
from assayfolio.study.comparison_section import comparison_in
from assayfolio.study.criteria_section import criterion_in
from assayfolio.study.data_section import read_data
from assayfolio.study.equivalence_section import equivalence_in, spread_in
from assayfolio.study.faults import Faults, shown
from assayfolio.study.fields import (
    Fields,
    Value,
    line_of_text,
    list_of,
    mapping_of,
    matching,
    paragraphs,
    report_repeats,
)
from assayfolio.study.labels import shared_label
from assayfolio.study.laboratory_file import read_laboratory as read_laboratory
from assayfolio.study.measurement_section import read_measurement
from assayfolio.study.names import Surroundings
from assayfolio.study.numbers import probability
from assayfolio.study.plan import (
    ChecksPlan,
    DesignPlan,
    PrecisionPlan,
    StudyDefinition,
)
from assayfolio.study.root import root_fields
from assayfolio.study.rule import Outline
from assayfolio.study.rules import report_breaches
from assayfolio.study.small_sections import (
    power_in,
    read_checks,
    read_design,
    read_outliers,
    read_precision,
    read_sign_off,
)
from assayfolio.study.trend_section import trend_in
from assayfolio.study.vocabulary import (
    CHECK_KEYS,
    DATA_KEYS,
    DESIGN_KEYS,
    LONGEST_PARAGRAPHS,
    LONGEST_TITLE,
    MEASUREMENT_KEYS,
    STUDY_KEYS,
)
from assayfolio.study.worksheet_section import worksheet_in

_identifier = matching(
    re.compile(r"[A-Z0-9][A-Z0-9-]{0,39}", re.ASCII),
    "1 to 40 capital letters, digits and hyphens, such as LOT-2024-07",
)
_ENTRIES = "a list of entries, each beginning with a hyphen"
_NOTHING_READ = Surroundings(None, None, None, None, {})


def read_study(content: bytes, file: str) -> StudyDefinition:
    """The study definition in `content`; `file` is its name in messages.

    Raises StudyError with every fault of the file, each with line and column.
    """
    faults = Faults(file)
    fields = root_fields(content, STUDY_KEYS, faults)
    study = None if fields is None else _study(fields)
    faults.raise_if_any("the study definition")
    assert study is not None, "a definition without faults is complete"
    return study


def _study(fields: Fields) -> StudyDefinition | None:
    study = fields.required("study", _identifier)
    title = fields.required("title", line_of_text(LONGEST_TITLE))
    purpose = fields.optional("purpose", paragraphs(LONGEST_PARAGRAPHS))
    alpha = fields.required("alpha", probability)
    data_fields = fields.required("data", mapping_of(DATA_KEYS))
    data, around = (None, _NOTHING_READ) if data_fields is None else read_data(data_fields)
    measured_fields = fields.optional("measurement", mapping_of(MEASUREMENT_KEYS))
    measurement = () if measured_fields is None else read_measurement(measured_fields, around)
    worksheet = fields.optional("worksheet", worksheet_in(around))
    design_fields = fields.optional("design", mapping_of(DESIGN_KEYS))
    design = DesignPlan() if design_fields is None else read_design(design_fields)
    checks_fields = fields.optional("checks", mapping_of(CHECK_KEYS))
    checks = ChecksPlan() if checks_fields is None else read_checks(checks_fields)
    comparisons = fields.optional("comparisons", list_of(comparison_in(around), _ENTRIES)) or ()
    equivalence = fields.optional("equivalence", list_of(equivalence_in(around), _ENTRIES)) or ()
    spread = fields.optional("spread", spread_in(around))
    outliers = fields.optional("outliers", read_outliers)
    precision = fields.optional("precision", read_precision)
    power = fields.optional("power", power_in(around))
    criteria = fields.optional("criteria", list_of(criterion_in(around), _ENTRIES)) or ()
    trend = fields.optional("trend", trend_in(around))
    sign_off = fields.optional("sign-off", list_of(read_sign_off, _ENTRIES)) or ()
    _report_repeated_names(fields)
    _report_shared_labels(fields, data_fields, around)
    report_breaches(
        _outline(fields, data_fields, design_fields, design, around, precision, alpha), fields.faults
    )
    if study is None or title is None or alpha is None or data is None:
        return None
    return StudyDefinition(
        study=study,
        title=title,
        purpose=purpose,
        data=data,
        design=design,
        alpha=alpha,
        comparisons=comparisons,
        equivalence=equivalence,
        spread=spread,
        outliers=outliers,
        checks=checks,
        precision=precision,
        power=power,
        criteria=criteria,
        sign_off=sign_off,
        places=_places(fields, data_fields, measured_fields, design_fields, checks_fields),
        measurement=measurement,
        worksheet=worksheet,
        trend=trend,
    )


def _outline(
    fields: Fields,
    data_fields: Fields | None,
    design_fields: Fields | None,
    design: DesignPlan,
    around: Surroundings,
    precision: PrecisionPlan | None,
    alpha: Fraction | None,
) -> Outline:
    def unreadable(key: str) -> bool:
        return fields.unreadable("design") if design_fields is None else design_fields.unreadable(key)

    estimates = precision is not None and precision.estimate
    return Outline(
        root=fields.node,
        effects=None if unreadable("effects") else design.effects,
        variances=None if unreadable("variances") else design.variances,
        across_responses=None if unreadable("across-responses") else design.across_responses,
        levels=around.levels,
        responses=around.responses,
        estimates=None if fields.unreadable("precision") else estimates,
        alpha=alpha,
        units=around.units,
        absent=frozenset() if data_fields is None else data_fields.absent(DATA_KEYS),
    )


def _report_repeated_names(fields: Fields) -> None:
    """Report a name that two comparisons or equivalence tests share, and a role that stands twice."""
    families = [name for key in ("comparisons", "equivalence") for name in _texts_in(fields, key, "name")]
    report_repeats(
        sorted(families, key=lambda name: (name.node.place.line or 0, name.node.place.column or 0))
    )
    report_repeats(_texts_in(fields, "sign-off", "role"))


def _texts_in(fields: Fields, section: str, key: str) -> tuple[Value, ...]:
    value = fields.value(section)
    return () if value is None else value.under(key)


def _report_shared_labels(fields: Fields, data_fields: Fields | None, around: Surroundings) -> None:
    """Report levels of which two pairs could not be told apart in a table of pairs."""
    value = None if data_fields is None else data_fields.value("levels")
    if not any(_texts_in(fields, key, "pairs") for key in ("comparisons", "equivalence")):
        return
    both = shared_label(around.levels or ())
    if value is not None and both is not None:
        found = f"let two pairs of levels bear the same label {shown(both)}"
        value.report(found, "level names without ` - ` in them")


def _places(*sections: Fields | None) -> tuple[tuple[str, Place], ...]:
    places = [place for section in sections if section is not None for place in section.places()]
    return tuple(sorted(places, key=lambda item: (item[1].line or 0, item[1].column or 0)))
