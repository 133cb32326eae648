"""The figures of control charts: individual values above, moving ranges below, lots from left to right."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from fractions import Fraction

from assayfolio.exact import Root
from assayfolio.report.axes import Axis, make_axis
from assayfolio.report.figures import FULL_WIDTH, Picture, axis_title
from assayfolio.report.notation import MINUS, Scale, decimal, significant_places
from assayfolio.report.svg import DOT_INK, HAIR, HAIRLINE, INK, SECOND_INK, THIN_LINE, Drawing
from assayfolio.report.typeface import figures_width, text_width
from assayfolio.trending.charts import Chart

MOST_POINTS = 120
CRITERION_INK = "#9a6a00"
_BASELINE_FILL = "#f1f4f5"
_SIZE = 7.2
_LEFT_TITLE = 14.0
_TOP, _ABOVE, _BETWEEN, _BELOW, _FOOT = 14.0, 122.0, 16.0, 56.0, 30.0
_LABEL_STEP = 8.6
_DOT, _SIGNAL_DOT, _SIGNAL_RING = 1.7, 2.0, 4.0
_MOST_DIGITS = 3


@dataclass(frozen=True, slots=True)
class _Label:
    """Words at the right of a panel: where they belong, and in which ink."""

    y: float
    words: str
    ink: str


def quantity_words(chart: Chart) -> str:
    """What a chart shows: "lot mean", "difference kit A minus reference"."""
    series = chart.series
    if series.quantity == "difference":
        return f"difference {series.of.replace(' - ', f' {MINUS} ')}"
    return {"lot-mean": "lot mean", "repeatability-sd": "repeatability standard deviation"}[series.quantity]


def chart_scale(chart: Chart) -> Scale:
    """In how many decimals the values of a chart are printed: three digits of their standard deviation."""
    values = [point.value for point in chart.series.points]
    spread: float | Fraction | Root = max(values) - min(values)
    if chart.limits is not None:
        spread = chart.limits.sigma
    size = spread or max(map(abs, values)) or Fraction(1)
    return Scale.of(values, -significant_places(size, _MOST_DIGITS), chart.series.unit)


def chart_figure(chart: Chart, marks: Mapping[int, int], name: str, accent: str) -> Picture:
    """The two panels of a chart, of its last 120 points where there are more.

    `marks` are the numbers under which signals are listed, by their places; further ones have none.
    """
    first = max(0, len(chart.series.points) - MOST_POINTS)
    scale = chart_scale(chart)
    drawing = Drawing(FULL_WIDTH, _TOP + _ABOVE + _BETWEEN + _BELOW + _FOOT)
    panels = _Panels(drawing, chart, scale, first, accent)
    panels.draw(marks)
    words = _in_words(chart, scale, first)
    return Picture(name, drawing.svg(words), words, 164)


class _Panels:
    """The drawing of one chart, with the places that both panels share."""

    def __init__(self, drawing: Drawing, chart: Chart, scale: Scale, first: int, accent: str) -> None:
        self._drawing, self._chart, self._scale, self._first = drawing, chart, scale, first
        self._accent = accent
        self._points = chart.series.points[first:]
        self._values = [point.value for point in self._points]
        self._ranges = chart.ranges[max(0, first - 1) :] if first else chart.ranges
        self._upper = make_axis(self._ends(), _TOP + _ABOVE, _TOP, wanted=5, power=scale.power)
        bottom = _TOP + _ABOVE + _BETWEEN + _BELOW
        tallest = [Fraction(0), *self._ranges, *self._range_lines()]
        if not any(tallest):
            tallest.append(max(map(abs, self._values)) or Fraction(1))
        self._lower = make_axis(tallest, bottom, bottom - _BELOW, wanted=3, power=scale.power)
        labels = (*self._upper.labels, *self._lower.labels)
        self._left = _LEFT_TITLE + max(figures_width(label, _SIZE) for label in labels) + 6
        upper, lower = self._upper_labels(), self._lower_labels()
        widest = max((text_width(one.words, _SIZE) for one in (*upper, *lower)), default=0.0)
        self._right = FULL_WIDTH - (widest + 6 if widest else 4)

    def draw(self, marks: Mapping[int, int]) -> None:
        """Draw both panels."""
        self._baseline()
        self._panel(self._upper, axis_title(self._upper, self._what(), self._scale))
        self._panel(self._lower, "moving range")
        self._lines()
        self._labels(self._upper_labels(), _TOP, _TOP + _ABOVE)
        self._labels(self._lower_labels(), self._lower.end, self._lower.start)
        self._intervals()
        self._curve(self._upper, list(enumerate(self._values)))
        start = 0 if self._first else 1
        self._curve(self._lower, list(enumerate(self._ranges, start=start)))
        self._marks(marks)
        self._names()

    def _what(self) -> str:
        return {"lot-mean": "mean", "repeatability-sd": "SD", "difference": "difference"}[
            self._chart.series.quantity
        ]

    def _ends(self) -> list[Fraction]:
        chart = self._chart
        ends = [*self._values, *(line.limit for line in chart.lines)]
        if chart.limits is not None:
            ends += [Fraction(chart.limits.line(sigmas)) for sigmas in (-3, 3)]
        for point in self._points:
            ends += [Fraction(end) for end in point.interval or () if end is not None]
        if chart.series.quantity == "difference":
            ends.append(Fraction(0))
        return ends

    def _range_lines(self) -> list[Fraction]:
        limits = self._chart.limits
        return [] if limits is None else [limits.mean_range, Fraction(limits.range_limit)]

    def _x(self, place: float) -> float:
        step = (self._right - self._left) / len(self._points)
        return self._left + (place + 0.5) * step

    def _baseline(self) -> None:
        """A tint behind the points that the limits come from."""
        if self._chart.limits is None:
            return
        places = [place - self._first for place in self._chart.baseline if place >= self._first]
        for place in places:
            x, width = self._x(place - 0.5), self._x(1) - self._x(0) if len(self._points) > 1 else 20
            self._drawing.box(x, _TOP, width + 0.2, _ABOVE, fill=_BASELINE_FILL)
            self._drawing.box(x, self._lower.end, width + 0.2, _BELOW, fill=_BASELINE_FILL)
        if places:
            words = "baseline"
            self._drawing.text(self._x(places[0] - 0.5) + 2, _TOP - 4, words, size=_SIZE, fill=SECOND_INK)

    def _panel(self, axis: Axis, title: str) -> None:
        drawing, left = self._drawing, self._left
        for tick, label in zip(axis.ticks, axis.labels, strict=True):
            y = axis.at(tick)
            drawing.line(left, y, left - 3, y, stroke=SECOND_INK)
            drawing.figures(left - 5, y + 2.5, label, size=_SIZE, fill=SECOND_INK)
        drawing.line(left, axis.start, left, axis.end, stroke=SECOND_INK)
        middle = (axis.start + axis.end) / 2
        drawing.text(7, middle, title, size=_SIZE, anchor="middle", upright=False)

    def _across(self, y: float, ink: str, width: float) -> None:
        self._drawing.line(self._left, y, self._right, y, stroke=ink, width=width)

    def _lines(self) -> None:
        limits = self._chart.limits
        if self._chart.series.quantity == "difference":
            self._across(self._upper.at(0), INK, HAIR)
        if limits is not None:
            for sigmas in (-2, -1, 1, 2):
                self._across(self._upper.at(limits.line(sigmas)), HAIRLINE, HAIR)
            for sigmas in (-3, 3):
                self._across(self._upper.at(limits.line(sigmas)), self._accent, 0.9)
            self._across(self._upper.at(limits.centre), SECOND_INK, THIN_LINE)
            self._across(self._lower.at(limits.mean_range), SECOND_INK, THIN_LINE)
            self._across(self._lower.at(limits.range_limit), self._accent, 0.9)
        for line in self._chart.lines:
            y = self._upper.at(line.limit)
            for dash in range(int(self._right - self._left) // 6):
                x = self._left + 6 * dash
                self._drawing.line(x, y, x + 3.5, y, stroke=CRITERION_INK, width=0.9)

    def _upper_labels(self) -> list[_Label]:
        limits, scale, at = self._chart.limits, self._scale, self._upper.at
        found = []
        if limits is not None:
            low, high = limits.line(-3), limits.line(3)
            found = [
                _Label(at(high), f"upper limit {scale.value(high)}", self._accent),
                _Label(at(limits.centre), f"centre {scale.value(limits.centre)}", SECOND_INK),
                _Label(at(low), f"lower limit {scale.value(low)}", self._accent),
            ]
        return found + [
            _Label(at(one.limit), f"criterion: {one.relation} {decimal(one.limit)}", CRITERION_INK)
            for one in self._chart.lines
        ]

    def _lower_labels(self) -> list[_Label]:
        limits, scale, at = self._chart.limits, self._scale, self._lower.at
        if limits is None:
            return []
        return [
            _Label(at(limits.range_limit), f"upper limit {scale.value(limits.range_limit)}", self._accent),
            _Label(at(limits.mean_range), f"mean {scale.value(limits.mean_range)}", SECOND_INK),
        ]

    def _labels(self, labels: Sequence[_Label], top: float, bottom: float) -> None:
        """Words at the right end of the lines, moved apart where they would touch."""
        ordered = sorted(labels, key=lambda one: one.y)
        places = [one.y for one in ordered]
        for index in range(1, len(places)):
            places[index] = max(places[index], places[index - 1] + _LABEL_STEP)
        over = max(0.0, places[-1] - bottom - 2) if places else 0.0
        for index in range(len(places) - 1, -1, -1):
            limit = places[index] - over if index == len(places) - 1 else places[index + 1] - _LABEL_STEP
            places[index] = max(top - 4, min(places[index], limit))
        for one, y in zip(ordered, places, strict=True):
            self._drawing.text(self._right + 5, y + 2.5, one.words, size=_SIZE, fill=one.ink)

    def _intervals(self) -> None:
        for place, point in enumerate(self._points):
            if point.interval is None:
                continue
            x, cap = self._x(place), 1.8
            low, high = point.interval
            y1 = self._upper.start if low is None else self._upper.at(low)
            y2 = self._upper.end if high is None else self._upper.at(high)
            self._drawing.line(x, y1, x, y2, stroke="#aab1b5", width=HAIR)
            for end, y in ((low, y1), (high, y2)):
                if end is not None:
                    self._drawing.line(x - cap, y, x + cap, y, stroke="#aab1b5", width=HAIR)

    def _curve(self, axis: Axis, values: Sequence[tuple[int, Fraction]]) -> None:
        places = [(self._x(place), axis.at(value)) for place, value in values]
        if len(places) > 1:
            self._drawing.polyline(places, stroke="#aab1b5", width=HAIR)
        for x, y in places:
            self._drawing.ring(x, y, _DOT, stroke=DOT_INK)

    def _marks(self, marks: Mapping[int, int]) -> None:
        """Signals: a filled dot in a ring, with the number of the signal in the table."""
        for signal in self._chart.signals:
            place = signal.place - self._first
            if place < 0:
                continue
            x = self._x(place)
            if signal.panel == "individuals":
                y = self._upper.at(self._values[place])
            else:
                index = place if self._first else place - 1
                y = self._lower.at(self._ranges[index])
            self._drawing.dot(x, y, _SIGNAL_DOT, fill=INK)
            self._drawing.ring(x, y, _SIGNAL_RING, stroke=INK, width=0.8)
            if signal.place in marks:
                number = str(marks[signal.place])
                self._drawing.text(x, y - 6.5, number, size=6.6, anchor="middle", weight=600)

    def _names(self) -> None:
        """Names of lots below the lower panel, as many as stand clear of one another."""
        names = [point.lot for point in self._points]
        widest = max(text_width(name, _SIZE) for name in names) + 8
        step = (self._right - self._left) / len(names)
        every = max(1, -(-int(widest) // max(1, int(step))))
        y = self._lower.start
        self._drawing.line(self._left, y, self._right, y, stroke=SECOND_INK)
        for place in range(0, len(names), every):
            x = self._x(place)
            self._drawing.line(x, y, x, y + 3, stroke=SECOND_INK)
            room = min(text_width(names[place], _SIZE), widest) / 2
            x = min(max(x, room), FULL_WIDTH - room)
            self._drawing.text(x, y + 11, names[place], size=_SIZE, anchor="middle", fill=SECOND_INK)
        middle = (self._left + self._right) / 2
        self._drawing.text(middle, y + 23, "lot", size=_SIZE, anchor="middle")


def _in_words(chart: Chart, scale: Scale, first: int) -> str:
    """The figure for whoever cannot see it."""
    values = [point.value for point in chart.series.points[first:]]
    unit = f" {scale.heading}" if scale.heading else ""
    points, limits = chart.series.points, "no limits"
    if chart.limits is not None:
        low, high = (scale.value(chart.limits.line(sigmas)) for sigmas in (-3, 3))
        limits = f"limits {low} to {high}{unit}"
    what = f"Chart of the {quantity_words(chart)} of {chart.series.response}, {len(values)} lots from"
    parts = (
        f"{what} {points[first].lot} to {points[-1].lot}",
        f"values from {scale.value(min(values))} to {scale.value(max(values))}{unit}",
        limits,
        f"points with a signal: {len({one.place for one in chart.signals})}",
    )
    return "; ".join(parts) + "."
