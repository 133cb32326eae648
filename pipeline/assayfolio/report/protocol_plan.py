"""The plan of a study as its protocol states it: what is asked, how, and what is done with the data."""

from collections.abc import Iterator
from fractions import Fraction

from assayfolio.report.analysis import BROWN_FORSYTHE_MEANS, WELCH
from assayfolio.report.content import Block, Entry, Facts, Section, TableBlock
from assayfolio.report.criteria import quantity_words
from assayfolio.report.equivalence_words import planned_margin
from assayfolio.report.methods import ADJUSTMENTS
from assayfolio.report.notation import decimal, percent
from assayfolio.report.numbering import Numbering
from assayfolio.report.outliers import TEST_NAMES
from assayfolio.report.planned_analyses import comparison_words, method_name
from assayfolio.report.prose import Prose, Words, prose, verbatim
from assayfolio.report.protocol_facts import ProtocolInput
from assayfolio.report.tables import Column, Table, lay_out
from assayfolio.report.wording import with_unit
from assayfolio.study.plan import (
    ContrastFamily,
    Criterion,
    DataPlan,
    EquivalencePlan,
    MeasurementFact,
    StudyDefinition,
    Trend,
    TrendPlan,
)

Rows = list[list[Words]]
_OMNIBUS = {"f": "*F* test", "welch": WELCH, "brown-forsythe": BROWN_FORSYTHE_MEANS}
_ACROSS = {
    "none": "no adjustment for the number of responses",
    "bonferroni": "Bonferroni: each question at *α* divided by the number of responses",
    "holm": "Holm: the tests of a question on all responses are one family",
}


def plan_section(content: ProtocolInput, _numbering: Numbering, number: int) -> Section:
    """Purpose, responses, factor, design and level, and the facts of the measurement."""
    study = content.study
    entries = [*_design_entries(study), *(_fact(one) for one in study.measurement)]
    return Section("plan", number, "Plan", (Facts(tuple(entries)),))


def _design_entries(study: StudyDefinition) -> Iterator[Entry]:
    data, design = study.data, study.design
    if study.purpose:
        yield Entry(prose("Purpose"), prose("{purpose}", purpose=study.purpose))
    for at, response in enumerate(data.response):
        unit = data.unit_of(response)
        words = prose("{name}{unit}", name=response, unit=f" in {unit}" if unit else ", no unit stated")
        yield Entry(() if at else prose("Response"), words)
    levels = ", ".join(data.levels) if data.levels else "as the data have them"
    count = f"{len(data.levels)} levels: " if data.levels else ""
    yield Entry(
        prose("Factor"), prose("{factor}, {count}{levels}", factor=data.factor, count=count, levels=levels)
    )
    yield Entry(prose("Replicates"), prose("{words}", words=_replicates(data)))
    effects = {
        "fixed": "levels are fixed: conclusions are about these levels alone",
        "random": "levels are a sample of those that could have been chosen",
    }[design.effects]
    variances = {
        "pooled": "one error variance for all levels",
        "separate": "an error variance for each level",
    }[design.variances]
    yield Entry(prose("Design"), prose(f"one factor; {effects}; {variances}"))
    yield Entry(
        prose("Level *α*"),
        prose("{alpha} for each family of comparisons", alpha=decimal(study.alpha)),
    )
    if len(data.response) > 1:
        yield Entry(prose("Several responses"), prose(_ACROSS[design.across_responses]))
    if study.precision is not None and study.precision.estimate:
        yield Entry(prose("Precision"), prose("{words}", words=_precision(study)))


def _replicates(data: DataPlan) -> str:
    if data.replicates is None:
        return "not fixed in the plan"
    if isinstance(data.replicates, int):
        return f"{data.replicates} at each level"
    return "; ".join(f"{level}: {count}" for level, count in data.replicates)


def _precision(study: StudyDefinition) -> str:
    plan = study.precision
    assert plan is not None, "asked for by its caller"
    what = "variance components" if study.design.effects == "random" else "repeatability"
    parts = [what, f"intervals at {percent(plan.confidence)}"]
    if plan.conditions:
        parts.append(plan.conditions.replace("-", " "))
    if plan.varied:
        parts.append(f"varied between levels: {plan.varied}")
    return "; ".join(parts)


