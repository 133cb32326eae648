"""The figures on the data themselves, and what all figures share."""

from dataclasses import dataclass, replace
from fractions import Fraction

from assayfolio.findings import Interval, LevelFindings
from assayfolio.report.axes import Axis, Lettering, make_axis
from assayfolio.report.basis import Basis
from assayfolio.report.notation import MINUS, Scale, decimal, kept_together
from assayfolio.report.svg import INK, SECOND_INK, STRONG_LINE, THIN_LINE, Drawing
from assayfolio.report.swarm import lanes, offsets
from assayfolio.report.typeface import text_width, wrapped

FULL_WIDTH = 464.9  # 164 mm
SIZE = 7.4
LINE = 9.2
DOT = 1.9
DOT_ROOM = 2 * DOT + 0.6
MOST_DOTS = 2000
MOST_LEVELS = 32
MOST_HEIGHT = 600.0  # of the rows of one figure, so that axis and caption stay on its page

_FEW_LEVELS = 8
_MANY_LEVELS = 16
_MOST_ROOM = 52.0  # for the lanes of one level
_BESIDE_DOTS = 16.0  # a dot's own height, the lane of the interval, and air
_BINS = 90
_CAP = 2.6


@dataclass(frozen=True, slots=True)
class Picture:
    """A finished figure: the name of its file, the file, what it shows in words, its width in millimetres."""

    name: str
    svg: bytes
    title: str
    width_mm: float


def draw_axis(drawing: Drawing, axis: Axis, y: float, title: str, ends: tuple[float, float]) -> None:
    """A horizontal axis at `y`: its line spans `ends` and the ticks, which point outward; title below."""
    places = [*ends, axis.at(axis.ticks[0]), axis.at(axis.ticks[-1])]
    drawing.line(min(places), y, max(places), y, stroke=SECOND_INK, width=THIN_LINE)
    for tick, label in zip(axis.ticks, axis.labels, strict=True):
        x = axis.at(tick)
        drawing.line(x, y, x, y + 3, stroke=SECOND_INK, width=THIN_LINE)
        drawing.figures(x, y + 11, label, size=SIZE, anchor="middle", fill=SECOND_INK)
    drawing.text((axis.start + axis.end) / 2, y + 22, title, size=SIZE, anchor="middle")


def axis_title(axis: Axis, what: str, scale: Scale) -> str:
    """`what`, less the origin that was taken off the labels, and the unit that the labels count."""
    if axis.origin:
        what = f"{what} {MINUS} {decimal(axis.origin / Fraction(10) ** axis.power)}"
    heading = replace(scale, power=axis.power).heading
    return f"{what}, {heading}" if heading else what


def draw_interval(
    drawing: Drawing, axis: Axis, y: float, ends: Interval, *, stroke: str = INK, cap: float = _CAP
) -> None:
    """A thin line with flat ends; an open end runs to the end of the axis and has no flat end."""
    low = axis.start if ends[0] is None else axis.at(ends[0])
    high = axis.end if ends[1] is None else axis.at(ends[1])
    drawing.line(low, y, high, y, stroke=stroke, width=THIN_LINE)
    for end, x in zip(ends, (low, high), strict=True):
        if end is not None:
            drawing.line(x, y - cap, x, y + cap, stroke=stroke, width=THIN_LINE)


