"""Weights, scores, margins and limits of the plan, as tables."""

from assayfolio.report.basis import Basis
from assayfolio.report.criteria import quantity_name
from assayfolio.report.equivalence_words import planned_margin
from assayfolio.report.notation import decimal
from assayfolio.report.numbering import Numbering
from assayfolio.report.prose import Words, prose
from assayfolio.report.tables import Column, Table, lay_out
from assayfolio.report.wording import alpha_words, with_unit
from assayfolio.study.plan import ContrastFamily, Criterion, Trend

_MOST_COLUMNS = 6


def contrast_tables(basis: Basis, numbering: Numbering) -> list[Table]:
    """The weights of each planned family of contrasts; in columns where the levels are few."""
    tables = []
    for plan in basis.study.comparisons:
        if not isinstance(plan, ContrastFamily):
            continue
        names = [level.level for level in basis.levels]
        few = len(names) <= _MOST_COLUMNS
        columns = [Column("Contrast", kind="text")]
        columns += [Column(name) for name in names] if few else [Column("Weights", kind="text")]
        rows: list[list[Words]] = []
        for contrast in plan.contrasts:
            weights = dict(contrast.weights)
            cells: list[Words] = [contrast.name]
            if few:
                cells += [decimal(weights[name]) if name in weights else "0" for name in names]
            else:
                cells.append("; ".join(f"{level} {decimal(weight)}" for level, weight in contrast.weights))
            rows.append(cells)
        caption = prose("Weights of the contrasts of “{name}”.", name=plan.name)
        tables.append(lay_out(numbering.table(), caption, columns, rows))
    return tables


def score_tables(basis: Basis, numbering: Numbering) -> list[Table]:
    """The scores that a planned trend gives to levels whose names are not numbers."""
    tables = []
    for plan in basis.study.comparisons:
        if not isinstance(plan, Trend) or not plan.scores:
            continue
        rows: list[list[Words]] = [
            [level.level, decimal(plan.score_of(level.level))] for level in basis.levels
        ]
        caption = prose("Scores of the levels for “{name}”.", name=plan.name)
        tables.append(
            lay_out(numbering.table(), caption, [Column("Level", kind="text"), Column("Score")], rows)
        )
    return tables


def margin_table(basis: Basis, numbering: Numbering) -> list[Table]:
    """The margins of equivalence with their sources; none where no equivalence is planned."""
    if not basis.study.equivalence:
        return []
    columns = [
        Column("Equivalence", kind="text"),
        Column("Margin", kind="words"),
        Column(prose("*α*, each side"), kind="words"),
        Column("Source of the margin", kind="text"),
    ]
    rows: list[list[Words]] = []
    for plan in basis.study.equivalence:
        unit = basis.study.data.unit_of(plan.response or basis.response.response)
        if plan.response is None and basis.several:
            unit = basis.study.data.unit
        rows.append(
            [
                prose("{name} ~({response})~", name=plan.name, response=plan.response)
                if plan.response is not None and basis.several
                else plan.name,
                planned_margin(plan, unit),
                alpha_words(basis) if plan.alpha is None else decimal(plan.alpha),
                plan.margin_source or "not stated in the plan",
            ]
        )
    caption = prose("Margins of equivalence and where they come from.")
    return [lay_out(numbering.table(), caption, columns, rows)]


def criteria_table(basis: Basis, numbering: Numbering) -> list[Table]:
    """The limits set in advance; none where no criterion is planned."""
    if not basis.study.criteria:
        return []
    columns = [Column("Acceptance criterion", kind="text"), Column("Limit", kind="words")]
    if basis.several:
        columns.insert(1, Column("Response", kind="words"))
    rows: list[list[Words]] = []
    for plan in basis.study.criteria:
        cells: list[Words] = [quantity_name(basis, plan.quantity, plan.level)]
        if basis.several:
            cells.append(plan.response or "each")
        rows.append([*cells, _limits(basis, plan)])
    return [lay_out(numbering.table(), prose("Acceptance criteria of the plan."), columns, rows)]


def _limits(basis: Basis, plan: Criterion) -> str:
    unit: str | None = "%"
    if not plan.quantity.endswith(("-rsd", "-percent")):
        unit = plan.unit or basis.study.data.unit_of(plan.response or basis.response.response)
    parts = []
    if plan.at_least is not None:
        parts.append(f"at least {with_unit(decimal(plan.at_least), unit)}")
    if plan.at_most is not None:
        parts.append(f"at most {with_unit(decimal(plan.at_most), unit)}")
    return " and ".join(parts)