def _fact(fact: MeasurementFact) -> Entry:
    name = fact.key.replace("-", " ").capitalize()
    if fact.text is not None:
        return Entry(prose("{name}", name=name), prose("{text}", text=fact.text))
    words = prose("recorded with the data, in the column {column}", column=verbatim(fact.column or ""))
    return Entry(prose("{name}", name=name), words)


def questions_section(content: ProtocolInput, numbering: Numbering, number: int) -> Section:
    """Every planned analysis with its method; weights, scores, margins with their source, limits."""
    study = content.study
    columns = [Column("Analysis", kind="text"), Column("Method", kind="text")]
    caption = prose("Planned analyses; the comparisons and tests here are the registered ones.")
    blocks: list[Block] = [TableBlock(lay_out(numbering.table(), caption, columns, _analyses(study)))]
    if study.equivalence:
        blocks.append(TableBlock(_margins(study, numbering)))
    for plan in study.comparisons:
        if isinstance(plan, ContrastFamily):
            rows: Rows = [[one.name, _weights(one.weights)] for one in plan.contrasts]
            caption = prose("Weights of the contrasts of “{name}”.", name=plan.name)
            heads = [Column("Contrast", kind="text"), Column("Weights", kind="text")]
            blocks.append(TableBlock(lay_out(numbering.table(), caption, heads, rows)))
        elif isinstance(plan, Trend) and plan.scores:
            rows = [[level, decimal(score)] for level, score in plan.scores]
            caption = prose("Scores of the levels for “{name}”.", name=plan.name)
            heads = [Column("Level", kind="text"), Column("Score")]
            blocks.append(TableBlock(lay_out(numbering.table(), caption, heads, rows)))
    if study.criteria:
        blocks.append(TableBlock(_criteria(study, numbering)))
    return Section("questions", number, "Questions and methods", tuple(blocks))


def _analyses(study: StudyDefinition) -> Rows:
    rows: Rows = [["Analysis of variance", prose(_OMNIBUS[study.design.omnibus])]]
    rows += [[comparison_words(plan), ADJUSTMENTS[plan.adjust].name] for plan in study.comparisons]
    rows += [_equivalence_row(plan) for plan in study.equivalence]
    if study.spread is not None:
        what = prose("Variances ~(each level against {against})~", against=study.spread.against)
        rows.append([what, prose("*F* tests, {adjust}", adjust=ADJUSTMENTS[study.spread.adjust].name)])
    for name, tests in (
        ("Check of equal variances", study.checks.equal_variances),
        ("Check of normality of residuals", study.checks.normality),
    ):
        if tests:
            rows.append([name, ", ".join(method_name(test) for test in tests)])
    if study.data.order is not None:
        rows.append(["Check of the measuring order", "trend of residuals"])
    if study.trend is not None:
        rows.append(_charts_row(study.trend))
    return rows


def _charts_row(plan: TrendPlan) -> list[Words]:
    base = f"the first {plan.first} lots" if plan.first is not None else f"the lots {', '.join(plan.lots)}"
    limits = [
        f"{one.quantity}{f' of {one.response}' if one.response else ''} {relation} {decimal(limit)}"
        for one in plan.criteria
        for relation, limit in (("at least", one.at_least), ("at most", one.at_most))
        if limit is not None
    ]
    method = prose(
        "limits from {base}; rules {rules}{lines}",
        base=base,
        rules=", ".join(plan.rules),
        lines=f"; criterion lines: {', '.join(limits)}" if limits else "",
    )
    return [prose("Control charts over lots ~({what})~", what=", ".join(plan.quantities)), method]


def _equivalence_row(plan: EquivalencePlan) -> list[Words]:
    which = "all pairs" if plan.against is None else f"each level against {plan.against}"
    tests = "one one-sided *t* test" if plan.non_inferiority else "two one-sided *t* tests"
    only = f"; {plan.response} only" if plan.response else ""
    return [
        prose("{name} ~({which}{only})~", name=plan.name, which=which, only=only),
        prose(tests + ", {adjust}", adjust=ADJUSTMENTS[plan.adjust].name),
    ]


