"""Equivalence and non-inferiority, family by family."""

from fractions import Fraction

from assayfolio.findings import EquivalenceFamily, EquivalenceRow
from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, FigureBlock, Heading, Paragraph, Section, TableBlock
from assayfolio.report.equivalence_tests import tests_table
from assayfolio.report.families import across_words, together_by_holm
from assayfolio.report.interval_plots import Estimate, Measure, interval_plot, most_rows
from assayfolio.report.methods import adjustment_words
from assayfolio.report.notation import (
    Scale,
    confidence,
    decimal,
    degrees_of_freedom,
    probability,
)
from assayfolio.report.numbering import Numbering, Part
from assayfolio.report.prose import Prose, Words, prose
from assayfolio.report.registration import family_standing
from assayfolio.report.tables import Column, Table, lay_out
from assayfolio.report.wording import (
    BLANK,
    critical_words,
    interval_cells,
    limits_words,
    missing_note,
    row_verdict,
)


def is_percent(family: EquivalenceFamily) -> bool:
    """Whether margins and estimates are in percent of the reference mean."""
    return family.scale == "percent"


def is_non_inferiority(family: EquivalenceFamily) -> bool:
    """Whether one side is left open."""
    return family.lower is None or family.upper is None


def scale_of(basis: Basis, family: EquivalenceFamily) -> Scale:
    """How the differences of a family are printed."""
    return basis.percent_scale if is_percent(family) else basis.difference_scale


def margin_words(basis: Basis, family: EquivalenceFamily) -> str:
    """The margin of a family with its unit: "-0.5 to 0.5 mg/L"."""
    unit = "%" if is_percent(family) else basis.response.unit
    return limits_words(family.lower, family.upper, unit)


def confidence_of(family: EquivalenceFamily) -> str:
    """The level of the intervals: 1 - 2 alpha, or 1 - alpha for the one bound of non-inferiority.

    alpha is that of a row: divided by their number under Bonferroni, and by that of the responses.
    """
    alpha = family.alpha
    if family.adjust == "bonferroni":
        alpha /= family.family_size
    if family.across_responses == "bonferroni":
        alpha /= family.responses
    return confidence(1 - alpha * (1 if is_non_inferiority(family) else 2))


def is_adjusted_family(family: EquivalenceFamily) -> bool:
    """Whether p-values of `family` are adjusted, for the family or for the number of responses."""
    return family.adjust != "none" or family.responses > 1


def interval_word(family: EquivalenceFamily) -> str:
    """What the one or two ends beside an estimate are called."""
    return "bound" if is_non_inferiority(family) else "interval"


def estimates_of(basis: Basis, family: EquivalenceFamily) -> list[Estimate]:
    """The rows of a family as a figure takes them."""
    return [Estimate(basis.label(row), row.estimate, row.ci) for row in family.rows]


def margins_of(family: EquivalenceFamily) -> tuple[Fraction | None, Fraction | None]:
    """The margins of a family as a figure takes them."""
    return family.lower, family.upper


def equivalence_section(basis: Basis, numbering: Numbering, accent: str) -> Section:
    """Each family: its margin and where that comes from, its table, its intervals against the margin."""
    place = basis.place(Part.EQUIVALENCE)
    blocks: list[Block] = [
        Paragraph(
            prose(
                "Equivalence is shown where the data rule out, on either side, a difference as large as the "
                "margin. It is a question apart from that of a difference: a difference can be shown and "
                "still lie within the margin, and a difference not shown is no sign of equivalence. "
                "Equivalence of means says nothing about other quantities, such as the scatter."
            )
        )
    ]
    for number, family in enumerate(basis.response.equivalence, start=1):
        blocks.append(Heading(prose("{name}", name=family.name), basis.anchor(f"equivalence-{number}")))
        blocks.append(Paragraph(_family_words(basis, family)))
        blocks.append(TableBlock(_family_table(basis, family, numbering)))
        blocks.append(TableBlock(tests_table(basis, family, numbering)))
        blocks += _family_figure(basis, family, numbering, accent, number)
    if not basis.response.equivalence:
        number_of = str(basis.place(Part.NOT_REPORTED).number)
        why = "None of the planned questions of equivalence can be answered; section {number} says why."
        blocks = [Paragraph(prose(why, number=number_of))]
    return Section(place.anchor, place.number, basis.title("Equivalence"), tuple(blocks))


