"""The small pictures beside the answers: estimates and intervals on one scale for all comparisons."""

from fractions import Fraction

from assayfolio.findings import ComparisonFamily
from assayfolio.report.axes import Axis, make_axis
from assayfolio.report.basis import Basis
from assayfolio.report.figures import Picture, draw_interval
from assayfolio.report.notation import MINUS
from assayfolio.report.svg import SECOND_INK, THIN_LINE, Drawing
from assayfolio.report.swarm import lanes, offsets
from assayfolio.report.typeface import text_width

WIDTH = 153.1  # 54 mm
WIDTH_MM = 54.0
_SIZE = 6.6
_MOST_LINES = 16


def comparison_axis(basis: Basis) -> Axis | None:
    """The scale that all comparison pictures share: every estimate and interval, and zero."""
    values: list[Fraction] = []
    for family in basis.response.comparisons:
        for row in family.rows:
            values.append(row.estimate)
            values += [Fraction(end) for end in row.ci or () if end is not None]
    if not values:
        return None
    return make_axis(values, 6, WIDTH - 6, wanted=4, include_zero=True, power=basis.difference_scale.power)


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


def family_picture(
    basis: Basis, family: ComparisonFamily, axis: Axis, accent: str, name: str, table: str
) -> Picture:
    """The estimates of a family with their intervals; as dots alone where there are very many.

    `table` is the label of the table that has its rows in the same order.
    """
    rows = family.rows
    many = len(rows) > _MOST_LINES
    pitch = max(3.4, min(7.2, 44.0 / len(rows)))
    body = 36.0 if many else pitch * len(rows) + 6
    scale = basis.difference_scale
    unit = f"difference, {scale.heading}" if scale.heading else "difference"
    words = _below(unit, _order(len(rows), "differences", table, drawn_alone=many))
    drawing = Drawing(WIDTH, body + 14 + 8 * len(words))
    zero = axis.at(0)
    drawing.line(zero, 0, zero, body, stroke=SECOND_INK, width=THIN_LINE)
    if many:
        places = [axis.at(row.estimate) for row in rows]
        _crowd(drawing, places, accent)
    for number, row in enumerate(() if many else rows):
        y = 3 + pitch * (number + 0.5)
        if row.ci is not None:
            draw_interval(drawing, axis, y, row.ci, stroke=accent, cap=pitch * 0.26)
        drawing.dot(axis.at(row.estimate), y, min(1.7, pitch * 0.34), fill=accent)
    _ticks(drawing, axis, body, words)
    title = f"{len(rows)} estimates of {family.name} on a scale with zero; figures stand in section 5."
    return Picture(name, drawing.svg(title), title, WIDTH_MM)


def means_picture(basis: Basis, accent: str, name: str, table: str) -> Picture:
    """The level means with their intervals, from top to bottom in the order of the plan and of `table`."""
    levels = basis.levels
    values = [level.mean for level in levels]
    values += [Fraction(end) for level in levels for end in level.ci or () if end is not None]
    axis = make_axis(values, 6, WIDTH - 6, wanted=4, power=basis.scale.power)
    many = len(levels) > _MOST_LINES
    pitch = max(3.4, min(7.2, 44.0 / len(levels)))
    body = 36.0 if many else pitch * len(levels) + 6
    unit = "level means" + (
        f" {MINUS} {basis.scale.mean(axis.origin).rstrip('0').rstrip('.')}" if axis.origin else ""
    )
    unit += f", {basis.scale.heading}" if basis.scale.heading else ""
    words = _below(unit, _order(len(levels), "means", table, drawn_alone=many))
    drawing = Drawing(WIDTH, body + 14 + 8 * len(words))
    if many:
        places = [axis.at(level.mean) for level in levels]
        _crowd(drawing, places, accent)
    for number, level in enumerate(() if many else levels):
        y = 3 + pitch * (number + 0.5)
        if level.ci is not None:
            draw_interval(drawing, axis, y, level.ci, stroke=accent, cap=pitch * 0.26)
        drawing.dot(axis.at(level.mean), y, min(1.7, pitch * 0.34), fill=accent)
    _ticks(drawing, axis, body, words)
    title = f"The means of the {len(levels)} levels with their intervals; figures stand in section 2."
    return Picture(name, drawing.svg(title), title, WIDTH_MM)
