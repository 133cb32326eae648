"""The one-sided tests behind a family of equivalence, each with what it can be recomputed from."""

from assayfolio.findings import BoundaryFindings, EquivalenceFamily
from assayfolio.report.basis import Basis
from assayfolio.report.notation import decimal, degrees_of_freedom, probability, statistic
from assayfolio.report.numbering import Numbering
from assayfolio.report.prose import Prose, Words, prose
from assayfolio.report.tables import Column, Table, lay_out
from assayfolio.report.wording import BLANK


def tests_table(basis: Basis, family: EquivalenceFamily, numbering: Numbering) -> Table:
    """Every one-sided test of a family: its margin, t, standard error, degrees of freedom and p."""
    scale = basis.difference_scale
    percent = family.scale == "percent"
    own_c = not percent and len({row.critical for row in family.rows}) > 1
    unit = "%" if percent else basis.response.unit or ""
    columns = [
        Column("Comparison", kind="text"),
        Column("Margin", unit),
        Column(prose("*t*")),
        Column("Standard error", scale.heading),
        Column("Degrees of freedom"),
        *([Column(prose("*c*"))] if own_c else []),
        Column(prose("*p*, one-sided")),
    ]
    largest = max((test.se for row in family.rows for test in row.boundaries), key=lambda se: se.square)

    def cells(label: str, test: BoundaryFindings, critical: float | None) -> list[Words]:
        c = BLANK if critical is None else statistic(critical)
        return [
            label,
            decimal(test.margin),
            statistic(test.t),
            scale.spread(test.se, largest),
            degrees_of_freedom(test.df),
            *([c] if own_c else []),
            probability(test.p, family.alpha),
        ]

    rows = [cells(basis.label(row), test, row.critical) for row in family.rows for test in row.boundaries]
    caption = prose("The one-sided tests of {name}.", name=family.name)
    return lay_out(numbering.table(), caption, columns, rows, [_note(family)])


def _note(family: EquivalenceFamily) -> Prose:
    words = "*t* is positive above a lower margin and negative below an upper one; *p* is not adjusted."
    if family.scale == "percent":
        words += " Each *t* is that of the difference from the margin’s share of the reference mean."
    return prose(words)
