"""Control charts over lots on paper: which rules signal at which lots, the charts, and signals by chance."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from assayfolio.report.content import (
    Block,
    FigureBlock,
    Heading,
    Paragraph,
    Section,
    TableBlock,
)
from assayfolio.report.figures import Picture
from assayfolio.report.notation import decimal, three_digits
from assayfolio.report.numbering import Numbering
from assayfolio.report.pages import FIGURE_SCHEME, html_from
from assayfolio.report.pdf import Look, lay_out, write
from assayfolio.report.prose import Prose, Words, legible, prose
from assayfolio.report.tables import Column
from assayfolio.report.tables import lay_out as table_of
from assayfolio.report.trend_figures import MOST_POINTS, chart_figure, chart_scale, quantity_words
from assayfolio.report.trend_method import expected_section, method_section
from assayfolio.report.trend_sources import LeftOutRun as LeftOutRun
from assayfolio.report.trend_sources import TrendInput, lots_section, provenance_section
from assayfolio.report.wording import capitalised, counted
from assayfolio.trending.charts import Chart, Signal, TrendFindings

_TEMPLATE = "trend.html.j2"
MOST_LISTED = 60


@dataclass(frozen=True, slots=True)
class TrendPage:
    """The whole document, all words final."""

    kind: str
    number: str
    title: str
    laboratory: str
    address: str
    note: str
    created: str
    generator: str
    box: str
    box_notes: tuple[Prose, ...]
    attention: tuple[Prose, ...]
    facts: tuple[Prose, ...]
    sections: tuple[Section, ...]
    foot: str


@dataclass(frozen=True, slots=True)
class _Mark:
    """A point with one signal or more, and the number that it bears in figures and table."""

    number: int
    chart: Chart
    place: int
    signals: tuple[Signal, ...]


def render_trend(content: TrendInput) -> tuple[bytes, tuple[Picture, ...]]:
    """The PDF, the same bytes for the same input everywhere, and the figures in it.

    Raises RenderingError where it cannot be set exactly as written.
    """
    page = compose_trend(content)
    pictures = tuple(
        picture
        for section in page.sections
        for block in section.blocks
        if isinstance(block, FigureBlock)
        for picture in block.pictures
    )
    look = Look(content.laboratory.paper, content.laboratory.accent)
    html = html_from(_TEMPLATE, page=page, figure_scheme=FIGURE_SCHEME)
    laid_out = lay_out(html, {picture.name: picture.svg for picture in pictures}, look)
    return write(laid_out, (), content.created), pictures


def compose_trend(content: TrendInput) -> TrendPage:
    """All words of the document."""
    found, laboratory = content.findings, content.laboratory
    study, numbering, marks = found.study, Numbering(), _marks(found)
    made = (
        _signals_section(marks, numbering),
        _charts_section(content, marks, numbering),
        expected_section(found, numbering),
        lots_section(content, numbering),
        method_section(found),
        provenance_section(content),
    )
    sections = tuple(
        Section(one.anchor, number, one.title, one.blocks) for number, one in enumerate(made, start=1)
    )
    return TrendPage(
        kind="Control charts over lots",
        number=study.study,
        title=study.title,
        laboratory=laboratory.name,
        address=", ".join(laboratory.address),
        note=laboratory.note or "",
        created=content.created,
        generator=content.generator,
        box=_box(found, marks),
        box_notes=tuple(_box_notes(found)),
        attention=tuple(
            prose(
                "Left out, as its folio is not as it was sealed: {run}, {why}.", run=one.run, why=one.reason
            )
            for one in content.changed
        ),
        facts=(
            prose(
                "{lots}, from {first} to {last}; made {made}",
                lots=counted(len(found.results), "lot"),
                first=legible(found.results[0].lot),
                last=legible(found.results[-1].lot),
                made=content.made,
            ),
        ),
        sections=sections,
        foot="charts inform; they decide nothing about a lot, and nothing happens by itself",
    )


def _marks(found: TrendFindings) -> tuple[_Mark, ...]:
    """Every point with a signal, those of the newest lot first, chart by chart."""
    order = {result.run: place for place, result in enumerate(found.results)}
    points: dict[tuple[int, int, int], list[Signal]] = {}
    for number, chart in enumerate(found.charts):
        for signal in chart.signals:
            points.setdefault((-order[signal.run], number, signal.place), []).append(signal)
    return tuple(
        _Mark(index, found.charts[key[1]], key[2], tuple(points[key]))
        for index, key in enumerate(sorted(points), start=1)
    )


def _box(found: TrendFindings, marks: Sequence[_Mark]) -> str:
    if not found.charts:
        return "No chart: the runs hold nothing of what the plan wants charted."
    charts = counted(len(found.charts), "chart")
    without = sum(chart.limits is None for chart in found.charts)
    if without == len(found.charts):
        return f"No limits yet on {charts}, so no rule is applied."
    some = f"; {without} of them without limits yet" if without else ""
    if not marks:
        return f"No signal by the planned rules on {charts}{some}."
    lots = len({mark.chart.series.points[mark.place].lot for mark in marks})
    where = f"at {counted(lots, 'lot')} on {len({id(mark.chart) for mark in marks})} of {charts}"
    return f"{counted(found.signals, 'signal')} {where}{some}."


def _box_notes(found: TrendFindings) -> Iterator[Prose]:
    expected = sum(chart.expected for chart in found.charts)
    if any(chart.limits is not None for chart in found.charts):
        yield prose(
            "From a process that has not changed, these charts are expected to show {expected} points with a "
            "signal by chance.",
            expected=three_digits(expected),
        )
    month = found.month
    if month is not None and month.signals:
        yield prose(
            "A month of as many lots as the last 30 days had ({lots}) is expected to show {expected} false "
            "signals on these charts.",
            lots=str(month.lots),
            expected=three_digits(month.signals),
        )
    if found.unmet:
        yield prose(
            "#{unmet}# beyond a criterion line, listed in section 2.", unmet=counted(found.unmet, "value")
        )
    yield prose(
        "~A signal says that a rule holds, not why. What follows from it is for a person to decide and to "
        "record.~"
    )


def _signals_section(marks: Sequence[_Mark], numbering: Numbering) -> Section:
    if not marks:
        words = "No planned rule holds at any point. That does not show that nothing has changed."
        return Section("signals", 0, "Signals", (Paragraph(prose(words)),))
    columns = [
        Column("No.", kind="words"),
        Column("Lot", kind="words"),
        Column("Run", kind="words"),
        Column("Chart", kind="text"),
        Column("Signal by rule", kind="text"),
        Column("Value", kind="words"),
    ]
    rows: list[list[Words]] = []
    for mark in marks[:MOST_LISTED]:
        point, scale = mark.chart.series.points[mark.place], chart_scale(mark.chart)
        rules = ", ".join(one.rule for one in mark.signals)
        inside = prose(" ~(lot of the baseline)~") if mark.place in mark.chart.baseline else ()
        rows.append(
            [
                str(mark.number),
                legible(point.lot),
                point.run.rpartition("/")[2],
                f"{mark.chart.series.response}, {quantity_words(mark.chart)}",
                (*prose("{rules}", rules=rules), *inside),
                scale.with_unit(scale.value(point.value)),
            ]
        )
    more = len(marks) - MOST_LISTED
    notes = [prose("What the rules say stands in section 5.")]
    if more > 0:
        notes.append(prose("{more} more are in trend.csv.", more=str(more)))
    caption = prose(
        "Points at which a planned rule holds, newest lot first; the numbers are those in the figures."
    )
    blocks = (TableBlock(table_of(numbering.table(), caption, columns, rows, notes)),)
    return Section("signals", 0, "Signals", blocks)


def _charts_section(content: TrendInput, marks: Sequence[_Mark], numbering: Numbering) -> Section:
    blocks: list[Block] = []
    for index, chart in enumerate(content.findings.charts, start=1):
        words = prose("{response}: {what}", response=chart.series.response, what=quantity_words(chart))
        blocks.append(Heading(words))
        if not chart.series.points:
            blocks.append(Paragraph(prose("No lot has a value.")))
            continue
        own = {mark.place: mark.number for mark in marks[:MOST_LISTED] if mark.chart is chart}
        picture = chart_figure(chart, own, f"chart-{index}.svg", content.laboratory.accent)
        blocks.append(FigureBlock(numbering.figure(), (picture,), _caption(chart)))
        blocks += [Paragraph(one, "note") for one in _remarks(chart)]
    return Section("charts", 0, "Charts", tuple(blocks))


def _caption(chart: Chart) -> Prose:
    points = chart.series.points
    last = f"the last {MOST_POINTS} of " if len(points) > MOST_POINTS else ""
    shown = f"{last}{counted(len(points), 'lot')}"
    what = f"{capitalised(quantity_words(chart))} of {chart.series.response}"
    parts = [f"{what} above, moving ranges below, {shown}."]
    if chart.limits is None:
        parts.append(f"No limits: {chart.why_no_limits}.")
    else:
        parts.append(
            f"Limits from the {chart.limits.n} lots of the baseline (tinted): centre line and three standard "
            "deviations; thin lines at one and two."
        )
        if chart.signals:
            parts.append("Filled dots in a ring are signals, with their numbers in the table.")
    if any(point.interval is not None for point in points):
        parts.append("Bars are the confidence intervals of the lot’s own report.")
    if chart.lines:
        parts.append("Dashed: criterion lines, set in advance.")
    return prose("{words}", words=" ".join(parts))


def _remarks(chart: Chart) -> Iterator[Prose]:
    """What a reader has to know about one chart: values beyond a criterion line, lots without a value."""
    scale, points = chart_scale(chart), chart.series.points
    for line in chart.lines:
        limit = f"{line.relation} {scale.with_unit(decimal(line.limit))}"
        if line.unmet:
            named = [legible(points[place].lot) for place in line.unmet]
            more = f" and {len(named) - 8} more" if len(named) > 8 else ""
            words = "Criterion {limit}: not met at {lots}{more}."
            yield prose(words, limit=limit, lots=", ".join(named[:8]), more=more)
        else:
            yield prose("Criterion {limit}: met at every lot shown or listed.", limit=limit)
    if chart.limits is not None and chart.series.quantity == "repeatability-sd":
        yield prose(
            "A standard deviation is not normally distributed: it reaches further up than down, so that more "
            "points than computed lie above by chance, and fewer below."
        )
    if chart.series.absent:
        named = [f"{legible(lot)} ({why})" for lot, why in chart.series.absent[:4]]
        more = f"; and {len(chart.series.absent) - 4} more" if len(chart.series.absent) > 4 else ""
        yield prose("Without a value: {lots}{more}.", lots="; ".join(named), more=more)
