"""What the plan says about the data: what stands for what, what becomes of it, how the order is drawn."""

from assayfolio.report.basis import Basis
from assayfolio.report.content import Entry
from assayfolio.report.limits import TAKEN
from assayfolio.report.notation import decimal
from assayfolio.report.prose import Prose, prose, verbatim
from assayfolio.study.plan import DataPlan, WorksheetPlan

_LEFT_TO_RECORDS = (
    ("customer", None),
    ("description and condition of the items", None),
    ("sampling", None),
    ("dates of receipt", None),
    ("dates of the measurements", "measured-at"),
    ("persons who measured", "operator"),
    ("instruments", "instrument"),
    ("environmental conditions", None),
    ("measurement uncertainty", None),
)


def data_entries(basis: Basis) -> list[Entry]:
    """One entry for each thing that the plan says about the data beyond where they stand."""
    data = basis.study.data
    entries: list[tuple[str, Prose]] = []
    if data.missing == "omit":
        codes = [f"“{code}”" for code in data.missing_codes]
        entries.append(("Missing values", prose("omitted: {codes}", codes=" or ".join(["blank", *codes]))))
    if data.below_limit != "refuse":
        entries.append(("Below a limit", _below(data)))
    if data.above_limit != "refuse":
        entries.append(("Above a limit", prose(f"{TAKEN[data.above_limit]}: entries that begin with >")))
    if data.unit_column is not None:
        entries.append(("Units", _units(data, data.unit_column)))
    if data.replicate_unit is not None:
        words = "rows of one level with the same entry in column {column} are averaged to one value"
        entries.append(("Repeats", prose(words, column=verbatim(data.replicate_unit))))
    if data.exclusions is not None:
        words = "decided by persons in the file {file}"
        entries.append(("Exclusions", prose(words, file=verbatim(data.exclusions))))
    if basis.study.worksheet is not None:
        entries.append(("Worksheet", _worksheet(basis.study.worksheet)))
    return [Entry(prose(what), words) for what, words in entries]


def _below(data: DataPlan) -> Prose:
    codes = "".join(f"; “{code}” stands for below {decimal(limit)}" for code, limit in data.limit_codes)
    return prose("{how}: entries that begin with <{codes}", how=TAKEN[data.below_limit], codes=codes)


def _units(data: DataPlan, column: str) -> Prose:
    factors = "".join(f"; {unit} times exactly {decimal(factor)}" for unit, factor in data.convert)
    return prose("in column {column}{factors}", column=verbatim(column), factors=factors)


def _worksheet(plan: WorksheetPlan) -> Prose:
    blocked = f", blocked by {plan.block} ({', '.join(plan.blocks)})" if plan.block is not None else ""
    return prose("measuring order drawn from seed {seed}{blocked}", seed=str(plan.seed), blocked=blocked)


def not_stated_words(basis: Basis) -> Prose:
    """What a reader may look for and the study definition does not say."""
    known = {fact.key for fact in basis.study.measurement}
    left = [words for words, key in _LEFT_TO_RECORDS if key not in known]
    return prose(
        "Not part of the study definition and therefore not stated here: {left}. Where they matter they are "
        "in the laboratory’s own records.",
        left=", ".join(left),
    )
