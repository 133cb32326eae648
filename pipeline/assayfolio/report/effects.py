"""Effect sizes: how large the differences between the levels are beside the spread within them."""

from assayfolio.findings import EffectFindings
from assayfolio.report.basis import Basis
from assayfolio.report.notation import percent, statistic
from assayfolio.report.numbering import Numbering
from assayfolio.report.prose import Prose, Words, prose
from assayfolio.report.tables import Column, Table, lay_out
from assayfolio.report.wording import BLANK


def effects_table(basis: Basis, effect: EffectFindings, numbering: Numbering) -> Table:
    """The effect sizes of a response, with the interval of Cohen's f."""
    columns = [
        Column("Effect size", kind="text"),
        Column("Symbol", kind="words"),
        Column("Value"),
        Column("Interval, from"),
        Column("to"),
    ]
    rows: list[list[Words]] = [
        ["Share of the variation between levels", prose("*η*²"), statistic(effect.eta_squared), "", ""],
        ["The same, less what chance adds", prose("*ω*²"), statistic(effect.omega_squared), "", ""],
        ["The same, by Kelley’s formula", prose("*ε*²"), statistic(effect.epsilon_squared), "", ""],
        [
            "Cohen’s f",
            prose("*f*"),
            BLANK if effect.cohen_f is None else statistic(effect.cohen_f),
            *_ends(effect),
        ],
    ]
    caption = prose(
        "Effect sizes of {factor} on {response}, with the {confidence} interval of Cohen’s f.",
        factor=basis.factor,
        response=basis.response.response,
        confidence=percent(effect.confidence),
    )
    return lay_out(numbering.table(), caption, columns, rows, _notes(effect))


def _ends(effect: EffectFindings) -> list[Words]:
    if effect.cohen_f_ci is None:
        return [BLANK, BLANK]
    return [BLANK if end is None else statistic(end) for end in effect.cohen_f_ci]


def _notes(effect: EffectFindings) -> list[Prose]:
    notes = [
        prose("An effect size is beside the spread within levels; whether it matters depends on the use.")
    ]
    if effect.omega_squared < 0 or effect.epsilon_squared < 0:
        notes.append(
            prose("A negative value is an estimate of a share that is zero or small; it is not cut off.")
        )
    return notes