def _family_words(basis: Basis, family: EquivalenceFamily) -> Prose:
    source = prose("whose source the plan does not state")
    if family.margin_source:
        source = prose("from {source}", source=family.margin_source)
    return prose(
        "#Margin# {margin}{of_mean}, {source}. "
        + _how_tested(basis, family)
        + "; {standing}. "
        + _claim(family)
        + " is shown where "
        + _deciding_p(family)
        + " is at most {alpha}.",
        margin=margin_words(basis, family),
        of_mean=" of the reference mean" if is_percent(family) else "",
        source=source,
        standing=family_standing(basis, registered=family.registered),
        alpha=decimal(family.alpha),
    )


def _claim(family: EquivalenceFamily) -> str:
    if not is_non_inferiority(family):
        return "Equivalence"
    return f"That a mean is not {'higher' if family.lower is None else 'lower'} by the margin or more"


def _deciding_p(family: EquivalenceFamily) -> str:
    if is_adjusted_family(family):
        return "the adjusted *p*"
    return "*p*" if is_non_inferiority(family) else "the larger *p*"


def _how_tested(basis: Basis, family: EquivalenceFamily) -> str:
    count = family.family_size
    kind = "Welch *t*" if basis.is_separate else "*t*"
    tests = f"one one-sided {kind} test" if is_non_inferiority(family) else f"two one-sided {kind} tests"
    if count == 1:
        words = f"One comparison, {tests}"
    else:
        name = adjustment_words(family.adjust).name
        adjusted = name if family.adjust == "none" else f"adjusted together by {name}"
        if family.across_responses == "holm" and family.responses > 1:
            return f"{count} comparisons, {tests} each, {together_by_holm(family.responses)}"
        words = f"{count} comparisons, {tests} each, {adjusted}"
    return words + across_words(family.responses, family.across_responses)


def _family_table(basis: Basis, family: EquivalenceFamily, numbering: Numbering) -> Table:
    scale = scale_of(basis, family)
    with_se = any(row.se is not None for row in family.rows)
    with_df = len({row.df for row in family.rows}) > 1
    adjusted = is_adjusted_family(family)
    columns = [
        Column("Comparison", kind="text"),
        Column("Estimated difference", scale.heading),
        Column("Interval, from", scale.heading),
        Column("to", scale.heading),
        *([Column("Standard error", scale.heading)] if with_se else []),
        *([Column("Degrees of freedom")] if with_df else []),
        *([Column(prose("*p*, lower margin"))] if family.lower is not None else []),
        *([Column(prose("*p*, upper margin"))] if family.upper is not None else []),
        *([Column(prose("Adjusted *p*"))] if adjusted else []),
        Column("Non-inferiority" if is_non_inferiority(family) else "Equivalence", kind="words"),
    ]
    largest = max((row.se for row in family.rows if row.se), key=lambda se: se.square, default=None)
    rows: list[list[Words]] = []
    for row in family.rows:
        cells: list[Words] = [basis.label(row), scale.mean(row.estimate), *interval_cells(scale, row.ci)]
        if with_se:
            cells.append(BLANK if row.se is None or largest is None else scale.spread(row.se, largest))
        if with_df:
            cells.append(BLANK if row.df is None else degrees_of_freedom(row.df))
        cells += _probabilities(family, row)
        rows.append([*cells, row_verdict(row.verdict)])
    caption = prose(
        "{claim}, {name}, with {confidence} {ends}.",
        ends=_ends(family),
        claim="Non-inferiority" if is_non_inferiority(family) else "Equivalence",
        name=family.name,
        confidence=confidence_of(family),
    )
    notes = [_interval_note(family), *_critical_note(family), *missing_note(basis, family)]
    return lay_out(numbering.table(), caption, columns, rows, notes)


