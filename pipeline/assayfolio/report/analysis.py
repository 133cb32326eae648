"""Sections 3 to 6: checks, analysis of variance, comparisons, and what is not reported."""

from assayfolio.findings import CheckFindings, ComparisonFamily, ComparisonRow
from assayfolio.report.basis import Basis, is_single_step
from assayfolio.report.content import Block, FigureBlock, Heading, Paragraph, Section, TableBlock
from assayfolio.report.diagnostics import normal_plot, residual_plots
from assayfolio.report.figures import MOST_DOTS, MOST_ROWS, interval_plot
from assayfolio.report.methods import adjustment_of
from assayfolio.report.notation import INFINITY, MINUS, probability, squared_unit, squares, statistic
from assayfolio.report.numbering import ANCHORS, ANOVA, CHECKS, COMPARISONS, NOT_REPORTED, Numbering
from assayfolio.report.prose import Prose, Words, prose
from assayfolio.report.tables import Column, Table, lay_out
from assayfolio.report.wording import (
    NOT_REGISTERED,
    adjusted_p,
    alpha_words,
    capitalised,
    counted,
    interval_kind,
    row_verdict,
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
                "#Alternative.# At least one of the {count} means differs from another. Level *α* = {alpha}.",
                count=str(count),
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


def comparisons_section(basis: Basis, numbering: Numbering, accent: str) -> Section:
    """Each family of comparisons: how it was formed, its table, its intervals drawn."""
    families = basis.response.comparisons
    blocks: list[Block] = []
    for number, family in enumerate(families, start=1):
        blocks.append(Heading(prose("{name}", name=family.name), f"family-{number}"))
        blocks.append(Paragraph(_family_words(basis, family)))
        blocks.append(TableBlock(_family_table(basis, family, numbering)))
        blocks += _family_figure(basis, family, numbering, accent, number)
    if not families:
        planned = bool(basis.content.study.comparisons)
        why = "None of the planned comparisons can be reported; section 6 gives the reasons."
        blocks.append(Paragraph(prose(why if planned else "No comparisons of single levels were planned.")))
    return Section(ANCHORS[COMPARISONS], COMPARISONS, "Comparisons", tuple(blocks))


def _family_words(basis: Basis, family: ComparisonFamily) -> Prose:
    count = len(family.rows)
    side = {"two-sided": "two-sided", "greater": "one-sided (greater)", "less": "one-sided (less)"}[
        family.alternative
    ]
    df = counted(family.rows[0].df, "degree of freedom", "degrees of freedom")
    if count == 1:
        words = prose(
            "One comparison, {side}, {df}; planned, {registered}.",
            side=side,
            df=df,
            registered=NOT_REGISTERED,
        )
    else:
        words = prose(
            "A family of {count} comparisons, {side}, {adjusted}, {df}; planned, {registered}.",
            count=str(count),
            side=side,
            adjusted=_how_adjusted(family),
            df=df,
            registered=NOT_REGISTERED,
        )
    verdict = prose(
        " A difference is shown where the {kind}*p* is at most {alpha}; whether it matters, its size and "
        "interval say.",
        kind="" if family.adjust == "none" else "adjusted ",
        alpha=alpha_words(basis),
    )
    return (*words, *verdict)


def _how_adjusted(family: ComparisonFamily) -> str:
    if family.adjust == "none":
        return "not adjusted for their number"
    return f"adjusted together by {adjustment_of(family).name}"


def _family_table(basis: Basis, family: ComparisonFamily, numbering: Numbering) -> Table:
    scale = basis.difference_scale
    with_ci = is_single_step(family)
    adjusted = family.adjust != "none"
    columns = [
        Column("Comparison", kind="text"),
        Column("Estimated difference", scale.heading),
        *([Column("Interval, from", scale.heading), Column("to", scale.heading)] if with_ci else []),
        Column("Standard error", scale.heading),
        Column(prose("*t*")),
        Column(prose("*p*")),
        *([Column(prose("Adjusted *p*"))] if adjusted else []),
        Column("Difference", kind="words"),
    ]
    largest = max((row.se for row in family.rows), key=lambda se: se.square)
    rows = []
    for row in family.rows:
        cells: list[Words] = [basis.label(row), scale.mean(row.estimate)]
        if with_ci:
            cells += _ends(basis, row)
        cells += [
            scale.spread(row.se, largest),
            statistic(row.statistic),
            probability(row.p, basis.response.alpha),
        ]
        if adjusted:
            cells.append(adjusted_p(basis, row))
        rows.append([*cells, row_verdict(row.verdict)])
    caption = prose("Comparisons, {name}.", name=family.name)
    if with_ci:
        kind = interval_kind(basis, family) + ("s" if len(family.rows) > 1 else "")
        caption = prose("Comparisons, {name}, with {kind}.", name=family.name, kind=kind)
    return lay_out(numbering.table(), caption, columns, rows)


def _ends(basis: Basis, row: ComparisonRow) -> list[Words]:
    if row.ci is None:
        return [_BLANK, _BLANK]
    low, high = row.ci
    scale = basis.difference_scale
    return [
        f"{MINUS}{INFINITY}" if low is None else scale.mean(low),
        INFINITY if high is None else scale.mean(high),
    ]


def _family_figure(
    basis: Basis, family: ComparisonFamily, numbering: Numbering, accent: str, number: int
) -> list[Block]:
    rows = family.rows
    total = len(rows)
    limited = ""
    if total > MOST_ROWS:
        order = sorted(range(total), key=lambda index: (rows[index].log10_p_adjusted, rows[index].p, index))
        rows = tuple(rows[index] for index in sorted(order[:MOST_ROWS]))
        limited = (
            f" Drawn are the {MOST_ROWS} of {total} with the smallest adjusted *p*, in the order of the "
            "plan; the table has all."
        )
    with_ci = is_single_step(family)
    picture = interval_plot(basis, rows, accent, f"comparisons-{number}.svg", f"{basis.confidence} interval")
    if with_ci:
        what = prose(
            "Estimated differences (dots) with {kind}, {name}. An interval that leaves out zero is a "
            "difference shown.",
            name=family.name,
            kind=interval_kind(basis, family) + ("s" if total > 1 else ""),
        )
    else:
        what = prose(
            "Estimated differences (dots), {name}. {method} has no intervals; the verdicts stand in the "
            "table.",
            name=family.name,
            method=adjustment_of(family).name,
        )
    return [FigureBlock(numbering.figure(), (picture,), (*what, *prose(limited)))]


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
