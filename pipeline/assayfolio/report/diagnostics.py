"""The figures that show whether the assumptions of the analysis fit: residuals and their normal plot."""

from collections.abc import Sequence
from dataclasses import replace
from fractions import Fraction
from math import exp, pi, sqrt

from assayfolio.exact import Root, to_double
from assayfolio.report.axes import Axis, Lettering, make_axis
from assayfolio.report.basis import Basis
from assayfolio.report.figures import MOST_DOTS, Picture, axis_title
from assayfolio.report.notation import Scale
from assayfolio.report.svg import DOT_INK, HAIRLINE, SECOND_INK, THIN_LINE, Drawing
from assayfolio.report.typeface import figures_width

WIDTH = 221.1  # 78 mm
HEIGHT = 142.0
_SIZE = 7.2
_DOT = 1.7
_CELL = 4.0
_LETTERING = Lettering(_SIZE, 0, WIDTH)
_MOST_POINTS_OF_NORMAL_PLOT = 400


def residual_plots(basis: Basis) -> tuple[Picture, Picture]:
    """Residuals in measuring order, or that of the file, and against the mean of their level."""
    means = {level.level: level.mean for level in basis.levels}
    places = basis.measuring_order or range(1, basis.total + 1)
    by = "the measuring order" if basis.measuring_order else "the order of the values in the file"
    order = [Fraction(place) for place in places]
    against = [means[row.level] for row in basis.observations.rows]
    in_order = _scatter(basis, order, None, by.removeprefix("the "))
    by_mean = _scatter(basis, against, basis.response.response, "mean of the level")
    largest = max(abs(residual) for residual in basis.residuals)
    size = basis.difference_scale.with_unit(basis.difference_scale.mean(largest))
    words = f"{basis.total} residuals, the largest {size} from zero, against "
    by_order, by_level = words + f"{by}.", words + "the mean of their level."
    return (
        Picture(basis.file("residuals-order.svg"), in_order.svg(by_order), by_order, 78),
        Picture(basis.file("residuals-mean.svg"), by_mean.svg(by_level), by_level, 78),
    )


def _frame(what: str, scale: Scale, vertical: list[Fraction]) -> tuple[Drawing, Axis, float]:
    """A drawing with the vertical axis of residuals in it, and the place where the plot begins at left."""
    drawing = Drawing(WIDTH, HEIGHT)
    axis = make_axis(vertical, HEIGHT - 34, 8, wanted=5, include_zero=True, power=scale.power)
    left = 14 + max(figures_width(label, _SIZE) for label in axis.labels) + 4
    for tick, label in zip(axis.ticks, axis.labels, strict=True):
        y = axis.at(tick)
        drawing.line(left, y, left - 3, y, stroke=SECOND_INK, width=THIN_LINE)
        drawing.figures(left - 5, y + 2.5, label, size=_SIZE, anchor="end", fill=SECOND_INK)
    drawing.line(left, axis.start, left, axis.end, stroke=SECOND_INK)
    title = axis_title(axis, what, scale)
    drawing.text(7, (8 + HEIGHT - 34) / 2, title, size=_SIZE, anchor="middle", upright=False)
    return drawing, axis, left


def _horizontal(drawing: Drawing, axis: Axis, title: str) -> None:
    y = HEIGHT - 28
    drawing.line(axis.start, y, axis.end, y, stroke=SECOND_INK)
    for tick, label in zip(axis.ticks, axis.labels, strict=True):
        x = axis.at(tick)
        drawing.line(x, y, x, y + 3, stroke=SECOND_INK, width=THIN_LINE)
        drawing.figures(x, y + 11, label, size=_SIZE, anchor="middle", fill=SECOND_INK)
    drawing.text((axis.start + axis.end) / 2, HEIGHT - 5, title, size=_SIZE, anchor="middle")


def _scatter(basis: Basis, across: list[Fraction], quantity: str | None, title: str) -> Drawing:
    residuals = list(basis.residuals)
    drawing, vertical, left = _frame("residual", basis.difference_scale, residuals)
    if quantity is None:
        axis = make_axis(across, left + 6, WIDTH - 8, wanted=5, lettering=_LETTERING)
        whole = tuple(tick for tick in axis.ticks if tick.denominator == 1 and tick >= 0)
        axis = replace(axis, ticks=whole, labels=tuple(map(str, whole)))
    else:
        axis = make_axis(across, left + 6, WIDTH - 8, wanted=4, power=basis.scale.power, lettering=_LETTERING)
        title = axis_title(axis, title, basis.scale)
    zero = vertical.at(0)
    drawing.line(left + 6, zero, WIDTH - 8, zero, stroke=HAIRLINE, width=THIN_LINE)
    places = [(axis.at(x), vertical.at(y)) for x, y in zip(across, residuals, strict=True)]
    if len(places) > MOST_DOTS:
        _cells(drawing, places)
    else:
        for x, y in places:
            drawing.ring(x, y, _DOT)
    _horizontal(drawing, axis, title)
    return drawing


