"""Sections 1 and 2: what was planned, and what came in."""

from assayfolio.findings import LevelFindings
from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, Entry, Facts, FigureBlock, Paragraph, Section, TableBlock
from assayfolio.report.figures import MOST_DOTS, dot_plots
from assayfolio.report.methods import ADJUSTMENTS
from assayfolio.report.notation import decimal
from assayfolio.report.numbering import (
    ANCHORS,
    ANOVA,
    CHECKS,
    COMPARISONS,
    DATA,
    NOT_REPORTED,
    PLAN,
    Numbering,
)
from assayfolio.report.prose import Prose, Words, prose, verbatim
from assayfolio.report.tables import Column, Table, fits, lay_out
from assayfolio.report.wording import alpha_words, counted
from assayfolio.study.plan import AgainstReference, AllPairs, Comparison

_LEVEL_WORDS = (
    "{alpha} for each family of comparisons; each family keeps its own error rate, so the same pair can be "
    "shown in one family and not in another"
)


def plan_section(basis: Basis, numbering: Numbering) -> Section:
    """The plan as the study definition states it, and where each planned analysis is reported."""
    study = basis.content.study
    entries = [
        *([Entry(prose("Purpose"), prose("{purpose}", purpose=study.purpose))] if study.purpose else []),
        Entry(prose("Response"), _response(basis)),
        Entry(prose("Factor"), _levels(basis)),
        Entry(prose("Replicates"), _replicates(basis)),
        Entry(prose("Design"), prose(_design(basis))),
        Entry(prose("Level *α*"), prose(_LEVEL_WORDS, alpha=alpha_words(basis))),
    ]
    blocks: list[Block] = [
        Paragraph(
            prose(
                "The plan is the study definition attached to this document, as it stood when the run "
                "began. It was #not pre-registered#: nothing shows that it was fixed before the data were "
                "seen, so every result here is exploratory; “planned” says that it stands in the study "
                "definition, no more. This version records no deviations from the plan; whether there were "
                "any, the laboratory’s own records say."
            )
        ),
        Facts(tuple(entries)),
        TableBlock(
            lay_out(
                numbering.table(),
                prose("Planned analyses and where they are reported."),
                [
                    Column("Analysis", kind="text"),
                    Column("Method", kind="words"),
                    Column("Section", kind="words"),
                ],
                _planned(basis),
            )
        ),
        Paragraph(
            prose(
                "Not part of the study definition and therefore not stated here: customer, description and "
                "condition of the items, sampling, dates of receipt and of the measurements, persons who "
                "measured, instruments, environmental conditions, measurement uncertainty. Where they "
                "matter they are in the laboratory’s own records."
            ),
            "note",
        ),
    ]
    return Section(ANCHORS[PLAN], PLAN, "Plan", tuple(blocks))


def _response(basis: Basis) -> Prose:
    unit = basis.response.unit
    if unit is None:
        return prose("{response}, no unit stated", response=basis.response.response)
    return prose("{response} in {unit}", response=basis.response.response, unit=unit)


def _levels(basis: Basis) -> Prose:
    declared = basis.content.study.data.levels
    how = "declared in the plan" if declared else "taken from the data in order of appearance"
    names = ", ".join(level.level for level in basis.levels)
    return prose(
        "{factor}, {count} {how}: {names}",
        factor=basis.factor,
        count=counted(len(basis.levels), "level"),
        how=how,
        names=names,
    )


def _replicates(basis: Basis) -> Prose:
    data = basis.content.study.data
    if data.replicates is None:
        return prose("not fixed in the plan")
    if isinstance(data.replicates, int):
        return prose("{n} at each level", n=str(data.replicates))
    return prose("{each}", each="; ".join(f"{level}: {n}" for level, n in data.replicates))


def _design(basis: Basis) -> str:
    design = basis.content.study.design
    effects = {
        "fixed": "levels are fixed: conclusions are about these levels alone",
        "random": "levels are a sample of those that could have been chosen",
    }[design.effects]
    variances = {
        "pooled": "one error variance for all levels",
        "separate": "an error variance for each level",
    }[design.variances]
    return f"one factor; {effects}; {variances}"


def _planned(basis: Basis) -> list[list[Words]]:
    study = basis.content.study
    reported = {family.name for family in basis.response.comparisons}
    rows: list[list[Words]] = [["Analysis of variance", prose("*F* test"), str(ANOVA)]]
    for comparison in study.comparisons:
        method = (
            ADJUSTMENTS[comparison.adjust].name if comparison.adjust in ADJUSTMENTS else comparison.adjust
        )
        where = str(COMPARISONS) if comparison.name in reported else f"{NOT_REPORTED} (not reported)"
        rows.append([_comparison(comparison), method, where])
    if study.checks.equal_variances:
        rows.append(["Check of equal variances", _method_name(study.checks.equal_variances), str(CHECKS)])
    if study.checks.normality:
        rows.append(["Check of normality of residuals", _method_name(study.checks.normality), str(CHECKS)])
    return rows


def _method_name(key: str) -> str:
    return "–".join(part.capitalize() for part in key.split("-"))


def _comparison(comparison: Comparison) -> Prose:
    side = {"greater": ", one-sided: greater", "less": ", one-sided: less"}
    if isinstance(comparison, AllPairs):
        what = "all pairs"
    elif isinstance(comparison, AgainstReference):
        what = f"each level against {comparison.against}{side.get(comparison.alternative, '')}"
    else:
        weights = "; ".join(f"{level} {decimal(weight)}" for level, weight in comparison.weights)
        what = f"weights {weights}{side.get(comparison.alternative, '')}"
    return prose("{name} ~({what})~", name=comparison.name, what=what)


def data_section(basis: Basis, numbering: Numbering, accent: str) -> Section:
    """Counts, descriptive statistics, and every value drawn."""
    observations = basis.content.observations
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
    pictures = dot_plots(basis, accent)
    blocks += [
        FigureBlock(numbering.figure(), (picture,), _dot_caption(basis, number, len(pictures)))
        for number, picture in enumerate(pictures, start=1)
    ]
    return Section(ANCHORS[DATA], DATA, "Data", tuple(blocks))


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
            "–" if level.sd is None or largest is None else spread.spread(level.sd, largest),
            scale.value(level.minimum),
            scale.value(level.maximum),
        ]
        rows.append([*row, *_ends(basis, level)] if with_ci else row)
    return columns, rows


def _ends(basis: Basis, level: LevelFindings) -> list[Words]:
    if level.ci is None or level.ci[0] is None or level.ci[1] is None:
        return ["–", "–"]
    return [basis.scale.mean(level.ci[0]), basis.scale.mean(level.ci[1])]


def _interval_caption(basis: Basis) -> Prose:
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
        notes.append(prose("Intervals for the means are not reported; section 6 gives the reason."))
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
        ", the flat-ended line below it the {confidence} interval for the mean (residual standard deviation)."
        if has_interval
        else "."
    )
    how = (
        " Two intervals that overlap do not say that the means agree"
        + (": section 5 compares them." if basis.response.comparisons else ".")
        if has_interval
        else ""
    )
    part = f" Part {number} of {count}, on the same scale." if count > 1 else ""
    return (*what, *prose(marks, confidence=basis.confidence), *prose(part + how))