def _critical_note(family: EquivalenceFamily) -> list[Prose]:
    """What the standard errors are multiplied by; none with percent margins, and not where rows differ."""
    values = {(row.critical, row.df) for row in family.rows if row.critical is not None}
    if len(values) != 1:
        return []
    ((critical, df),) = values
    return [critical_words(critical, df, one_sided=is_non_inferiority(family))]


def _probabilities(family: EquivalenceFamily, row: EquivalenceRow) -> list[Words]:
    cells: list[Words] = []
    if family.lower is not None:
        cells.append(BLANK if row.p_lower is None else probability(row.p_lower, family.alpha))
    if family.upper is not None:
        cells.append(BLANK if row.p_upper is None else probability(row.p_upper, family.alpha))
    if is_adjusted_family(family):
        cells.append(probability(row.p_adjusted, family.alpha, row.log10_p_adjusted))
    return cells


def _interval_note(family: EquivalenceFamily) -> Prose:
    alpha = decimal(family.alpha)
    if is_non_inferiority(family):
        what = "The bound is one-sided, at 1 − *α* with *α* = {alpha}"
    else:
        what = "The intervals are at 1 − 2*α* with *α* = {alpha} for each one-sided test"
    divided = []
    if family.adjust == "bonferroni" and len(family.rows) > 1:
        divided.append(f"comparisons ({len(family.rows)})")
    if family.across_responses == "bonferroni" and family.responses > 1:
        divided.append(f"responses ({family.responses})")
    if divided:
        what += ", divided by the number of " + " and of ".join(divided)
    if family.adjust == "holm" and len(family.rows) > 1:
        what += "; each is for its comparison alone, and the verdict follows the adjusted *p*"
    return prose(what + ".", alpha=alpha)


def _family_figure(
    basis: Basis, family: EquivalenceFamily, numbering: Numbering, accent: str, number: int
) -> list[Block]:
    rows = estimates_of(basis, family)
    limited = ""
    most = most_rows([row.label for row in rows])
    if len(rows) > most:
        found = family.rows
        order = sorted(range(len(rows)), key=lambda index: (-found[index].log10_p_adjusted, index))
        limited = f" Drawn are the {most} of {len(rows)} with the largest *p*; the table has all."
        rows = [rows[index] for index in sorted(order[:most])]
    quantity = "difference" if not is_percent(family) else "difference from the reference mean"
    measure = Measure(
        quantity,
        scale_of(basis, family),
        f"{confidence_of(family)} {interval_word(family)}",
        margins_of(family),
    )
    picture = interval_plot(rows, measure, accent, basis.file(f"equivalence-{number}.svg"))
    return [FigureBlock(numbering.figure(), (picture,), (*_caption(basis, family), *prose(limited)))]


def _caption(basis: Basis, family: EquivalenceFamily) -> Prose:
    if is_non_inferiority(family):
        reading = "wholly on the shaded side of the line is non-inferiority shown"
    else:
        reading = "wholly inside the band is equivalence shown"
    if family.across_responses == "holm" or (family.adjust == "holm" and len(family.rows) > 1):
        reading += ", unless the adjusted *p* in the table says otherwise"
    return prose(
        "{dots} with {confidence} {ends}, {name}; shaded: the margin, {margin}. An interval that lies "
        + reading
        + ".",
        dots="Estimated differences (dots)" if len(family.rows) > 1 else "Estimated difference (dot)",
        confidence=confidence_of(family),
        ends=_ends(family),
        name=family.name,
        margin=margin_words(basis, family),
    )


def _ends(family: EquivalenceFamily) -> str:
    return interval_word(family) + ("s" if len(family.rows) > 1 else "")