def _cells(drawing: Drawing, places: list[tuple[float, float]]) -> None:
    """Shaded squares that together reach from the first value to the last: the darker, the more values."""
    columns, left, width = _classes([x for x, _ in places])
    rows, top, height = _classes([y for _, y in places])
    counts: dict[tuple[int, int], int] = {}
    for cell in zip(columns, rows, strict=True):
        counts[cell] = counts.get(cell, 0) + 1
    most = max(counts.values())
    for (column, row), count in sorted(counts.items()):
        grey = 225 - round(160 * sqrt(count / most))
        drawing.box(
            left + column * width,
            top + row * height,
            width - 0.2,
            height - 0.2,
            fill=f"#{grey:02x}{grey:02x}{grey:02x}",
        )


def _classes(places: list[float]) -> tuple[list[int], float, float]:
    """The class of each place among equal ones from the least place to the largest, their start and width.

    Classes on a fixed grid would cut off the first or the last values as a square of their own.
    """
    low, high = min(places), max(places)
    count = max(1, round((high - low) / _CELL))
    width = (high - low) / count or _CELL
    return [min(count - 1, int((place - low) / width)) for place in places], low, width


def blom_position(rank: int, total: int) -> Fraction:
    """The plotting position (i - 3/8) / (N + 1/4) of the value of that rank (G. Blom, 1958)."""
    return Fraction(8 * rank - 3, 8 * total + 2)


def envelope(position: Fraction, quantile: float, total: int, multiplier: float) -> float:
    """Half the width of the pointwise envelope at a plotting position, in standard deviations.

    `multiplier` times the large-sample standard error of an order statistic,
    sqrt(p (1 - p) / N) / density(quantile) (Chambers, Cleveland, Kleiner and Tukey, 1983).
    """
    share = float(position)
    density = exp(-quantile * quantile / 2) / sqrt(2 * pi)
    return multiplier * sqrt(share * (1 - share) / total) / density


def normal_plot(basis: Basis, accent: str) -> Picture | None:
    """The ordered residuals against normal quantiles, with a line and its envelope; None without scatter.

    With separate variances each residual is divided by the standard deviation of its level: residuals of
    unequal spread would bend the plot although every level is normal.
    """
    if not basis.response.anova.within.ss:
        return None
    ordered = sorted(basis.scaled_residuals if basis.is_separate else basis.residuals)
    total = len(ordered)
    positions = [blom_position(rank, total) for rank in range(1, total + 1)]
    quantiles = _quantiles(positions)
    multiplier = _quantiles([1 - basis.response.alpha / 2])[0]
    slope = to_double(Root.of(_sum_of_squares(basis) / total))
    half = [slope * envelope(p, z, total, multiplier) for p, z in zip(positions, quantiles, strict=True)]
    upper = [Fraction(slope * z + h) for z, h in zip(quantiles, half, strict=True)]
    lower = [Fraction(slope * z - h) for z, h in zip(quantiles, half, strict=True)]
    what, scale = ("residual", basis.difference_scale)
    if basis.is_separate:
        what, scale = "residual / SD of its level", Scale("", 0, 1, 2)
    drawing, vertical, left = _frame(what, scale, [*ordered, *upper, *lower])
    horizontal = [Fraction(z) for z in quantiles]
    axis = make_axis(horizontal, left + 6, WIDTH - 8, wanted=5, lettering=_LETTERING)
    across = [axis.at(z) for z in quantiles]
    edge = list(zip(across, map(vertical.at, upper), strict=True))
    edge += reversed(list(zip(across, map(vertical.at, lower), strict=True)))
    drawing.area(edge, fill="#eceff0")
    line = [(across[i], vertical.at(slope * quantiles[i])) for i in (0, -1)]
    drawing.polyline(line, stroke=accent, width=0.9)
    shown = _shown(total)
    for index in shown:
        drawing.ring(across[index], vertical.at(ordered[index]), _DOT, stroke=DOT_INK)
    _horizontal(drawing, axis, "quantile of the standard normal distribution")
    outside = sum(not low <= value <= high for value, low, high in zip(ordered, lower, upper, strict=True))
    words = f"Normal plot of {total} residuals; {outside} lie outside the pointwise envelope."
    return Picture(basis.file("residuals-normal.svg"), drawing.svg(words), words, 78)


def _sum_of_squares(basis: Basis) -> Fraction:
    """The sum of squares of what a normal plot shows; that of residuals over their own SD is N - k."""
    if not basis.is_separate:
        return basis.response.anova.within.ss
    return Fraction(sum(level.n - 1 for level in basis.levels if level.sd and level.sd.sign))


def _quantiles(positions: Sequence[Fraction]) -> list[float]:
    import numpy as np

    from assayfolio.statistics.tails import normal_isf

    beyond = np.array([float(1 - position) for position in positions])
    return [float(quantile) for quantile in normal_isf(beyond)]


def _shown(total: int) -> list[int]:
    """Which points of a normal plot are drawn: all, or where there are many, the ends and some between."""
    if total <= MOST_DOTS:
        return list(range(total))
    tail = _MOST_POINTS_OF_NORMAL_PLOT // 4
    inner = range(tail, total - tail, max(1, (total - 2 * tail) * 2 // _MOST_POINTS_OF_NORMAL_PLOT))
    return [*range(tail), *inner, *range(total - tail, total)]
