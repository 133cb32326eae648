"""How control charts are made, which rules are applied and where they were published, and chance signals.

The citations are from memory.
"""

from assayfolio.report.content import Block, Items, Paragraph, Section, TableBlock
from assayfolio.report.notation import THIN, three_digits
from assayfolio.report.numbering import Numbering
from assayfolio.report.prose import Words, prose
from assayfolio.report.statement_parts import formula
from assayfolio.report.tables import Column, lay_out
from assayfolio.report.trend_figures import quantity_words
from assayfolio.statistics.run_rules import RULES
from assayfolio.trending.charts import RANGE_RULE, RANGE_SOURCE, RANGE_WORDS, TrendFindings

_FEW = 20


def rule_words(name: str) -> str:
    """What a rule says."""
    return RANGE_WORDS if name == RANGE_RULE else RULES[name].words


def _source(name: str) -> str:
    return RANGE_SOURCE if name == RANGE_RULE else RULES[name].source


def expected_section(found: TrendFindings, numbering: Numbering) -> Section:
    """How many points a process that has not changed is expected to signal at, chart by chart."""
    rows: list[list[Words]] = []
    for chart in found.charts:
        if chart.limits is not None:
            what = f"{chart.series.response}, {quantity_words(chart)}"
            told = len({(signal.panel, signal.place) for signal in chart.signals})
            rows.append([what, str(len(chart.series.points)), three_digits(chart.expected), str(told)])
    if not rows:
        words = "No chart has limits yet, so that nothing can signal."
        return Section("expected", 0, "Signals by chance", (Paragraph(prose(words)),))
    columns = [
        Column("Chart", kind="text"),
        Column("Points", kind="number"),
        Column("Expected by chance", kind="number"),
        Column("Found", kind="number"),
    ]
    caption = prose(
        "Points with a signal that a process that has not changed is expected to show, and those found."
    )
    blocks: list[Block] = [TableBlock(lay_out(numbering.table(), caption, columns, rows))]
    notes = [
        prose(
            "At one point of a chart of individual values the chance is {rate} once the chart is longer than "
            "its rules look back{ranges}.",
            rate=_chance(found.rate),
            ranges=f"; at one moving range {_chance(found.range_rate)}" if found.range_rate else "",
        ),
        prose(
            "Exact by a Markov chain for points that are independent and normal about known limits. The "
            "limits here are estimates from a baseline, which makes signals by chance more frequent, and the "
            "more so the shorter the baseline is."
        ),
        prose("A point at which a rule holds counts, whether or not the points before it signalled."),
    ]
    shortest = min(chart.limits.n for chart in found.charts if chart.limits is not None)
    if shortest < _FEW:
        notes.append(
            prose(
                "The baseline has {n} lots, fewer than {few}: the limits are uncertain.",
                n=str(shortest),
                few=str(_FEW),
            )
        )
    month = found.month
    if month is not None:
        notes.append(
            prose(
                "{lots} lots were run in the 30 days up to {ends}; as many more are expected to show "
                "{signals} false signals on all charts together.",
                lots=str(month.lots),
                ends=month.ends,
                signals=three_digits(month.signals),
            )
        )
    blocks.append(Items(tuple(notes)))
    return Section("expected", 0, "Signals by chance", tuple(blocks))


def _chance(rate: float) -> str:
    return f"{three_digits(rate * 100)}{THIN}%"


def method_section(found: TrendFindings) -> Section:
    """Limits, values and rules."""
    columns = [
        Column("Rule", kind="words"),
        Column("Holds at a point where there are", kind="text"),
        Column("Published in", kind="text"),
    ]
    rows: list[list[Words]] = [[name, rule_words(name), _source(name)] for name in found.plan.rules]
    plan = found.plan
    named = f"the first {plan.first} lots" if plan.first is not None else f"the lots {', '.join(plan.lots)}"
    values = {
        "lot-mean": "A lot mean is the exact mean of all values of the lot; where the lot is a level of the "
        "factor, of that level.",
        "repeatability-sd": "The repeatability standard deviation is that within levels, as the report of "
        "the lot gives it.",
        "difference": "Differences to a reference and their intervals are those of the report of the lot.",
    }
    blocks: tuple[Block, ...] = (
        Items(
            (
                prose("The baseline is {named}, as planned; its limits hold for every lot.", named=named),
                *(prose(values[quantity]) for quantity in plan.quantities),
                prose(
                    "Whether a point lies beyond a line is decided exactly, not on rounded figures. A point "
                    "on a line does not lie beyond it."
                ),
            )
        ),
        formula("limits of the individuals", "*x̄* ± 3 *R̄* / *d*_2_,  *d*_2_ = 2 / √π"),
        formula("upper limit of the moving range", "*R̄* (1 + 3 *d*_3_ / *d*_2_),  *d*_3_ = √(2 − 4 / π)"),
        Paragraph(
            prose(
                "*x̄* is the mean of the baseline and *R̄* the mean of the ranges of its neighbours "
                "(W. A. Shewhart 1931; ISO 7870-2:2013). Chance signals follow C. W. Champ and "
                "W. H. Woodall, Technometrics 29 (1987) 393–399."
            ),
            "note",
        ),
        TableBlock(lay_out("Rules", prose("chosen in the plan."), columns, rows)),
    )
    return Section("method", 0, "How the charts are made", blocks)
