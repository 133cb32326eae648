"""The checks of the assumptions, and the residuals for the eye."""

from assayfolio.findings import CheckFindings
from assayfolio.observations.totals import Totals
from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, FigureBlock, Paragraph, Section, TableBlock
from assayfolio.report.density import residual_histogram
from assayfolio.report.diagnostics import normal_plot, residual_plots
from assayfolio.report.figures import MOST_DOTS
from assayfolio.report.notation import degrees_of_freedom, probability, statistic
from assayfolio.report.numbering import Numbering, Part
from assayfolio.report.prose import Prose, Words, prose
from assayfolio.report.tables import Column, Table, lay_out
from assayfolio.report.wording import BLANK, alpha_words, typographic

_SYMBOLS = (
    ("joined", "*z*"),
    ("Brown-Forsythe", "*F*"),
    ("Levene", "*F*"),
    ("Bartlett", "*χ*²"),
    ("Cochran", "*C*"),
    ("Shapiro-Wilk", "*W*"),
    ("Anderson-Darling", "*A*²"),
)


def _residual_classes(basis: Basis, totals: Totals, numbering: Numbering, accent: str) -> FigureBlock:
    return FigureBlock(
        numbering.figure(),
        (residual_histogram(basis, totals, accent),),
        prose(
            "Residuals (value minus the mean of its level), {total} in all, counted in equal classes: they "
            "are too many to be drawn one by one, in the order of the file or against normal quantiles. The "
            "line is the normal distribution with mean zero and the residuals’ own root mean square.",
            total=str(basis.total),
        ),
    )


def checks_section(basis: Basis, numbering: Numbering, accent: str) -> Section:
    """What the planned checks found, and the residuals for the eye."""
    place = basis.place(Part.CHECKS)
    variances = "a variance of its own at each level" if basis.is_separate else "one variance at all levels"
    blocks: list[Block] = [
        Paragraph(
            prose(
                f"The analysis assumes independent values, {variances}, and errors that are "
                "close to normal. The checks inform; they never choose the analysis. A check that shows "
                "nothing does not show that an assumption holds. No check can see how the measurements were "
                "made: independence rests on how they were ordered and prepared."
            )
        )
    ]
    if basis.response.checks:
        blocks.append(TableBlock(_check_table(basis, numbering)))
    else:
        blocks.append(Paragraph(prose("No tests of assumptions were planned.")))
    if not basis.response.anova.within.ss:
        blocks.append(Paragraph(prose("All residuals are zero, so there is nothing to plot.")))
    else:
        blocks += _residual_figures(basis, numbering, accent)
    return Section(place.anchor, place.number, basis.title("Checks of the assumptions"), tuple(blocks))


def symbol_of(check: CheckFindings) -> Prose:
    """The symbol of a check's statistic: by its name, else F on two degrees of freedom and t on one."""
    if "joined" in check.name:
        return prose("*z*")
    for name, symbol in _SYMBOLS:
        if name in check.name:
            return prose(symbol)
    count = len(check.df or ())
    return prose({1: "*t*", 2: "*F*"}.get(count, BLANK))


def _check_table(basis: Basis, numbering: Numbering) -> Table:
    columns = [
        Column("Check", kind="text"),
        Column("Statistic", kind="words"),
        Column("Value"),
        Column("Degrees of freedom", kind="words"),
        Column(prose("*p*")),
        Column("Reading", kind="text"),
    ]
    return lay_out(
        numbering.table(),
        prose("Checks of the assumptions, read at level {alpha}.", alpha=alpha_words(basis)),
        columns,
        [_check_row(basis, check) for check in basis.response.checks],
    )


def _check_row(basis: Basis, check: CheckFindings) -> list[Words]:
    return [
        typographic(check.name),
        BLANK if check.statistic is None else symbol_of(check),
        BLANK if check.statistic is None else statistic(check.statistic),
        BLANK if check.df is None else " and ".join(degrees_of_freedom(df) for df in check.df),
        BLANK if check.p is None else probability(check.p, basis.response.alpha),
        check.note.split("; the check informs")[0],
    ]


def _residual_figures(basis: Basis, numbering: Numbering, accent: str) -> list[Block]:
    if basis.totals is not None:
        return [_residual_classes(basis, basis.totals, numbering, accent)]
    order, against = residual_plots(basis)
    many = basis.total > MOST_DOTS
    how = " Shaded squares: the darker, the more values." if many else ""
    by_order = "measuring order" if basis.measuring_order is not None else "order of the file"
    figures: list[Block] = [
        FigureBlock(
            numbering.figure(),
            (order, against),
            prose(
                "Residuals (value minus the mean of its level), {total} in all. Left: in the {by_order}"
                "; a drift or steps would speak against independence. Right: against the mean of the "
                "level; {spread}." + how,
                spread="the spread may differ, as each level has a variance of its own"
                if basis.is_separate
                else "a widening spread would speak against one variance",
                total=str(basis.total),
                by_order=by_order,
            ),
        )
    ]
    normal = normal_plot(basis, accent)
    if normal is not None:
        figures.append(
            FigureBlock(
                numbering.figure(),
                (normal,),
                _caption_of_normal_plot(basis, many=many),
            )
        )
    return figures


def _caption_of_normal_plot(basis: Basis, *, many: bool) -> Prose:
    what = "residuals"
    count = basis.total
    if basis.is_separate:
        what = "residuals, each divided by the standard deviation of its level"
        count = len(basis.scaled_residuals)
    return prose(
        "Normal plot of the {what}, {total} in all. The line is a normal distribution with mean zero and "
        "their own root mean square. The grey area is the pointwise {confidence} envelope of an order "
        "statistic (Chambers and others, 1983); it treats residuals as independent, which they nearly are. "
        "Points that leave it in a curve speak against normal errors; a single point at its edge says "
        "little." + (" Only part of the points is drawn between the ends." if many else ""),
        what=what,
        total=str(count),
        confidence=basis.confidence,
    )
