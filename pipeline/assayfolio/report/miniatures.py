"""The small pictures beside the answers: estimates and intervals on one scale for all that can share it."""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction

from assayfolio.findings import ComparisonFamily, EquivalenceFamily
from assayfolio.report.axes import Axis, Lettering, make_axis
from assayfolio.report.basis import Basis
from assayfolio.report.equivalence import estimates_of, is_percent, margins_of, scale_of
from assayfolio.report.figures import Picture, axis_title, draw_interval
from assayfolio.report.interval_plots import Estimate, Limits, draw_margins, ends_of
from assayfolio.report.numbering import Part
from assayfolio.report.svg import SECOND_INK, THIN_LINE, Drawing
from assayfolio.report.swarm import lanes, offsets
from assayfolio.report.typeface import text_width

WIDTH = 153.1  # 54 mm
WIDTH_MM = 54.0
_SIZE = 6.6
_MOST_LINES = 16
_MOST_NAMED = 8
_WIDEST_NAME = 60.0
_NAME_SIZE = 6.2
_NAMED_PITCH = 8.4


@dataclass(frozen=True, slots=True)
class Sketch:
    """How a small picture is drawn: its colour, the name of its file, and the table with its rows."""

    accent: str
    name: str
    table: str


@dataclass(frozen=True, slots=True)
class SharedScale:
    """The axis that several pictures share, and whether there is room for the names of rows beside it."""

    axis: Axis
    named: bool


def comparison_scale(basis: Basis) -> SharedScale | None:
    """The scale that all comparison pictures share: every estimate and interval, and zero."""
    families = [_rows(basis, family) for family in basis.response.comparisons if family.kind != "trend"]
    values = [end for rows in families for end in ends_of(rows)]
    return _shared(families, values, basis.difference_scale.power) if families else None


def equivalence_scale(basis: Basis, *, percent: bool) -> SharedScale | None:
    """The scale that the equivalence pictures in units share, or those in percent: margins included."""
    families = [family for family in basis.response.equivalence if is_percent(family) == percent]
    drawn = [estimates_of(basis, family) for family in families]
    values = [end for rows in drawn for end in ends_of(rows)]
    values += [limit for family in families for limit in margins_of(family) if limit is not None]
    return _shared(drawn, values, scale_of(basis, families[0]).power) if families else None


def _shared(families: list[list[Estimate]], values: list[Fraction], power: int) -> SharedScale:
    column = min(map(_name_column, families))
    if column:
        column = max(map(_name_column, families))
    return SharedScale(_axis(values, power, column), bool(column))


def _name_column(rows: Sequence[Estimate]) -> float:
    """The width that the names of few rows take; zero where there is no room for them."""
    widest = max(text_width(row.label, _NAME_SIZE) for row in rows)
    return widest + 6 if len(rows) <= _MOST_NAMED and widest <= _WIDEST_NAME else 0.0


def _axis(values: list[Fraction], power: int, column: float) -> Axis:
    return make_axis(
        values,
        6 + column,
        WIDTH - 6,
        wanted=4,
        include_zero=True,
        power=power,
        lettering=Lettering(_SIZE, 0, WIDTH),
    )


def _rows(basis: Basis, family: ComparisonFamily) -> list[Estimate]:
    return [Estimate(basis.label(row), row.estimate, row.ci) for row in family.rows]


def _crowd(drawing: Drawing, places: list[float], accent: str) -> None:
    chosen = lanes(places, 2.6)
    above = offsets(chosen, 2.6, 30.0)
    middle = 18 + max(above) / 2
    for x, offset in zip(places, above, strict=True):
        drawing.dot(x, middle - offset, 1.1, fill=accent)


def _order(count: int, what: str, table: str, *, named: bool) -> str:
    """Where the names of the rows stand, if not here; a crowd of dots has neither names nor intervals."""
    if count > _MOST_LINES:
        return f"{count} {what} without intervals: see {table}"
    return f"in the order of {table}" if count > 1 and not named else ""


def _below(unit: str, order: str) -> list[str]:
    """The lines below an axis: its unit and where names stand, on one line where both fit."""
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


