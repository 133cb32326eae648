"""The small pictures beside the answers: estimates and intervals on one scale for all that can share it."""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction

from assayfolio.findings import ComparisonFamily, EquivalenceFamily
from assayfolio.report.axes import Axis, make_axis
from assayfolio.report.basis import Basis
from assayfolio.report.equivalence import estimates_of, is_percent, margins_of, scale_of
from assayfolio.report.figures import Picture, draw_interval
from assayfolio.report.interval_plots import Estimate, Limits, draw_margins, ends_of
from assayfolio.report.notation import MINUS
from assayfolio.report.numbering import Part
from assayfolio.report.svg import SECOND_INK, THIN_LINE, Drawing
from assayfolio.report.swarm import lanes, offsets
from assayfolio.report.typeface import text_width

WIDTH = 153.1  # 54 mm
WIDTH_MM = 54.0
_SIZE = 6.6
_MOST_LINES = 16


@dataclass(frozen=True, slots=True)
class Sketch:
    """How a small picture is drawn: its colour, the name of its file, and the table with its rows."""

    accent: str
    name: str
    table: str


def comparison_axis(basis: Basis) -> Axis | None:
    """The scale that all comparison pictures share: every estimate and interval, and zero."""
    rows = [
        row for family in basis.response.comparisons if family.kind != "trend" for row in _rows(basis, family)
    ]
    return _axis(ends_of(rows), basis.difference_scale.power) if rows else None


def equivalence_axis(basis: Basis, *, percent: bool) -> Axis | None:
    """The scale that the equivalence pictures in units share, or those in percent: margins included."""
    families = [family for family in basis.response.equivalence if is_percent(family) == percent]
    values: list[Fraction] = []
    for family in families:
        values += ends_of(estimates_of(basis, family))
        values += [limit for limit in margins_of(family) if limit is not None]
    return _axis(values, scale_of(basis, families[0]).power) if families else None


def _axis(values: list[Fraction], power: int) -> Axis:
    return make_axis(values, 6, WIDTH - 6, wanted=4, include_zero=True, power=power)


def _rows(basis: Basis, family: ComparisonFamily) -> list[Estimate]:
    return [Estimate(basis.label(row), row.estimate, row.ci) for row in family.rows]


def _crowd(drawing: Drawing, places: list[float], accent: str) -> None:
    chosen = lanes(places, 2.6)
    above = offsets(chosen, 2.6, 30.0)
    middle = 18 + max(above) / 2
    for x, offset in zip(places, above, strict=True):
        drawing.dot(x, middle - offset, 1.1, fill=accent)


def _order(count: int, what: str, table: str, *, drawn_alone: bool) -> str:
    """Where the names of the rows stand; a crowd of dots has neither names nor intervals."""
    if drawn_alone:
        return f"{count} {what} without intervals: see {table}"
    return f"in the order of {table}" if count > 1 else ""


def _below(unit: str, order: str) -> list[str]:
    """The lines below an axis: its unit and where the names stand, on one line where both fit."""
    together = f"{unit}; {order}" if order else unit
    return [together] if text_width(together, _SIZE) <= WIDTH else [unit, order]


def _ticks(drawing: Drawing, axis: Axis, y: float, words: list[str]) -> None:
    drawing.line(axis.start, y, axis.end, y, stroke=SECOND_INK, width=0.5)
    for tick, label in zip(axis.ticks, axis.labels, strict=True):
        x = axis.at(tick)
        drawing.line(x, y, x, y + 2, stroke=SECOND_INK, width=0.5)
        drawing.figures(x, y + 9, label, size=_SIZE, anchor="middle", fill=SECOND_INK)
    for number, line in enumerate(words):
        drawing.text(WIDTH / 2, y + 18 + 8 * number, line, size=_SIZE, anchor="middle", fill=SECOND_INK)


