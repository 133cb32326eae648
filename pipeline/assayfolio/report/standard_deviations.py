"""The standard deviation of each level with its interval."""

from assayfolio.report.basis import Basis
from assayfolio.report.numbering import Numbering
from assayfolio.report.prose import Words, prose
from assayfolio.report.tables import Column, Table, lay_out
from assayfolio.report.wording import BLANK


def deviations_table(basis: Basis, numbering: Numbering) -> list[Table]:
    """The standard deviations with their chi-square intervals; no table where no level has an interval."""
    if all(level.sd_ci is None for level in basis.levels):
        return []
    scale = basis.difference_scale
    largest = max((level.sd for level in basis.levels if level.sd), key=lambda sd: sd.square)
    columns = [
        Column("Level", kind="text"),
        Column("Degrees of freedom"),
        Column("Standard deviation", scale.heading),
        Column("Interval, from", scale.heading),
        Column("to", scale.heading),
    ]
    rows: list[list[Words]] = []
    for level in basis.levels:
        ends = [BLANK, BLANK]
        if level.sd_ci is not None:
            ends = [BLANK if end is None else scale.spread(end, largest) for end in level.sd_ci]
        sd = BLANK if level.sd is None else scale.spread(level.sd, largest)
        rows.append([level.level, str(level.n - 1), sd, *ends])
    caption = prose(
        "Standard deviation of {response} at each level, with its {confidence} interval.",
        response=basis.response.response,
        confidence=basis.confidence,
    )
    note = prose("Chi-square intervals, which lean on normal errors; each is for its level alone.")
    return [lay_out(numbering.table(), caption, columns, rows, [note])]