def family_picture(basis: Basis, family: ComparisonFamily, scale: SharedScale, sketch: Sketch) -> Picture:
    """The estimates of a family with their intervals; as dots alone where there are very many."""
    unit = axis_title(scale.axis, "difference", basis.difference_scale)
    title = (
        f"{len(family.rows)} estimates of {family.name} on a scale with zero; figures stand in section "
        f"{basis.place(Part.COMPARISONS).number}."
    )
    return _picture(_rows(basis, family), scale, sketch, unit, title)


def equivalence_picture(
    basis: Basis, family: EquivalenceFamily, scale: SharedScale, sketch: Sketch
) -> Picture:
    """The estimates of a family with their intervals against the band of its margin."""
    unit = axis_title(scale.axis, "difference", scale_of(basis, family))
    title = (
        f"{len(family.rows)} estimates of {family.name} with zero and the margin; figures stand in section "
        f"{basis.place(Part.EQUIVALENCE).number}."
    )
    return _picture(estimates_of(basis, family), scale, sketch, unit, title, margins_of(family))


def _picture(
    rows: Sequence[Estimate],
    scale: SharedScale,
    sketch: Sketch,
    unit: str,
    title: str,
    margins: Limits | None = None,
) -> Picture:
    axis, pitch, body = scale.axis, *_heights(rows, named=scale.named)
    words = _below(unit, _order(len(rows), "differences", sketch.table, named=scale.named))
    drawing = Drawing(WIDTH, body + 14 + 8 * len(words))
    if margins is not None:
        draw_margins(drawing, axis, margins, 0, body, sketch.accent)
    zero = axis.at(0)
    drawing.line(zero, 0, zero, body, stroke=SECOND_INK, width=THIN_LINE)
    _estimates(drawing, rows, scale, pitch, sketch.accent)
    _ticks(drawing, axis, body, words)
    return Picture(sketch.name, drawing.svg(title), title, WIDTH_MM)


def _heights(rows: Sequence[Estimate], *, named: bool) -> tuple[float, float]:
    """The height of a row, and of all of them."""
    pitch = _NAMED_PITCH if named else max(3.4, min(7.2, 44.0 / len(rows)))
    return pitch, 36.0 if len(rows) > _MOST_LINES else pitch * len(rows) + 6


def _estimates(
    drawing: Drawing, rows: Sequence[Estimate], scale: SharedScale, pitch: float, accent: str
) -> None:
    axis = scale.axis
    if len(rows) > _MOST_LINES:
        _crowd(drawing, [axis.at(row.value) for row in rows], accent)
        return
    for number, row in enumerate(rows):
        y = 3 + pitch * (number + 0.5)
        if scale.named:
            drawing.text(0, y + 2.2, row.label, size=_NAME_SIZE, fill=SECOND_INK)
        if row.interval is not None:
            draw_interval(drawing, axis, y, row.interval, stroke=accent, cap=min(1.9, pitch * 0.26))
        drawing.dot(axis.at(row.value), y, min(1.7, pitch * 0.34), fill=accent)


def means_picture(basis: Basis, sketch: Sketch) -> Picture:
    """The level means with their intervals, from top to bottom in the order of the plan and of the table."""
    rows = [Estimate(level.level, level.mean, level.ci) for level in basis.levels]
    column = _name_column(rows)
    axis = make_axis(
        ends_of(rows),
        6 + column,
        WIDTH - 6,
        wanted=4,
        power=basis.scale.power,
        lettering=Lettering(_SIZE, 0, WIDTH),
    )
    scale = SharedScale(axis, bool(column))
    pitch, body = _heights(rows, named=scale.named)
    unit = axis_title(axis, "level means", basis.scale)
    words = _below(unit, _order(len(rows), "means", sketch.table, named=scale.named))
    drawing = Drawing(WIDTH, body + 14 + 8 * len(words))
    _estimates(drawing, rows, scale, pitch, sketch.accent)
    _ticks(drawing, axis, body, words)
    title = (
        f"The means of the {len(rows)} levels with their intervals; figures stand in section "
        f"{basis.place(Part.DATA).number}."
    )
    return Picture(sketch.name, drawing.svg(title), title, WIDTH_MM)
