"""What came in: counts, descriptive statistics, and every value drawn."""

from assayfolio.report.basis import Basis
from assayfolio.report.content import FigureBlock, Heading, Section, TableBlock
from assayfolio.report.descriptives import descriptives_tables
from assayfolio.report.figures import MOST_DOTS, dot_plots
from assayfolio.report.numbering import Numbering, Part
from assayfolio.report.prose import Prose, prose
from assayfolio.report.received import has_headings, received_blocks
from assayfolio.report.wording import counted


def data_section(basis: Basis, numbering: Numbering, accent: str) -> Section:
    """What was received and how, descriptive statistics, and every value drawn."""
    blocks = received_blocks(basis, numbering)
    if has_headings(blocks):
        blocks.append(Heading(prose("Values analysed")))
    blocks += [TableBlock(table) for table in descriptives_tables(basis, numbering)]
    pictures = dot_plots(basis, accent)
    blocks += [
        FigureBlock(numbering.figure(), (picture,), _dot_caption(basis, number, len(pictures)))
        for number, picture in enumerate(pictures, start=1)
    ]
    place = basis.place(Part.DATA)
    return Section(place.anchor, place.number, basis.title("Data"), tuple(blocks))


def _dot_caption(basis: Basis, number: int, count: int) -> Prose:
    if basis.total > MOST_DOTS:
        what = prose(
            "All {total}, counted in 90 equal classes of {response} (a dot for each would not be legible); "
            "the height of a bar is the share of its level’s fullest class.",
            total=counted(basis.total, "value"),
            response=basis.response.response,
        )
    else:
        what = prose(
            "Every analysed value of {response} as a circle, {total} in all; equal and near values stand "
            "side by side.",
            response=basis.response.response,
            total=str(basis.total),
        )
    has_interval = any(level.ci is not None for level in basis.levels)
    marks = " The upright bar is the mean" + (
        ", the flat-ended line below it the {confidence} interval for the mean ({error} standard deviation)."
        if has_interval
        else "."
    )
    how = (
        " Two intervals that overlap do not say that the means agree"
        + (": section {number} compares them." if basis.response.comparisons else ".")
        if has_interval
        else ""
    )
    part = f" Part {number} of {count}, on the same scale." if count > 1 else ""
    error = "the level’s own" if basis.is_separate else "residual"
    values = {"confidence": basis.confidence, "error": error}
    if basis.response.comparisons:
        values["number"] = str(basis.place(Part.COMPARISONS).number)
    return (*what, *prose(marks + part + how, **values))
