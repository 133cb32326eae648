"""Estimates with their intervals, one row each, as a figure: differences against zero or against margins."""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction

from assayfolio.findings import Interval
from assayfolio.report.axes import Axis, Lettering, make_axis
from assayfolio.report.figures import (
    FULL_WIDTH,
    LINE,
    MOST_HEIGHT,
    SIZE,
    Picture,
    axis_title,
    draw_axis,
    draw_interval,
    label_column,
)
from assayfolio.report.notation import Scale, kept_together
from assayfolio.report.svg import HAIR, HAIRLINE, SECOND_INK, THIN_LINE, Drawing
from assayfolio.report.typeface import figures_width, text_width, wrapped
from assayfolio.report.wording import interval_cells, limits_words

MOST_ROWS = 36
_BAND_INK = 0.08
_TOP = 14.0

Limits = tuple[Fraction | None, Fraction | None]


@dataclass(frozen=True, slots=True)
class Estimate:
    """One row of an interval plot."""

    label: str
    value: Fraction
    interval: Interval | None


@dataclass(frozen=True, slots=True)
class Measure:
    """What the rows of an interval plot are: a quantity, its scale, and the head over the intervals.

    `margins` are the limits between which a difference does not matter, where such were planned.
    """

    quantity: str
    scale: Scale
    head: str
    margins: Limits | None = None


def band_colour(accent: str) -> str:
    """The accent at 8 % on white, for the band between margins."""
    parts = (int(accent[start : start + 2], 16) for start in (1, 3, 5))
    return "#" + "".join(f"{round(255 - _BAND_INK * (255 - part)):02x}" for part in parts)


def draw_margins(
    drawing: Drawing, axis: Axis, margins: Limits, top: float, bottom: float, accent: str
) -> None:
    """The band between the margins with a line at each; an open side runs to the end of the axis."""
    low, high = margins
    left = axis.start if low is None else axis.at(low)
    right = axis.end if high is None else axis.at(high)
    drawing.box(left, top, right - left, bottom - top, fill=band_colour(accent))
    for limit in margins:
        if limit is not None:
            drawing.line(axis.at(limit), top, axis.at(limit), bottom, stroke=accent, width=HAIR)


def most_rows(labels: Sequence[str]) -> int:
    """How many rows with these labels one figure holds: as many as fit on a page with their caption."""
    column = label_column(list(labels), 168)
    tallest = max(_row_height(len(wrapped(kept_together(label), SIZE, column))) for label in labels)
    return max(1, min(MOST_ROWS, int(MOST_HEIGHT / tallest)))


def _row_height(lines: int) -> float:
    return max(15.0, LINE * lines + 6)


def ends_of(rows: Sequence[Estimate]) -> list[Fraction]:
    """Every estimate and every finite end of an interval."""
    values = [row.value for row in rows]
    return values + [Fraction(end) for row in rows for end in row.interval or () if end is not None]


def interval_plot(rows: Sequence[Estimate], measure: Measure, accent: str, name: str) -> Picture:
    """Estimates with their intervals in the order of the plan; figures in columns at right."""
    scale = measure.scale
    column = label_column([row.label for row in rows], 168)
    lines = [wrapped(kept_together(row.label), SIZE, column) for row in rows]
    heights = [_row_height(len(words)) for words in lines]
    figures = [_figures(row, scale) for row in rows]
    columns = _number_columns(figures, measure)
    right = FULL_WIDTH - sum(columns) - 10 * len(columns)
    drawing = Drawing(FULL_WIDTH, sum(heights) + 46)
    limits = [limit for limit in measure.margins or () if limit is not None]
    values = ends_of(rows) + limits
    lettering = Lettering(SIZE, 0, FULL_WIDTH)
    axis = make_axis(values, column + 16, right, include_zero=True, power=scale.power, lettering=lettering)
    bottom = _TOP + sum(heights) + 2
    if measure.margins is not None:
        draw_margins(drawing, axis, measure.margins, _TOP, bottom, accent)
    drawing.line(axis.at(0), _TOP, axis.at(0), bottom, stroke=SECOND_INK, width=THIN_LINE)
    _heads(drawing, columns, right, measure)
    y = _TOP
    for row, words, height, texts in zip(rows, lines, heights, figures, strict=True):
        middle = y + height / 2
        baseline = middle - LINE * len(words) / 2 + 7
        for number, word in enumerate(words):
            drawing.text(0, baseline + number * LINE, word, size=SIZE)
        if row.interval is not None:
            draw_interval(drawing, axis, middle, row.interval, stroke=accent)
        drawing.dot(axis.at(row.value), middle, 2.1, fill=accent)
        _numbers(drawing, texts, columns, right, middle + 2.6)
        y += height
    ends = (axis.at(min(*values, Fraction(0))), axis.at(max(*values, Fraction(0))))
    draw_axis(drawing, axis, y + 4, axis_title(axis, measure.quantity, scale), ends)
    words_for_all = _in_words(rows, measure)
    return Picture(name, drawing.svg(words_for_all), words_for_all, 164)


def _figures(row: Estimate, scale: Scale) -> list[str]:
    ends = [] if row.interval is None else interval_cells(scale, row.interval)
    return [scale.mean(row.value), *ends]


def _number_columns(figures: list[list[str]], measure: Measure) -> list[float]:
    """The widths of the columns of figures; the two of the interval hold their head between them."""
    count = max(len(texts) for texts in figures)
    widths = [max(figures_width(texts[i], SIZE) for texts in figures if i < len(texts)) for i in range(count)]
    if count > 1:
        missing = text_width(measure.head, 6.8) + 8 - sum(widths[1:]) - 10
        widths[1] += max(0.0, missing)
    return widths


def _heads(drawing: Drawing, columns: list[float], right: float, measure: Measure) -> None:
    x = right + 10 + columns[0]
    drawing.text(x, 6, "difference", size=6.8, fill=SECOND_INK, anchor="end")
    if len(columns) > 1:
        drawing.text(FULL_WIDTH, 6, measure.head, size=6.8, fill=SECOND_INK, anchor="end")
    drawing.line(right + 6, 10, FULL_WIDTH, 10, stroke=HAIRLINE, width=HAIR)


def _numbers(drawing: Drawing, texts: list[str], columns: list[float], right: float, baseline: float) -> None:
    x = right
    for text, width in zip(texts, columns, strict=False):
        x += 10 + width
        drawing.figures(x, baseline, text, size=SIZE)


def _in_words(rows: Sequence[Estimate], measure: Measure) -> str:
    parts = []
    for row in rows:
        low_high = _figures(row, measure.scale)[1:]
        interval = f", interval {low_high[0]} to {low_high[1]}" if low_high else ""
        parts.append(f"{row.label}: {measure.scale.mean(row.value)}{interval}")
    unit = f" in {measure.scale.heading}" if measure.scale.heading else ""
    within = ""
    if measure.margins is not None:
        within = f" Margins: {limits_words(*measure.margins, measure.scale.unit)}."
    return f"Differences{unit}. {'; '.join(parts)}.{within}"
