"""The results of a response under several analyses: levels, tests, families, precision, criteria."""

from collections.abc import Sequence

from assayfolio.exact import Root
from assayfolio.findings import (
    AnovaFindings,
    ComparisonFamily,
    CriterionFindings,
    EquivalenceFamily,
    LevelFindings,
    PrecisionFindings,
    ResponseFindings,
)
from assayfolio.report.alternatives import Side, by_analysis, side_by_side
from assayfolio.report.analysis import BROWN_FORSYTHE_MEANS, WELCH
from assayfolio.report.basis import Basis, is_single_step
from assayfolio.report.content import Block, TableBlock
from assayfolio.report.criteria import limit_words, quantity_name, value_words
from assayfolio.report.equivalence import scale_of
from assayfolio.report.notation import Scale, degrees_of_freedom, probability, statistic, three_digits
from assayfolio.report.numbering import Numbering
from assayfolio.report.precision import total_words
from assayfolio.report.prose import Words, prose
from assayfolio.report.tables import Column, Table
from assayfolio.report.wording import (
    BLANK,
    adjusted_p,
    capitalised,
    interval_cells,
    is_adjusted,
    row_verdict,
    significant_ends,
)

Analyses = Sequence[tuple[str, ResponseFindings]]


def results_tables(basis: Basis, analyses: Analyses, numbering: Numbering) -> list[Block]:
    """Every planned result under each of the `analyses`, each a name and the findings on the response."""
    tables = [_levels_table(basis, analyses, numbering), _overall_table(basis, analyses, numbering)]
    tables += _families(basis, analyses, numbering)
    tables += _equivalence(basis, analyses, numbering)
    makers = (
        (_spread_table, [found.spread for _, found in analyses]),
        (_precision_table, [found.precision for _, found in analyses]),
        (_criteria_table, [found.criteria or None for _, found in analyses]),
    )
    tables += [make(basis, analyses, numbering) for make, parts in makers if any(parts)]
    return [TableBlock(table) for table in tables]


def _levels_table(basis: Basis, analyses: Analyses, numbering: Numbering) -> Table:
    scale, spread = basis.scale, basis.difference_scale
    sds = [level.sd for _, found in analyses for level in found.levels if level.sd is not None]
    largest = max(sds, key=lambda sd: sd.square, default=None)

    def cells(level: LevelFindings) -> list[Words]:
        sd = BLANK if level.sd is None or largest is None else spread.spread(level.sd, largest)
        return [str(level.n), scale.mean(level.mean), sd]

    columns = [
        Column(prose("*n*")),
        Column("Mean", scale.heading),
        Column("Standard deviation", spread.heading),
    ]
    sides = [Side(name, {level.level: cells(level) for level in found.levels}) for name, found in analyses]
    caption = prose("Levels of {factor}, {response}.", factor=basis.factor, response=basis.response.response)
    return side_by_side(numbering, caption, "Level", columns, sides)


def _overall_table(basis: Basis, analyses: Analyses, numbering: Numbering) -> Table:
    alpha = basis.response.alpha
    adjusted = any(
        test is not None and test.p is not None and test.p != test.p_adjusted
        for test in (found.overall_test for _, found in analyses)
    )

    def cells(found: ResponseFindings) -> list[Words]:
        test = found.overall_test
        if test is None or test.f is None or test.p is None or test.p_adjusted is None:
            blanks: list[Words] = [BLANK] * (4 if adjusted else 3)
            return [*blanks, found.overall_verdict]
        values: list[Words] = [statistic(test.f), _freedom(found), probability(test.p, alpha)]
        if adjusted:
            values.append(probability(test.p_adjusted, alpha))
        return [*values, test.verdict]

    columns = [
        Column(prose("*F*")),
        Column("Degrees of freedom", kind="words"),
        Column(prose("*p*")),
        *([Column(prose("Adjusted *p*"))] if adjusted else []),
        Column("Verdict", kind="words"),
    ]
    names = {"f": "*F* test", "welch": WELCH, "brown-forsythe": BROWN_FORSYTHE_MEANS}
    caption = prose(
        f"Overall test ({names[basis.response.omnibus]}), {{response}}.", response=basis.response.response
    )
    return by_analysis(numbering, caption, columns, [(name, cells(found)) for name, found in analyses])


def _freedom(found: ResponseFindings) -> str:
    test = found.overall_test
    if test is None or isinstance(test, AnovaFindings):
        return f"{found.anova.between.df} and {found.anova.within.df}"
    return f"{test.df1} and {degrees_of_freedom(test.df2)}"


def _families(basis: Basis, analyses: Analyses, numbering: Numbering) -> list[Table]:
    names = dict.fromkeys(family.name for _, found in analyses for family in found.comparisons)
    return [_family_table(basis, analyses, name, numbering) for name in names]


