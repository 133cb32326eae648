"""What was planned, as the study definition states it, and where each planned analysis is reported."""

from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, Entry, Facts, Heading, Paragraph, Section, TableBlock
from assayfolio.report.deviations import search_words
from assayfolio.report.notation import percent
from assayfolio.report.numbering import Numbering, Part
from assayfolio.report.planned_analyses import planned_rows
from assayfolio.report.planned_data import data_entries, not_stated_words
from assayfolio.report.planned_power import power_blocks
from assayfolio.report.planned_tables import contrast_tables, criteria_table, margin_table, score_tables
from assayfolio.report.prose import Prose, prose, verbatim
from assayfolio.report.registration import plan_words
from assayfolio.report.tables import Column, lay_out
from assayfolio.report.wording import alpha_words, counted

_LEVEL_WORDS = (
    "{alpha} for each family of comparisons; each family keeps its own error rate, so the same pair can be "
    "shown in one family and not in another"
)


def plan_section(bases: tuple[Basis, ...], numbering: Numbering) -> Section:
    """The plan as the study definition states it, and where each planned analysis is reported."""
    basis = bases[0]
    place = basis.place(Part.PLAN)
    blocks: list[Block] = [
        Paragraph(plan_words(basis)),
        Paragraph(_deviations(basis)),
        Facts(tuple(_entries(bases))),
        TableBlock(
            lay_out(
                numbering.table(),
                prose("Planned analyses and where they are reported."),
                [
                    Column("Analysis", kind="text"),
                    Column("Method", kind="text"),
                    Column("Section", kind="words"),
                ],
                planned_rows(bases),
            )
        ),
    ]
    tables = (
        *contrast_tables(basis, numbering),
        *score_tables(basis, numbering),
        *margin_table(basis, numbering),
        *criteria_table(basis, numbering),
    )
    blocks += [TableBlock(table) for table in tables]
    if basis.content.findings.power is not None:
        blocks.append(Heading(prose("Power of the plan"), "power"))
        blocks += power_blocks(basis.study, basis.content.findings.power, numbering)
    blocks.append(Paragraph(not_stated_words(basis), "note"))
    return Section(place.anchor, place.number, "Plan", tuple(blocks))


def _deviations(basis: Basis) -> Prose:
    """Where the deviations from the plan stand, or that none was found and where it was looked for."""
    if not basis.content.findings.deviations:
        return prose(search_words(basis))
    number = str(basis.place(Part.DEVIATIONS).number)
    return prose("#Deviations from the plan# stand in section {number}.", number=number)


def _entries(bases: tuple[Basis, ...]) -> list[Entry]:
    basis = bases[0]
    study = basis.study
    families = bool(study.comparisons or study.equivalence) or not basis.is_random
    entries = [
        *([Entry(prose("Purpose"), prose("{purpose}", purpose=study.purpose))] if study.purpose else []),
        *(Entry(prose("Response") if not one.index else (), _response(one)) for one in bases),
        Entry(prose("Factor"), _levels(basis)),
        Entry(prose("Replicates"), _replicates(basis)),
        Entry(prose("Design"), prose(_design(basis))),
        Entry(prose("Level *α*"), prose(_LEVEL_WORDS if families else "{alpha}", alpha=alpha_words(basis))),
    ]
    if basis.several:
        entries.append(Entry(prose("Several responses"), prose(_ACROSS[study.design.across_responses])))
    if study.data.order is not None:
        words = "column {column}; the residuals are tested for a trend in it"
        entries.append(Entry(prose("Measuring order"), prose(words, column=verbatim(study.data.order))))
    entries += data_entries(basis)
    if study.precision is not None and study.precision.estimate:
        entries.append(Entry(prose("Precision"), _precision(basis)))
    return entries


_ACROSS = {
    "none": "no adjustment for the number of responses: each keeps its own error rates",
    "bonferroni": "Bonferroni: each question is asked of each response at *α* divided by their number",
    "holm": "Holm: the tests of a question on all responses are adjusted together as one family",
}


def _response(basis: Basis) -> Prose:
    unit = basis.response.unit
    if unit is None:
        return prose("{response}, no unit stated", response=basis.response.response)
    return prose("{response} in {unit}", response=basis.response.response, unit=unit)


def _levels(basis: Basis) -> Prose:
    declared = basis.study.data.levels
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
    data = basis.study.data
    if data.replicates is None:
        return prose("not fixed in the plan")
    if isinstance(data.replicates, int):
        return prose("{n} at each level", n=str(data.replicates))
    return prose("{each}", each="; ".join(f"{level}: {n}" for level, n in data.replicates))


def _design(basis: Basis) -> str:
    design = basis.study.design
    effects = {
        "fixed": "levels are fixed: conclusions are about these levels alone",
        "random": "levels are a sample of those that could have been chosen",
    }[design.effects]
    variances = {
        "pooled": "one error variance for all levels",
        "separate": "an error variance for each level",
    }[design.variances]
    return f"one factor; {effects}; {variances}"


def _precision(basis: Basis) -> Prose:
    plan = basis.study.precision
    if plan is None:
        return ()
    parts = [f"intervals at {percent(plan.confidence)}"]
    if plan.varied:
        parts.insert(0, f"varied between levels: {plan.varied}")
    if plan.conditions:
        parts.insert(0, plan.conditions.replace("-", " "))
    return prose("{words}", words="; ".join(parts))