def dot_plots(basis: Basis, accent: str) -> tuple[Picture, ...]:
    """Every value as a dot, level by level, with means and intervals; many levels take several figures.

    Beyond MOST_DOTS values a figure shows how many values fall into each of 90 equal classes instead.
    """
    count = -(-len(basis.levels) // MOST_LEVELS)
    size = -(-len(basis.levels) // count)
    while size > 1 and any(part > MOST_HEIGHT for part in _heights(basis, size)):
        count += 1
        size = -(-len(basis.levels) // count)
    return tuple(
        _dot_plot(
            basis, basis.levels[start : start + size], accent, basis.file(f"values-{start // size + 1}.svg")
        )
        for start in range(0, len(basis.levels), size)
    )


def label_column(names: list[str], share: float) -> float:
    """The width of a column of names, at most `share` points."""
    return min(share, max(text_width(name, SIZE, "semibold") for name in names) + 2)


@dataclass(frozen=True, slots=True)
class _Row:
    """One level in a dot plot: its name in lines, where its dots go, and the height its lanes take.

    `counts` says how many values lie at each of the places where these are classes.
    """

    level: LevelFindings
    words: list[str]
    places: list[float]
    lanes: list[int]
    room: float
    height: float
    counts: list[int]


def _heights(basis: Basis, size: int) -> list[float]:
    """How tall the figures become with `size` levels in each."""
    parts = [basis.levels[start : start + size] for start in range(0, len(basis.levels), size)]
    return [sum(row.height for row in _layout(basis, levels)[1]) for levels in parts]


def _layout(basis: Basis, levels: tuple[LevelFindings, ...]) -> tuple[Axis, list[_Row], float]:
    """The axis of a dot plot, its rows, and the width of the column of names."""
    column = label_column([level.level for level in levels], 128)
    start = column + 16
    if len(levels) > _MANY_LEVELS:
        start += 6 + text_width(f"n = {max(level.n for level in levels)}", 6.8)
    ends: list[Fraction] = [end for level in basis.levels for end in (level.minimum, level.maximum)]
    ends += [Fraction(end) for level in basis.levels if level.ci for end in level.ci if end is not None]
    lettering = Lettering(SIZE, 0, FULL_WIDTH)
    axis = make_axis(ends, start, FULL_WIDTH - 8, power=basis.scale.power, lettering=lettering)
    return axis, [_row(basis, level, axis, column, len(levels)) for level in levels], column


def _dot_plot(basis: Basis, levels: tuple[LevelFindings, ...], accent: str, name: str) -> Picture:
    beside = len(levels) > _MANY_LEVELS
    axis, rows, column = _layout(basis, levels)
    drawing = Drawing(FULL_WIDTH, sum(row.height for row in rows) + 32)
    y = 4.0
    for row in rows:
        _name_level(drawing, row.level, row.words, y + row.height / 2, column, beside=beside)
        _draw_row(drawing, basis, row, axis, y, accent)
        y += row.height
    title = axis_title(axis, basis.response.response, basis.scale)
    draw_axis(drawing, axis, y + 2, title, _span(basis, axis))
    words = _values_in_words(basis, levels)
    return Picture(name, drawing.svg(words), words, 164)


def _span(basis: Basis, axis: Axis) -> tuple[float, float]:
    """Where the values and intervals of all levels begin and end on the axis."""
    ends: list[Fraction | float] = [end for level in basis.levels for end in (level.minimum, level.maximum)]
    ends += [end for level in basis.levels if level.ci for end in level.ci if end is not None]
    return axis.at(min(ends)), axis.at(max(ends))


def _row(basis: Basis, level: LevelFindings, axis: Axis, column: float, count: int) -> _Row:
    words = wrapped(kept_together(level.level), SIZE, column, "semibold")
    values = basis.weighted_values(level.level)
    places = [axis.at(value) for value, _ in values]
    name_lines = len(words) + (0 if count > _MANY_LEVELS else 1)
    least = 30.0 if count <= _FEW_LEVELS else 22.0 if count <= _MANY_LEVELS else 17.0
    if basis.total > MOST_DOTS:
        chosen, room = [], least * 0.6
    else:
        chosen = lanes(places, DOT_ROOM)
        room = min(_MOST_ROOM, DOT_ROOM * (max(chosen) - min(chosen)))
    height = max(least, LINE * name_lines + 4, room + _BESIDE_DOTS)
    return _Row(level, words, places, chosen, room, height, [count for _, count in values])


def _name_level(
    drawing: Drawing, level: LevelFindings, words: list[str], middle: float, column: float, *, beside: bool
) -> None:
    total = len(words) if beside else len(words) + 1
    y = middle - LINE * total / 2 + 7
    for word in words:
        drawing.text(0, y, word, size=SIZE, weight=600)
        y += LINE
    if beside:
        drawing.count(column + 6, middle - LINE / 2 + 7, level.n)
    else:
        drawing.count(0, y, level.n)


def _draw_row(drawing: Drawing, basis: Basis, row: _Row, axis: Axis, top: float, accent: str) -> None:
    """Dots above, the interval in its own lane below, the bar of the mean through both."""
    body = row.room + _BESIDE_DOTS
    top += (row.height - body) / 2
    dots, interval = top + 4.2 + row.room, top + body - 3.6
    mean = axis.at(row.level.mean)
    drawing.line(mean, min(top, interval - 13), mean, interval + _CAP, stroke=accent, width=STRONG_LINE)
    if row.level.ci is not None:
        draw_interval(drawing, axis, interval, row.level.ci, stroke=accent)
    if basis.total > MOST_DOTS:
        _classes(drawing, row, axis, dots - row.room / 2, row.room / 2)
        return
    for x, offset in zip(row.places, offsets(row.lanes, DOT_ROOM, row.room), strict=True):
        drawing.ring(x, dots - offset, DOT)


def _classes(drawing: Drawing, row: _Row, axis: Axis, middle: float, room: float) -> None:
    width = (axis.end - axis.start) / _BINS
    counts = [0] * _BINS
    for x, values in zip(row.places, row.counts, strict=True):
        counts[min(_BINS - 1, int((x - axis.start) / width))] += values
    for number, count in enumerate(counts):
        if count:
            half = max(0.3, room * count / max(counts))
            drawing.box(axis.start + number * width, middle - half, width - 0.3, 2 * half, fill="#aab1b5")


def _values_in_words(basis: Basis, levels: tuple[LevelFindings, ...]) -> str:
    scale = basis.scale
    parts = [
        f"{level.level}: {level.n} value{'s' if level.n > 1 else ''} from {scale.value(level.minimum)} to "
        f"{scale.value(level.maximum)}, mean {scale.mean(level.mean)}"
        for level in levels
    ]
    unit = f" in {scale.heading}" if scale.heading else ""
    return f"{basis.response.response}{unit} by {basis.factor}. " + "; ".join(parts) + "."
