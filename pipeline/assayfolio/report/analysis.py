"""Sections 3, 4 and 6: checks, analysis of variance, and what is not reported."""

from assayfolio.findings import CheckFindings
from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, FigureBlock, Paragraph, Section, TableBlock
from assayfolio.report.diagnostics import normal_plot, residual_plots
from assayfolio.report.figures import MOST_DOTS
from assayfolio.report.notation import probability, squared_unit, squares, statistic
from assayfolio.report.numbering import ANCHORS, ANOVA, CHECKS, NOT_REPORTED, Numbering
from assayfolio.report.prose import Prose, Words, prose
from assayfolio.report.tables import Column, Table, lay_out
from assayfolio.report.wording import (
    alpha_words,
    capitalised,
    typographic,
)

_NAMED_LEVELS = 6
_BLANK = "–"


def checks_section(basis: Basis, numbering: Numbering, accent: str) -> Section:
    """What the planned checks found, and the residuals for the eye."""
    blocks: list[Block] = [
        Paragraph(
            prose(
                "The analysis assumes independent values, one variance at all levels, and errors that are "
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
    return Section(ANCHORS[CHECKS], CHECKS, "Checks of the assumptions", tuple(blocks))


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
    symbol = prose("*W*") if check.df is None else prose("*F*")
    return [
        typographic(check.name),
        _BLANK if check.statistic is None else symbol,
        _BLANK if check.statistic is None else statistic(check.statistic),
        _BLANK if check.df is None else " and ".join(str(df) for df in check.df),
        _BLANK if check.p is None else probability(check.p, basis.response.alpha),
        check.note.split(";")[0],
    ]


def _residual_figures(basis: Basis, numbering: Numbering, accent: str) -> list[Block]:
    order, against = residual_plots(basis)
    many = basis.total > MOST_DOTS
    how = " Shaded squares: the darker, the more values." if many else ""
    figures: list[Block] = [
        FigureBlock(
            numbering.figure(),
            (order, against),
            prose(
                "Residuals (value minus the mean of its level), {total} in all. Left: in the order of the "
                "file; a drift or steps would speak against independence. Right: against the mean of the "
                "level; a widening spread would speak against one variance." + how,
                total=str(basis.total),
            ),
        )
    ]
    normal = normal_plot(basis, accent)
    if normal is not None:
        figures.append(
            FigureBlock(
                numbering.figure(),
                (normal,),
                prose(
                    "Normal plot of the residuals, {total} in all. The line is a normal distribution with "
                    "mean zero and the residuals’ own root mean square. The grey area is the pointwise "
                    "{confidence} envelope of an order statistic (Chambers and others, 1983); it treats "
                    "residuals as independent, which they nearly are. Points that leave it in a curve speak "
                    "against normal errors; a single point at its edge says "
                    "little." + (" Only part of the points is drawn between the ends." if many else ""),
                    total=str(basis.total),
                    confidence=basis.confidence,
                ),
            )
        )
    return figures


def anova_section(basis: Basis, numbering: Numbering) -> Section:
    """The hypotheses for the levels at hand and the table of the analysis of variance."""
    anova = basis.response.anova
    count = len(basis.levels)
    names = [level.level for level in basis.levels]
    blocks: list[Block] = [
        Paragraph(
            prose(
                "#Null hypothesis.# The {count} levels of {factor}{names} have the same mean {response}: "
                "{means}.",
                count=str(count),
                factor=basis.factor,
                names=f" ({', '.join(names)})" if count <= _NAMED_LEVELS else "",
                response=basis.response.response,
                means=_equal_means(count),
            )
        ),
        Paragraph(
            prose(
                "#Alternative.# {alternative}. Level *α* = {alpha}.",
                alternative="The two means differ"
                if count == 2
                else f"At least one of the {count} means differs from another",
                alpha=alpha_words(basis),
            )
        ),
        TableBlock(_anova_table(basis, numbering)),
        Paragraph(_anova_verdict(basis), "lead"),
    ]
    if anova.f is None:
        blocks.append(Paragraph(prose("The reason stands in section 6."), "note"))
    return Section(ANCHORS[ANOVA], ANOVA, "Analysis of variance", tuple(blocks))


def _equal_means(count: int) -> Prose:
    if count <= _NAMED_LEVELS:
        return prose(" = ".join(f"*μ*_{number}_" for number in range(1, count + 1)))
    return prose(f"*μ*_1_ = *μ*_2_ = … = *μ*_{count}_")


def _anova_table(basis: Basis, numbering: Numbering) -> Table:
    anova = basis.response.anova
    within_ms, between_ms = anova.within.ms, anova.between.ms
    present = [anova.between.ss, anova.within.ss, anova.total.ss]
    present += [ms for ms in (between_ms, within_ms) if ms is not None]
    measure = within_ms or between_ms or 0
    texts = squares(present, measure)
    sums, means = texts[:3], iter(texts[3:])
    mean_between = next(means) if between_ms is not None else _BLANK
    mean_within = next(means) if within_ms is not None else _BLANK
    unit = squared_unit(basis.response.unit)
    f = _BLANK if anova.f is None else statistic(anova.f)
    p = _BLANK if anova.p is None else probability(anova.p, basis.response.alpha, anova.log10_p)
    columns = [
        Column("Source of variation", kind="text"),
        Column("Degrees of freedom"),
        Column("Sum of squares", unit),
        Column("Mean square", unit),
        Column(prose("Variance ratio *F*")),
        Column(prose("*p*")),
    ]
    rows: list[list[Words]] = [
        [f"Between levels of {basis.factor}", str(anova.between.df), sums[0], mean_between, f, p],
        ["Within levels (residual)", str(anova.within.df), sums[1], mean_within, "", ""],
        ["Total", str(anova.total.df), sums[2], "", "", ""],
    ]
    caption = prose("Analysis of variance of {response}.", response=basis.response.response)
    return lay_out(numbering.table(), caption, columns, rows, _anova_notes(basis))


def _anova_notes(basis: Basis) -> list[Prose]:
    anova = basis.response.anova
    notes = []
    if anova.f_critical is not None:
        notes.append(
            prose(
                "Critical value of *F* at level {alpha}: {critical}.",
                alpha=alpha_words(basis),
                critical=statistic(anova.f_critical),
            )
        )
    if anova.residual_sd is not None:
        scale = basis.difference_scale
        sd = scale.spread(anova.residual_sd, anova.residual_sd)
        notes.append(prose("Residual standard deviation {sd}.", sd=scale.with_unit(sd)))
    if anova.r_squared is not None:
        notes.append(prose("*R*^2^ = {value}.", value=statistic(anova.r_squared)))
    return [tuple(span for note in notes for span in (*note, *prose(" ")))] if notes else []


def _anova_verdict(basis: Basis) -> Prose:
    anova = basis.response.anova
    if anova.p is None:
        return prose("#{verdict}.# No test is reported.", verdict=capitalised(anova.verdict))
    return prose(
        "#{verdict}# between the means of the {count} levels, at level {alpha}.",
        verdict=capitalised(anova.verdict),
        count=str(len(basis.levels)),
        alpha=alpha_words(basis),
    )


def not_reported_section(basis: Basis) -> Section:
    """What was asked for and cannot be given, with the reason."""
    missing = basis.content.findings.not_reported
    blocks: list[Block] = []
    if not missing:
        blocks.append(Paragraph(prose("Everything that the plan asks for is reported.")))
    blocks += [
        Paragraph(
            prose(
                "#{what}.# {reason}.",
                what=capitalised(item.what),
                reason=capitalised(item.reason.rstrip(".")),
            )
        )
        for item in missing
    ]
    return Section(ANCHORS[NOT_REPORTED], NOT_REPORTED, "Asked for and not reported", tuple(blocks))
