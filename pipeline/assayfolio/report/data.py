"""What came in: counts, descriptive statistics, and every value drawn."""

from assayfolio.findings import LevelFindings
from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, FigureBlock, Paragraph, Section, TableBlock
from assayfolio.report.figures import MOST_DOTS, dot_plots
from assayfolio.report.numbering import Numbering, Part
from assayfolio.report.prose import Prose, Words, prose, verbatim
from assayfolio.report.standard_deviations import deviations_table
from assayfolio.report.tables import Column, Table, fits, lay_out
from assayfolio.report.wording import BLANK, counted


def data_section(basis: Basis, numbering: Numbering, accent: str) -> Section:
    """Counts, descriptive statistics, and every value drawn."""
    observations = basis.observations
    separator = {"comma": "comma", "semicolon": "semicolon", "tab": "tab"}[observations.separator]
    blocks: list[Block] = [
        Paragraph(
            prose(
                "{total} received from {file}, 0 excluded, {total2} analysed: this version has no "
                "exclusions and analyses every value in the file. Values were read as exact decimals from "
                "their text (columns separated by {separator}, decimal {mark}); at most {places} recorded.",
                total=counted(basis.total, "value"),
                total2=str(basis.total),
                file=verbatim(observations.file),
                separator=separator,
                mark=basis.content.study.data.decimal_mark,
                places=counted(observations.places, "decimal place"),
            )
        ),
        *(TableBlock(table) for table in _descriptives(basis, numbering)),
    ]
    if not basis.outline.has(Part.SPREAD, basis.index):
        blocks += [TableBlock(table) for table in deviations_table(basis, numbering)]
    pictures = dot_plots(basis, accent)
    blocks += [
        FigureBlock(numbering.figure(), (picture,), _dot_caption(basis, number, len(pictures)))
        for number, picture in enumerate(pictures, start=1)
    ]
    place = basis.place(Part.DATA)
    return Section(place.anchor, place.number, basis.title("Data"), tuple(blocks))


def _descriptives(basis: Basis, numbering: Numbering) -> list[Table]:
    """One table; two where the figures are so long that one would have to be set too small."""
    with_ci = any(level.ci is not None for level in basis.levels)
    columns, rows = _descriptive_cells(basis, with_ci)
    caption = prose(
        "Descriptive statistics of {response} by {factor}.",
        response=basis.response.response,
        factor=basis.factor,
    )
    interval = _interval_caption(basis) if with_ci else ()
    notes = _descriptive_notes(basis)
    if not with_ci or fits(columns, rows):
        last = prose(" The last two columns are the {interval}.", interval=interval) if with_ci else ()
        return [lay_out(numbering.table(), (*caption, *last), columns, rows, notes)]
    first = lay_out(numbering.table(), caption, columns[:-2], [row[:-2] for row in rows], notes)
    few = [[row[0], row[1], row[2], *row[-2:]] for row in rows]
    which = prose("The {interval}.", interval=interval)
    return [first, lay_out(numbering.table(), which, [*columns[:3], *columns[-2:]], few)]


def _descriptive_cells(basis: Basis, with_ci: bool) -> tuple[list[Column], list[list[Words]]]:
    scale, spread = basis.scale, basis.difference_scale
    columns = [
        Column("Level", kind="text"),
        Column(prose("*n*")),
        Column("Mean", scale.heading),
        Column("Standard deviation", spread.heading),
        Column("Smallest", scale.heading),
        Column("Largest", scale.heading),
    ]
    if with_ci:
        columns += [Column("Interval, from", scale.heading), Column("to", scale.heading)]
    largest = max((level.sd for level in basis.levels if level.sd), key=lambda sd: sd.square, default=None)
    rows = []
    for level in basis.levels:
        row: list[Words] = [
            level.level,
            str(level.n),
            scale.mean(level.mean),
            BLANK if level.sd is None or largest is None else spread.spread(level.sd, largest),
            scale.value(level.minimum),
            scale.value(level.maximum),
        ]
        rows.append([*row, *_ends(basis, level)] if with_ci else row)
    return columns, rows


def _ends(basis: Basis, level: LevelFindings) -> list[Words]:
    if level.ci is None or level.ci[0] is None or level.ci[1] is None:
        return [BLANK, BLANK]
    return [basis.scale.mean(level.ci[0]), basis.scale.mean(level.ci[1])]


def _interval_caption(basis: Basis) -> Prose:
    if basis.is_separate:
        words = "{confidence} interval for the mean, from the standard deviation of its own level"
        return prose(words, confidence=basis.confidence)
    return prose(
        "{confidence} interval for the mean, from the residual standard deviation with {df}",
        confidence=basis.confidence,
        df=counted(basis.response.anova.within.df, "degree of freedom", "degrees of freedom"),
    )


def _descriptive_notes(basis: Basis) -> list[Prose]:
    notes = [prose("A mean that lies exactly between two printed figures is rounded to the even digit.")]
    if any(level.n == 1 for level in basis.levels):
        notes.append(prose("A level with one value has no standard deviation of its own (–)."))
    if all(level.ci is None for level in basis.levels):
        number = str(basis.place(Part.NOT_REPORTED).number)
        words = "Intervals for the means are not reported; section {number} gives the reason."
        notes.append(prose(words, number=number))
    return notes


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
            "Every value of {response} as a circle, {total} in all; equal and near values stand side by "
            "side.",
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