def family_picture(basis: Basis, family: ComparisonFamily, axis: Axis, sketch: Sketch) -> Picture:
    """The estimates of a family with their intervals; as dots alone where there are very many."""
    scale = basis.difference_scale
    unit = f"difference, {scale.heading}" if scale.heading else "difference"
    title = (
        f"{len(family.rows)} estimates of {family.name} on a scale with zero; figures stand in section "
        f"{basis.place(Part.COMPARISONS).number}."
    )
    return _picture(_rows(basis, family), axis, sketch, unit, title)


def equivalence_picture(basis: Basis, family: EquivalenceFamily, axis: Axis, sketch: Sketch) -> Picture:
    """The estimates of a family with their intervals against the band of its margin."""
    unit = f"difference, {scale_of(basis, family).heading or 'without unit'}"
    title = (
        f"{len(family.rows)} estimates of {family.name} with zero and the margin; figures stand in section "
        f"{basis.place(Part.EQUIVALENCE).number}."
    )
    return _picture(estimates_of(basis, family), axis, sketch, unit, title, margins_of(family))


def _picture(
    rows: Sequence[Estimate], axis: Axis, sketch: Sketch, unit: str, title: str, margins: Limits | None = None
) -> Picture:
    many = len(rows) > _MOST_LINES
    pitch = max(3.4, min(7.2, 44.0 / len(rows)))
    body = 36.0 if many else pitch * len(rows) + 6
    words = _below(unit, _order(len(rows), "differences", sketch.table, drawn_alone=many))
    drawing = Drawing(WIDTH, body + 14 + 8 * len(words))
    if margins is not None:
        draw_margins(drawing, axis, margins, 0, body, sketch.accent)
    zero = axis.at(0)
    drawing.line(zero, 0, zero, body, stroke=SECOND_INK, width=THIN_LINE)
    if many:
        _crowd(drawing, [axis.at(row.value) for row in rows], sketch.accent)
    else:
        _lines(drawing, rows, axis, pitch, sketch.accent)
    _ticks(drawing, axis, body, words)
    return Picture(sketch.name, drawing.svg(title), title, WIDTH_MM)


def _lines(drawing: Drawing, rows: Sequence[Estimate], axis: Axis, pitch: float, accent: str) -> None:
    for number, row in enumerate(rows):
        y = 3 + pitch * (number + 0.5)
        if row.interval is not None:
            draw_interval(drawing, axis, y, row.interval, stroke=accent, cap=pitch * 0.26)
        drawing.dot(axis.at(row.value), y, min(1.7, pitch * 0.34), fill=accent)


def means_picture(basis: Basis, sketch: Sketch) -> Picture:
    """The level means with their intervals, from top to bottom in the order of the plan and of the table."""
    levels = basis.levels
    rows = [Estimate(level.level, level.mean, level.ci) for level in levels]
    axis = make_axis(ends_of(rows), 6, WIDTH - 6, wanted=4, power=basis.scale.power)
    many = len(levels) > _MOST_LINES
    pitch = max(3.4, min(7.2, 44.0 / len(levels)))
    body = 36.0 if many else pitch * len(levels) + 6
    unit = "level means" + (
        f" {MINUS} {basis.scale.mean(axis.origin).rstrip('0').rstrip('.')}" if axis.origin else ""
    )
    unit += f", {basis.scale.heading}" if basis.scale.heading else ""
    words = _below(unit, _order(len(levels), "means", sketch.table, drawn_alone=many))
    drawing = Drawing(WIDTH, body + 14 + 8 * len(words))
    if many:
        _crowd(drawing, [axis.at(level.mean) for level in levels], sketch.accent)
    else:
        _lines(drawing, rows, axis, pitch, sketch.accent)
    _ticks(drawing, axis, body, words)
    title = (
        f"The means of the {len(levels)} levels with their intervals; figures stand in section "
        f"{basis.place(Part.DATA).number}."
    )
    return Picture(sketch.name, drawing.svg(title), title, WIDTH_MM)
