"""The comparisons, family by family."""

from collections.abc import Sequence

from assayfolio.findings import ComparisonFamily, ComparisonRow
from assayfolio.report.basis import Basis, is_single_step
from assayfolio.report.content import Block, FigureBlock, Heading, Paragraph, Section, TableBlock
from assayfolio.report.interval_plots import Estimate, Measure, interval_plot, most_rows
from assayfolio.report.methods import adjustment_of
from assayfolio.report.notation import (
    confidence,
    degrees_of_freedom,
    percent,
    probability,
    statistic,
    three_digits,
)
from assayfolio.report.numbering import Numbering, Part
from assayfolio.report.prose import Prose, Words, joined, prose
from assayfolio.report.registration import family_standing
from assayfolio.report.tables import Column, Table, lay_out
from assayfolio.report.wording import (
    BLANK,
    adjusted_p,
    alpha_words,
    counted,
    critical_words,
    first_of,
    interval_cells,
    interval_kind,
    is_adjusted,
    missing_note,
    row_verdict,
    significant_ends,
)

_MOST_NAMED = 4
ACROSS_NAMES = {"bonferroni": "Bonferroni", "holm": "Holm"}


def comparisons_section(basis: Basis, numbering: Numbering, accent: str) -> Section:
    """Each family of comparisons: how it was formed, its table, its intervals drawn."""
    families = basis.response.comparisons
    place = basis.place(Part.COMPARISONS)
    blocks: list[Block] = []
    for number, family in enumerate(families, start=1):
        blocks.append(Heading(prose("{name}", name=family.name), basis.anchor(f"family-{number}")))
        blocks.append(Paragraph(_family_words(basis, family)))
        blocks.append(TableBlock(_family_table(basis, family, numbering)))
        if family.kind != "trend":  # its rows are in different units and share no axis
            blocks += _family_figure(basis, family, numbering, accent, number)
    if not families:
        why = "None of the planned comparisons can be reported; section {number} gives the reasons."
        reasons = str(basis.place(Part.NOT_REPORTED).number)
        blocks.append(Paragraph(prose(why, number=reasons)))
    return Section(place.anchor, place.number, basis.title("Comparisons"), tuple(blocks))


def side_words(basis: Basis, family: ComparisonFamily) -> str:
    """Which sides a family asks about, the direction of a one-sided one written out."""
    if family.alternative == "two-sided":
        return "two-sided"
    above = family.alternative == "greater"
    if basis.pair(family.rows[0]) is not None:
        meant = "the first level above the second" if above else "the first level below the second"
    else:
        meant = "above zero" if above else "below zero"
    return f"one-sided ({family.alternative}: {meant})"


def _family_words(basis: Basis, family: ComparisonFamily) -> Prose:
    count = family.family_size
    values: dict[str, Words] = {
        "count": str(count),
        "side": side_words(basis, family),
        "adjusted": _how_adjusted(family),
        "df": _df_words(basis, family),
        "standing": family_standing(basis, registered=family.registered),
    }
    if count == 1:
        pattern = f"One comparison, {{side}}{_how_one_is_adjusted(family)}, {{df}}; {{standing}}."
    else:
        pattern = "A family of {count} comparisons, {side}, {adjusted}, {df}; {standing}."
    verdict = prose(
        " A difference is shown where {kind}*p* is at most {alpha}; whether it matters, its size and "
        "interval say.{unit}",
        kind="the adjusted " if is_adjusted(family) else "",
        unit=" Differences are in percentage points." if basis.response.unit == "%" else "",
        alpha=alpha_words(basis),
    )
    return (*prose(pattern, **values), *verdict, *_trend_words(family), *_other_verdicts(basis, family))


def _df_words(basis: Basis, family: ComparisonFamily) -> Words:
    different = {row.df for row in family.rows}
    if len(different) > 1:
        words = "each with its own degrees of freedom"
    else:
        df = different.pop()
        whole = df == int(df)
        number = counted(int(df), "degree") if whole else f"{degrees_of_freedom(df)} degrees"
        words = f"{number} of freedom"
    if not basis.is_separate or family.adjust == "games-howell":
        return words
    return prose(f"by Welch’s *t* test{'s' if len(family.rows) > 1 else ''}, {words}")


def _trend_words(family: ComparisonFamily) -> Prose:
    if family.kind != "trend":
        return ()
    slope = " The linear row is the slope for each unit of the score of a level"
    if len(family.rows) == 1:
        return prose(f"{slope}.")
    return prose(
        f"{slope}; each further row is the leading coefficient of the next orthogonal polynomial, in the "
        "unit of the response over that power of the score’s."
    )


def across_words(responses: int, how: str) -> str:
    """The words that say that a family is adjusted for the number of responses too; empty where it is not."""
    if responses == 1:
        return ""
    return f", adjusted for {responses} responses by {ACROSS_NAMES.get(how, how)}"


def together_by_holm(responses: int) -> str:
    """How the comparisons of a family are adjusted where Holm takes those of all responses together."""
    return f"adjusted together with those of all {responses} responses by Holm"


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


def _how_one_is_adjusted(family: ComparisonFamily) -> str:
    across = across_words(family.responses, family.across_responses)
    if family.adjust == "none":
        return across
    return f", adjusted for every other contrast that could be asked by {adjustment_of(family).name}{across}"


def _how_adjusted(family: ComparisonFamily) -> str:
    if family.adjust == "none":
        within = "not adjusted for their number"
    else:
        within = f"adjusted together by {adjustment_of(family).name}"
    if family.responses == 1:
        return within
    if family.across_responses == "holm":
        return together_by_holm(family.responses)
    return within + across_words(family.responses, family.across_responses)


