"""The variance of each level against that of a reference."""

from assayfolio.findings import SpreadFindings
from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, Paragraph, Section, TableBlock
from assayfolio.report.families import across_words, together_by_holm
from assayfolio.report.methods import adjustment_words
from assayfolio.report.notation import confidence, probability, three_digits
from assayfolio.report.numbering import Numbering, Part
from assayfolio.report.prose import Prose, Words, prose
from assayfolio.report.registration import family_standing, is_calm
from assayfolio.report.tables import Column, Table, lay_out
from assayfolio.report.wording import BLANK, alpha_words, row_verdict, significant_ends


def spread_section(basis: Basis, numbering: Numbering) -> Section:
    """Each variance divided by that of the reference, with its interval and its F test."""
    place = basis.place(Part.SPREAD)
    spread = basis.response.spread
    if spread is None:
        why = "The variances cannot be compared; section {number} gives the reason."
        number = str(basis.place(Part.NOT_REPORTED).number)
        blocks: list[Block] = [Paragraph(prose(why, number=number))]
    else:
        blocks = [Paragraph(_words(basis, spread)), TableBlock(_table(basis, spread, numbering))]
    words = "The standard deviation of each level, with its interval, stands in section {number}."
    blocks.append(Paragraph(prose(words, number=str(basis.place(Part.DATA).number)), "note"))
    return Section(place.anchor, place.number, basis.title("Spread"), tuple(blocks))


def _words(basis: Basis, spread: SpreadFindings) -> Prose:
    tests = "*F* test"
    if len(spread.rows) > 1:
        name = adjustment_words(spread.adjust).name
        tests = f"*F* tests, {name if spread.adjust == 'none' else f'adjusted together by {name}'}"
    if len(spread.rows) > 1 and spread.responses > 1 and spread.across_responses == "holm":
        tests = f"*F* tests, {together_by_holm(spread.responses)}"
    else:
        tests += across_words(spread.responses, spread.across_responses)
    kind = "the adjusted *p*" if is_adjusted_spread(spread) else "*p*"
    return prose(
        "An imprecise method can have the right mean, so the variances have their own question: each against "
        f"that of {{against}}, two-sided {tests}; {{standing}}. A difference is shown where {kind} is at "
        "most {alpha}. The test and its interval lean on normal errors more than those for means do.",
        against=spread.against,
        standing=family_standing(basis, registered=is_calm(basis.content.run)),
        alpha=alpha_words(basis),
    )


def is_adjusted_spread(spread: SpreadFindings) -> bool:
    """Whether the p-values are adjusted, for their number or for that of the responses."""
    return spread.adjust != "none" or spread.responses > 1


def spread_confidence(basis: Basis, spread: SpreadFindings) -> str:
    """The level of the intervals of the ratios: simultaneous under Bonferroni, else each by itself."""
    alpha = basis.response.alpha
    if spread.across_responses == "bonferroni":
        alpha /= spread.responses
    manner = "simultaneous " if spread.adjust == "bonferroni" and len(spread.rows) > 1 else ""
    return f"{manner}{confidence(1 - alpha)}"


def _table(basis: Basis, spread: SpreadFindings, numbering: Numbering) -> Table:
    adjusted = is_adjusted_spread(spread)
    columns = [
        Column("Variances", kind="text"),
        Column("Ratio"),
        Column("Interval, from"),
        Column("to"),
        Column("Degrees of freedom", kind="words"),
        Column(prose("*p*")),
        *([Column(prose("Adjusted *p*"))] if adjusted else []),
        Column("Difference", kind="words"),
    ]
    rows: list[list[Words]] = []
    for row in spread.rows:
        cells: list[Words] = [
            row.label,
            three_digits(row.ratio),
            *significant_ends(row.ci),
            f"{row.df[0]} and {row.df[1]}",
            probability(row.p, basis.response.alpha),
        ]
        if adjusted:
            cells.append(probability(row.p_adjusted, basis.response.alpha))
        rows.append([*cells, row_verdict(row.verdict)])
    caption = prose(
        "Ratios of variances with {confidence} intervals, {response}.",
        confidence=spread_confidence(basis, spread),
        response=basis.response.response,
    )
    notes = [prose("A ratio of 4 is a standard deviation twice as large; of 1, as large.")]
    if any(row.ci is None for row in spread.rows):
        notes.append(
            prose("Where a level or the reference does not vary there is no interval ({blank}).", blank=BLANK)
        )
    return lay_out(numbering.table(), caption, columns, rows, notes)