def _margins(study: StudyDefinition, numbering: Numbering) -> Table:
    columns = [
        Column("Equivalence", kind="text"),
        Column("Margin", kind="words"),
        Column(prose("*α*, each side"), kind="words"),
        Column("Source of the margin", kind="text"),
    ]
    rows: Rows = [
        [
            plan.name,
            planned_margin(plan, study.data.unit_of(plan.response or study.data.response[0])),
            decimal(study.alpha if plan.alpha is None else plan.alpha),
            plan.margin_source or "not stated in the plan",
        ]
        for plan in study.equivalence
    ]
    caption = prose("Margins of equivalence and where they come from.")
    return lay_out(numbering.table(), caption, columns, rows)


def _weights(weights: tuple[tuple[str, Fraction], ...]) -> str:
    return "; ".join(f"{level} {decimal(weight)}" for level, weight in weights)


def _criteria(study: StudyDefinition, numbering: Numbering) -> Table:
    several = len(study.data.response) > 1
    columns = [Column("Acceptance criterion", kind="text"), Column("Limit", kind="words")]
    if several:
        columns.insert(1, Column("Response", kind="words"))
    rows: Rows = []
    for plan in study.criteria:
        cells: list[Words] = [quantity_words(study, plan.quantity, plan.level)]
        rows.append([*cells, *([plan.response or "each"] if several else []), _limits(study, plan)])
    return lay_out(numbering.table(), prose("Acceptance criteria, set in advance."), columns, rows)


def _limits(study: StudyDefinition, plan: Criterion) -> str:
    unit: str | None = "%"
    if not plan.quantity.endswith(("-rsd", "-percent")):
        unit = plan.unit or study.data.unit_of(plan.response or study.data.response[0])
    parts = []
    if plan.at_least is not None:
        parts.append(f"at least {with_unit(decimal(plan.at_least), unit)}")
    if plan.at_most is not None:
        parts.append(f"at most {with_unit(decimal(plan.at_most), unit)}")
    return " and ".join(parts)


def data_section(content: ProtocolInput, _numbering: Numbering, number: int) -> Section:
    """Where the values will stand, and what is done with those missing, beyond a limit or far off."""
    return Section("data", number, "Data and outliers", (Facts(tuple(_data_entries(content.study))),))


def _data_entries(study: StudyDefinition) -> Iterator[Entry]:
    data = study.data
    files = ", ".join(data.sources)
    yield Entry(prose("Raw data"), prose("{files}, kept byte for byte", files=verbatim(files)))
    for name, policy, codes in (
        ("Missing values", _MISSING[data.missing], ", ".join(data.missing_codes)),
        ("Below a limit", _BELOW[data.below_limit], ", ".join(code for code, _ in data.limit_codes)),
        ("Above a limit", _BELOW[data.above_limit], ""),
    ):
        also = f"; also written as {codes}" if codes else ""
        yield Entry(prose(name), prose("{policy}{also}", policy=policy, also=also))
    if data.convert:
        factors = "; ".join(f"{unit} times {decimal(factor)}" for unit, factor in data.convert)
        yield Entry(prose("Units"), prose("converted exactly: {factors}", factors=factors))
    if data.replicate_unit is not None:
        words = "rows of one level with the same entry in {column} are repeats and are averaged"
        yield Entry(prose("Repeats"), prose(words, column=verbatim(data.replicate_unit)))
    yield Entry(prose("Outliers"), _outliers(study))
    yield Entry(prose("Exclusions"), prose(_EXCLUSIONS))


def _outliers(study: StudyDefinition) -> Prose:
    if study.outliers is None:
        return prose("no test is planned")
    tests = "; ".join(TEST_NAMES[test] for test in study.outliers.tests)
    return prose("{tests}; a test proposes what to look into and removes nothing", tests=tests)


_MISSING = {"refuse": "a file with one is refused", "omit": "left out and counted"}
_BELOW = {
    "refuse": "a file with one is refused",
    "omit": "left out and counted",
    "half-limit": "half the limit in its place",
    "limit": "the limit in its place",
}
_EXCLUSIONS = (
    "a value is left out only by a person, with a reason and a date in the exclusions file; the report lists "
    "each one and gives the result with and without them"
)
