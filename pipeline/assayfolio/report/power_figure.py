"""The figure of a plan's power: how it rises with the number of values at each level, a panel a test."""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction

from assayfolio.findings import PowerFindings
from assayfolio.report.axes import Axis, make_axis, nice_ticks
from assayfolio.report.figures import FULL_WIDTH, LINE, SIZE, Picture
from assayfolio.report.notation import decimal, fixed
from assayfolio.report.svg import HAIR, HAIRLINE, SECOND_INK, STRONG_LINE, Drawing
from assayfolio.report.typeface import wrapped
from assayfolio.report.wording import with_unit

_COLUMNS = 3
_GAP = 22.0
_PANEL = (FULL_WIDTH - (_COLUMNS - 1) * _GAP) / _COLUMNS
_LEFT = 20.0
_HEIGHT = 66.0
_BELOW = 32.0


@dataclass(frozen=True, slots=True)
class PowerPanel:
    """One planned test: what it is, of what its power is the chance, and the power at numbers of values."""

    question: str
    meaning: str
    n: tuple[int, ...]
    power: tuple[float, ...]

    @property
    def heading(self) -> list[str]:
        """The name of the test, in lines."""
        return wrapped(self.question, SIZE, _PANEL - 4, "semibold")

    @property
    def words(self) -> list[str]:
        """What the power is the chance of, in lines."""
        return wrapped(self.meaning, SIZE, _PANEL - 4)

    def at(self, n: int) -> float:
        """The power at `n` values, between the numbers that were computed."""
        for place in range(1, len(self.n)):
            if self.n[place] >= n:
                part = (n - self.n[place - 1]) / (self.n[place] - self.n[place - 1])
                return self.power[place - 1] + part * (self.power[place] - self.power[place - 1])
        return self.power[-1]


def power_figure(power: PowerFindings, panels: Sequence[PowerPanel], name: str, accent: str) -> Picture:
    """The power of each planned test against the number of values at each level.

    All panels share the scale of power; the dashed level is the target, the dot what is planned.
    """
    rows = [panels[start : start + _COLUMNS] for start in range(0, len(panels), _COLUMNS)]
    heads = [LINE * max(len(panel.heading) + len(panel.words) for panel in row) + 6 for row in rows]
    drawing = Drawing(FULL_WIDTH, sum(heads) + len(rows) * (_HEIGHT + _BELOW) + LINE)
    top = 0.0
    for row, head in zip(rows, heads, strict=True):
        for column, panel in enumerate(row):
            left = column * (_PANEL + _GAP)
            _head(drawing, panel, left, top)
            _panel(drawing, panel, power, left, top + head, accent)
        top += head + _HEIGHT + _BELOW
    planned = min(power.replicates)
    legend = f"Dashed: the target, {decimal(power.target)}. Dot: as planned, {planned} values at each level."
    if len(set(power.replicates)) > 1:
        legend = legend.replace("at each level", "at the level with fewest")
    drawing.text(0, top + 4, legend, size=SIZE, fill=SECOND_INK)
    listed = "; ".join(f"{one.question}, {one.meaning}: {one.at(planned):.2f}" for one in panels)
    title = (
        "Power against the number of values at each level, for a difference of "
        f"{with_unit(decimal(power.difference), power.unit)} and a standard deviation of "
        f"{with_unit(decimal(power.sigma), power.unit)}. At {planned} values: {listed}."
    )
    return Picture(name, drawing.svg(title), title, 164)


def _head(drawing: Drawing, panel: PowerPanel, left: float, top: float) -> None:
    y = top + 7
    for line in panel.heading:
        drawing.text(left, y, line, size=SIZE, weight=600)
        y += LINE
    for line in panel.words:
        drawing.text(left, y, line, size=SIZE)
        y += LINE


def _panel(
    drawing: Drawing, panel: PowerPanel, power: PowerFindings, left: float, top: float, accent: str
) -> None:
    start, end, bottom = left + _LEFT, left + _PANEL, top + _HEIGHT
    across = make_axis([Fraction(0), Fraction(panel.n[-1])], start, end, wanted=5)
    _, shares = nice_ticks(Fraction(0), Fraction(1), 5)
    up = Axis(Fraction(0), Fraction(1), bottom, top, shares, tuple(fixed(x, 1) for x in shares), Fraction(0))
    for tick, label in zip(up.ticks, up.labels, strict=True):
        drawing.line(start, up.at(tick), end, up.at(tick), stroke=HAIRLINE, width=HAIR)
        drawing.figures(start - 4, up.at(tick) + 2.6, label, size=SIZE, fill=SECOND_INK)
    drawing.line(start, bottom, end, bottom, stroke=SECOND_INK)
    for tick, label in zip(across.ticks, across.labels, strict=True):
        x = across.at(tick)
        drawing.line(x, bottom, x, bottom + 3, stroke=SECOND_INK)
        drawing.figures(x, bottom + 11, label, size=SIZE, anchor="middle", fill=SECOND_INK)
    drawing.text((start + end) / 2, bottom + 20, "values at each level", size=SIZE, anchor="middle")
    target = up.at(power.target)
    for dash in range(int(end - start) // 6):
        drawing.line(start + 6 * dash, target, start + 6 * dash + 3.5, target, stroke=SECOND_INK)
    points = [(across.at(Fraction(n)), up.at(share)) for n, share in zip(panel.n, panel.power, strict=True)]
    drawing.polyline(points, stroke=accent, width=STRONG_LINE)
    planned = min(power.replicates)
    drawing.dot(across.at(Fraction(planned)), up.at(panel.at(planned)), 2.3, fill=accent)