def _family_table(basis: Basis, family: ComparisonFamily, numbering: Numbering) -> Table:
    is_trend = family.kind == "trend"
    unit = "" if is_trend else basis.difference_scale.heading
    with_ci = is_single_step(family)
    adjusted = is_adjusted(family)
    different_df = len({row.df for row in family.rows}) > 1
    own_c = len({row.critical for row in family.rows}) > 1
    columns = [
        Column("Trend" if is_trend else "Comparison", kind="text"),
        Column("Estimated coefficient" if is_trend else "Estimated difference", unit),
        *([Column("Interval, from", unit), Column("to", unit)] if with_ci else []),
        Column("Standard error", unit),
        *([Column("Degrees of freedom")] if different_df else []),
        *([Column(prose("*c*"))] if own_c else []),
        Column(prose("*t*")),
        Column(prose("*p*")),
        *([Column(prose("Adjusted *p*"))] if adjusted else []),
        Column("Trend" if is_trend else "Difference", kind="words"),
    ]
    cells = _trend_cells(family.rows) if is_trend else _difference_cells(basis, family.rows)
    rows = []
    for row, (estimate, ends, se) in zip(family.rows, cells, strict=True):
        rows.append(
            [
                basis.label(row),
                estimate,
                *(ends if with_ci else []),
                se,
                *([degrees_of_freedom(row.df)] if different_df else []),
                *([BLANK if row.critical is None else statistic(row.critical)] if own_c else []),
                statistic(row.statistic),
                probability(row.p, basis.response.alpha),
                *([adjusted_p(basis, row)] if adjusted else []),
                row_verdict(row.verdict),
            ]
        )
    caption = prose("Comparisons, {name}.", name=family.name)
    if with_ci:
        kind = interval_kind(basis, family) + ("s" if len(family.rows) > 1 else "")
        caption = prose("Comparisons, {name}, with {kind}.", name=family.name, kind=kind)
    return lay_out(numbering.table(), caption, columns, rows, _table_notes(basis, family))


_Cells = tuple[Words, list[str], Words]


def _difference_cells(basis: Basis, rows: Sequence[ComparisonRow]) -> list[_Cells]:
    """Estimate, ends of the interval and standard error of each row, all in the unit of the response."""
    scale = basis.difference_scale
    largest = max((row.se for row in rows), key=lambda se: se.square)
    return [
        (scale.mean(row.estimate), interval_cells(scale, row.ci), scale.spread(row.se, largest))
        for row in rows
    ]


def _trend_cells(rows: Sequence[ComparisonRow]) -> list[_Cells]:
    """The same for trends: each row has a unit of its own, and three digits."""
    return [(three_digits(row.estimate), significant_ends(row.ci), three_digits(row.se)) for row in rows]


def _table_notes(basis: Basis, family: ComparisonFamily) -> list[Prose]:
    return [*_critical_note(family), *_across_note(basis, family), *missing_note(basis, family)]


def _critical_note(family: ComparisonFamily) -> list[Prose]:
    """What standard errors are multiplied by for the intervals; where rows differ, what the column is."""
    values = {row.critical for row in family.rows} - {None}
    if not values:
        return []
    one = family.alternative != "two-sided"
    if len(values) > 1:
        return [critical_words(None, one_sided=one)]
    different_df = {row.df for row in family.rows}
    df = different_df.pop() if len(different_df) == 1 else None
    return [critical_words(values.pop(), df, one_sided=one)]


def _across_note(basis: Basis, family: ComparisonFamily) -> list[Prose]:
    if family.responses == 1 or not is_single_step(family):
        return []
    if family.adjust == "none" and len(family.rows) > 1:
        words = (
            "The intervals of one comparison hold together over the {count} responses with {confidence}; "
            "those of several comparisons do not."
        )
    else:
        words = "The intervals hold together over the {count} responses with {confidence}."
    return [
        prose(
            words,
            count=str(family.responses),
            confidence=percent(1 - basis.response.alpha),
        )
    ]


def _family_figure(
    basis: Basis, family: ComparisonFamily, numbering: Numbering, accent: str, number: int
) -> list[Block]:
    rows = family.rows
    total = len(rows)
    limited = ""
    most = most_rows([basis.label(row) for row in rows])
    if total > most:
        order = sorted(range(total), key=lambda index: (rows[index].log10_p_adjusted, rows[index].p, index))
        rows = tuple(rows[index] for index in sorted(order[:most]))
        limited = (
            f" Drawn are the {most} of {total} with the smallest adjusted *p*, in the order of the "
            "plan; the table has all."
        )
    dots = "Estimated differences (dots)" if total > 1 else "Estimated difference (dot)"
    head = f"{confidence(1 - basis.response.alpha / family.responses)} interval"
    picture = interval_plot(
        [Estimate(basis.label(row), row.estimate, row.ci) for row in rows],
        Measure("difference", basis.difference_scale, head),
        accent,
        basis.file(f"comparisons-{number}.svg"),
    )
    if is_single_step(family):
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
            method=_without_intervals(family),
        )
    return [FigureBlock(numbering.figure(), (picture,), (*what, *prose(limited)))]


def _without_intervals(family: ComparisonFamily) -> str:
    if family.across_responses == "holm" and family.responses > 1:
        return "Holm’s adjustment across the responses"
    return adjustment_of(family).name
