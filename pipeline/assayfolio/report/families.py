"""Section 5: the comparisons, family by family."""

from assayfolio.findings import ComparisonFamily, ComparisonRow
from assayfolio.report.basis import Basis, is_single_step
from assayfolio.report.content import Block, FigureBlock, Heading, Paragraph, Section, TableBlock
from assayfolio.report.figures import MOST_ROWS, interval_plot
from assayfolio.report.methods import adjustment_of
from assayfolio.report.notation import INFINITY, MINUS, probability, statistic
from assayfolio.report.numbering import ANCHORS, COMPARISONS, Numbering
from assayfolio.report.prose import Prose, Words, joined, prose
from assayfolio.report.tables import Column, Table, lay_out
from assayfolio.report.wording import (
    adjusted_p,
    alpha_words,
    counted,
    first_of,
    interval_kind,
    row_verdict,
)

_BLANK = "–"
_STANDING = "exploratory, as the plan was not pre-registered"
_MOST_NAMED = 4


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
            "One comparison, {side}, {df}; {standing}.",
            side=side,
            df=df,
            standing=_STANDING,
        )
    else:
        words = prose(
            "A family of {count} comparisons, {side}, {adjusted}, {df}; {standing}.",
            count=str(count),
            side=side,
            adjusted=_how_adjusted(family),
            df=df,
            standing=_STANDING,
        )
    verdict = prose(
        " A difference is shown where {kind}*p* is at most {alpha}; whether it matters, its size and "
        "interval say.{unit}",
        kind="" if family.adjust == "none" else "the adjusted ",
        unit=" Differences are in percentage points." if basis.response.unit == "%" else "",
        alpha=alpha_words(basis),
    )
    return (*words, *verdict, *_other_verdicts(basis, family))


def _other_verdicts(basis: Basis, family: ComparisonFamily) -> Prose:
    """Which pairs an earlier family holds, in either direction, with another verdict."""
    found: list[Prose] = []
    for earlier in basis.response.comparisons:
        if earlier is family:
            break
        before = {frozenset(pair): row.verdict for row in earlier.rows if (pair := basis.pair(row))}
        names = []
        for row in family.rows:
            pair = basis.pair(row)
            if pair and before.get(frozenset(pair), row.verdict) != row.verdict:
                names.append(f"{basis.label(row)} ({row_verdict(row.verdict)} here)")
        if names:
            listed = first_of(names, _MOST_NAMED, ", ")
            found.append(prose("from that in “{earlier}” for {names}", earlier=earlier.name, names=listed))
    if not found:
        return ()
    words = " Each family has its own question and its own error rate: here the verdict differs {found}."
    return prose(words, found=joined(found, "; "))


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
    dots = "Estimated differences (dots)" if total > 1 else "Estimated difference (dot)"
    with_ci = is_single_step(family)
    picture = interval_plot(basis, rows, accent, f"comparisons-{number}.svg", f"{basis.confidence} interval")
    if with_ci:
        what = prose(
            "{dots} with {kind}, {name}. An interval that leaves out zero is a difference shown.",
            dots=dots,
            name=family.name,
            kind=interval_kind(basis, family) + ("s" if total > 1 else ""),
        )
    else:
        what = prose(
            "{dots}, {name}. {method} has no intervals; the {verdicts} in the table.",
            dots=dots,
            name=family.name,
            verdicts="verdicts stand" if total > 1 else "verdict stands",
            method=adjustment_of(family).name,
        )
    return [FigureBlock(numbering.figure(), (picture,), (*what, *prose(limited)))]
