"""The analysis of variance, the test of equal means that was planned, and effect sizes."""

from assayfolio.findings import (
    NOT_ASSESSABLE,
    AnovaFindings,
    BrownForsytheMeansFindings,
    WelchFindings,
)
from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, Heading, Paragraph, Section, TableBlock
from assayfolio.report.effects import effects_table
from assayfolio.report.families import ACROSS_NAMES
from assayfolio.report.notation import degrees_of_freedom, probability, squared_unit, squares, statistic
from assayfolio.report.numbering import Numbering, Part
from assayfolio.report.prose import Prose, Words, prose
from assayfolio.report.tables import Column, Table, lay_out
from assayfolio.report.wording import BLANK, alpha_words, capitalised, spread_of

_NAMED_LEVELS = 6
WELCH = "Welch’s F"
BROWN_FORSYTHE_MEANS = "Brown–Forsythe test of equal means (F*)"

Omnibus = AnovaFindings | WelchFindings | BrownForsytheMeansFindings


def anova_section(basis: Basis, numbering: Numbering) -> Section:
    """The hypotheses, the table of the analysis of variance, the planned test, and effect sizes."""
    place = basis.place(Part.ANOVA)
    hypotheses = _random_hypotheses(basis) if basis.is_random else _fixed_hypotheses(basis)
    blocks: list[Block] = [*hypotheses, TableBlock(_anova_table(basis, numbering))]
    if _has_separate_tests(basis):
        blocks.append(Paragraph(prose(_WHY_SEPARATE)))
        blocks.append(TableBlock(_tests_table(basis, numbering)))
    blocks.append(Paragraph(_verdict(basis), "lead"))
    if planned_test(basis) is None:
        number = str(basis.place(Part.NOT_REPORTED).number)
        blocks.append(Paragraph(prose("The reason stands in section {number}.", number=number), "note"))
    if basis.response.effect is not None:
        blocks.append(Heading(prose("Effect sizes")))
        blocks.append(TableBlock(effects_table(basis, basis.response.effect, numbering)))
    return Section(place.anchor, place.number, basis.title("Analysis of variance"), tuple(blocks))


_WHY_SEPARATE = (
    "The *F* test above takes one variance for all levels. The plan gives each level its own, so the planned "
    "test of equal means is the one marked below; the others stand beside it for comparison."
)


def planned_test(basis: Basis) -> Omnibus | None:
    """The overall test that was planned, None where it could not be given."""
    response = basis.response
    if response.omnibus == "welch":
        return response.welch
    if response.omnibus == "brown-forsythe":
        return response.brown_forsythe_means
    return response.anova if response.anova.f is not None else None


def overall_verdict(basis: Basis) -> str:
    """The verdict on the overall question."""
    test = planned_test(basis)
    return NOT_ASSESSABLE if test is None else test.verdict


def _has_separate_tests(basis: Basis) -> bool:
    return basis.response.welch is not None or basis.response.brown_forsythe_means is not None


def _fixed_hypotheses(basis: Basis) -> list[Block]:
    count = len(basis.levels)
    names = [level.level for level in basis.levels]
    return [
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
    ]


def _random_hypotheses(basis: Basis) -> list[Block]:
    return [
        Paragraph(
            prose(
                "#Null hypothesis.# Levels of {factor} add nothing to the spread of {response}: the variance "
                "between levels is zero, *σ*_L_² = 0.",
                factor=basis.factor,
                response=basis.response.response,
            )
        ),
        Paragraph(
            prose(
                "#Alternative.# *σ*_L_² > 0. Level *α* = {alpha}. The levels are a sample, so single levels "
                "are not compared with one another.",
                alpha=alpha_words(basis),
            )
        ),
    ]


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
    mean_between = next(means) if between_ms is not None else BLANK
    mean_within = next(means) if within_ms is not None else BLANK
    unit = squared_unit(basis.response.unit)
    f = BLANK if anova.f is None else statistic(anova.f)
    p = BLANK if anova.p is None else probability(anova.p, basis.response.alpha, anova.log10_p)
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
    if anova.f_critical is not None and not basis.is_separate:
        divided = basis.study.design.across_responses == "bonferroni" and basis.several
        notes.append(
            prose(
                "Critical value of *F* at level {alpha}{divided}: {critical}.",
                alpha=alpha_words(basis),
                divided=f"/{len(basis.content.findings.responses)}" if divided else "",
                critical=statistic(anova.f_critical),
            )
        )
    if anova.residual_sd is not None:
        sd = spread_of(basis.difference_scale, anova.residual_sd)
        notes.append(prose("Residual standard deviation {sd}.", sd=sd))
    if anova.r_squared is not None:
        notes.append(prose("*R*^2^ = {value}.", value=statistic(anova.r_squared)))
    if anova.p_adjusted is not None and _is_across(basis) and not basis.is_separate:
        notes.append(_across_note(basis, anova.p_adjusted))
    return [tuple(span for note in notes for span in (*note, *prose(" ")))] if notes else []