def _family_table(basis: Basis, analyses: Analyses, name: str, numbering: Numbering) -> Table:
    found = {side: family for side, one in analyses for family in one.comparisons if family.name == name}
    a_family = next(iter(found.values()))
    trend = a_family.kind == "trend"
    with_ci, adjusted = any(map(is_single_step, found.values())), is_adjusted(a_family)
    unit = "" if trend else basis.difference_scale.heading
    scale = None if trend else basis.difference_scale
    columns = _columns(unit, with_ci=with_ci, adjusted=adjusted, verdict="Difference")
    sides = [
        Side(side, _family_cells(basis, found[side], scale, with_ci) if side in found else {})
        for side, _ in analyses
    ]
    caption = prose("Comparisons, {name}.", name=name)
    return side_by_side(numbering, caption, "Comparison", columns, sides)


def _columns(unit: str, *, with_ci: bool, adjusted: bool, verdict: str) -> list[Column]:
    return [
        Column("Estimate", unit),
        *([Column("Interval, from", unit), Column("to", unit)] if with_ci else []),
        Column(prose("Adjusted *p*" if adjusted else "*p*")),
        Column(verdict, kind="words"),
    ]


def _family_cells(
    basis: Basis, family: ComparisonFamily, scale: Scale | None, with_ci: bool
) -> dict[str, list[Words]]:
    cells: dict[str, list[Words]] = {}
    for row in family.rows:
        estimate = three_digits(row.estimate) if scale is None else scale.mean(row.estimate)
        ends = significant_ends(row.ci) if scale is None else interval_cells(scale, row.ci)
        cells[basis.label(row)] = [
            estimate,
            *(ends if with_ci else []),
            adjusted_p(basis, row),
            row_verdict(row.verdict),
        ]
    return cells


def _equivalence(basis: Basis, analyses: Analyses, numbering: Numbering) -> list[Table]:
    names = dict.fromkeys(family.name for _, found in analyses for family in found.equivalence)
    return [_equivalence_table(basis, analyses, name, numbering) for name in names]


def _equivalence_table(basis: Basis, analyses: Analyses, name: str, numbering: Numbering) -> Table:
    found = {side: family for side, one in analyses for family in one.equivalence if family.name == name}
    a_family = next(iter(found.values()))
    scale = scale_of(basis, a_family)
    adjusted = a_family.adjust != "none" or a_family.responses > 1
    claim = "Non-inferiority" if a_family.claim == "non-inferiority" else "Equivalence"

    def cells(family: EquivalenceFamily) -> dict[str, list[Words]]:
        return {
            basis.label(row): [
                scale.mean(row.estimate),
                *interval_cells(scale, row.ci),
                probability(row.p_adjusted, family.alpha, row.log10_p_adjusted),
                row_verdict(row.verdict),
            ]
            for row in family.rows
        }

    columns = _columns(scale.heading, with_ci=True, adjusted=adjusted, verdict=claim)
    sides = [Side(side, cells(found[side]) if side in found else {}) for side, _ in analyses]
    caption = prose("{claim}, {name}.", claim=claim, name=name)
    return side_by_side(numbering, caption, "Comparison", columns, sides)


def _spread_table(basis: Basis, analyses: Analyses, numbering: Numbering) -> Table:
    spreads = [found.spread for _, found in analyses if found.spread is not None]
    adjusted = any(spread.adjust != "none" or spread.responses > 1 for spread in spreads)

    def cells(found: ResponseFindings) -> dict[str, list[Words]]:
        return {
            row.label: [
                three_digits(row.ratio),
                *significant_ends(row.ci),
                probability(row.p_adjusted, basis.response.alpha),
                row_verdict(row.verdict),
            ]
            for row in (found.spread.rows if found.spread is not None else ())
        }

    columns = [Column("Ratio"), *_columns("", with_ci=True, adjusted=adjusted, verdict="Difference")[1:]]
    sides = [Side(name, cells(found)) for name, found in analyses]
    return side_by_side(numbering, prose("Ratios of variances."), "Variances", columns, sides)


def _precision_table(basis: Basis, analyses: Analyses, numbering: Numbering) -> Table:
    scale = basis.difference_scale

    def cells(found: PrecisionFindings | None) -> dict[str, list[Words]]:
        if found is None:
            return {}
        listed: list[tuple[str, Root | None]] = [
            ("Repeatability standard deviation", found.repeatability_sd),
            ("Between-level standard deviation", found.between_sd),
            (f"{capitalised(total_words(found))}, standard deviation", found.total_sd),
        ]
        return {name: [scale.spread(sd, sd)] for name, sd in listed if sd is not None}

    sides = [Side(name, cells(found.precision)) for name, found in analyses]
    columns = [Column("Estimate", scale.heading)]
    return side_by_side(numbering, prose("Precision."), "Quantity", columns, sides)


def _criteria_table(basis: Basis, analyses: Analyses, numbering: Numbering) -> Table:
    def label(one: CriterionFindings) -> str:
        return f"{quantity_name(basis, one.quantity, one.level)}, {limit_words(one)}"

    sides = [
        Side(name, {label(one): [value_words(basis, one), one.verdict] for one in found.criteria})
        for name, found in analyses
    ]
    columns = [Column("Value", kind="words"), Column("Verdict", kind="words")]
    return side_by_side(numbering, prose("Acceptance criteria."), "Quantity and limit", columns, sides)