def _is_across(basis: Basis) -> bool:
    return basis.several and basis.study.design.across_responses != "none"


def _across_note(basis: Basis, p: float) -> Prose:
    return prose(
        "Adjusted for {count} responses by {how}: *p* = {p}; the verdict follows it.",
        count=str(len(basis.content.findings.responses)),
        how=ACROSS_NAMES[basis.study.design.across_responses],
        p=probability(p, basis.response.alpha),
    )


def _tests_table(basis: Basis, numbering: Numbering) -> Table:
    """Welch's F and F*, the latter on both degrees of freedom, the planned one marked."""
    response = basis.response
    across = _is_across(basis)
    columns = [
        Column("Test of equal means", kind="text"),
        Column(prose("*F*")),
        Column("Degrees of freedom", kind="words"),
        Column(prose("*p*")),
        *([Column(prose("Adjusted *p*"))] if across else []),
        Column("In the plan", kind="words"),
    ]
    rows = _welch_rows(basis) + _brown_forsythe_rows(basis)
    cells: list[list[Words]] = [
        [name, f, df, p, *([adjusted] if across else []), "the planned test" if planned else "for comparison"]
        for name, f, df, p, adjusted, planned in rows
    ]
    caption = prose(
        "Tests of equal means with a variance for each level, {response}.", response=response.response
    )
    note = "Two tests bear the names of Brown and Forsythe: this one is about means, not variances."
    notes = [prose(note)] if response.brown_forsythe_means is not None else []
    return lay_out(numbering.table(), caption, columns, cells, notes)


_TestRow = tuple[str, str, str, str, str, bool]  # name, F, degrees of freedom, p, adjusted p, planned


def _welch_rows(basis: Basis) -> list[_TestRow]:
    test, alpha = basis.response.welch, basis.response.alpha
    if test is None:
        return []
    df = f"{test.df1} and {degrees_of_freedom(test.df2)}"
    p, adjusted = probability(test.p, alpha, test.log10_p), probability(test.p_adjusted, alpha)
    return [(WELCH, statistic(test.f), df, p, adjusted, basis.response.omnibus == "welch")]


def _brown_forsythe_rows(basis: Basis) -> list[_TestRow]:
    test, alpha = basis.response.brown_forsythe_means, basis.response.alpha
    if test is None:
        return []
    f, df2 = statistic(test.f), degrees_of_freedom(test.df2)
    p, adjusted = probability(test.p, alpha, test.log10_p), probability(test.p_adjusted, alpha)
    planned = basis.response.omnibus == "brown-forsythe"
    mehrotra = f"{BROWN_FORSYTHE_MEANS}, with Mehrotra’s degrees of freedom"
    df_mehrotra = f"{degrees_of_freedom(test.df1_mehrotra)} and {df2}"
    return [
        (BROWN_FORSYTHE_MEANS, f, f"{test.df1} and {df2}", p, adjusted, planned),
        (mehrotra, f, df_mehrotra, probability(test.p_mehrotra, alpha), BLANK, False),
    ]


def _verdict(basis: Basis) -> Prose:
    verdict = capitalised(overall_verdict(basis))
    test = planned_test(basis)
    if test is None:
        return prose("#{verdict}.# No test is reported.", verdict=verdict)
    by = {
        "welch": f" by {WELCH}",
        "brown-forsythe": f" by the {BROWN_FORSYTHE_MEANS}",
    }.get(basis.response.omnibus, "")
    where = (
        " the {count} levels, beyond the spread within them"
        if basis.is_random
        else (" the means of the {count} levels")
    )
    return prose(
        "#{verdict}# between" + where + "{by}, at level {alpha}.",
        verdict=verdict,
        count=str(len(basis.levels)),
        by=by,
        alpha=alpha_words(basis),
    )
