"""Figures of values that are too many to be drawn one by one: how many of them lie where."""

from math import exp, pi, sqrt

from assayfolio.exact import Root, to_double
from assayfolio.observations.totals import Totals
from assayfolio.report.axes import make_axis
from assayfolio.report.basis import Basis
from assayfolio.report.figures import FULL_WIDTH, Picture, axis_title, draw_axis
from assayfolio.report.svg import SECOND_INK, THIN_LINE, Drawing

_CLASSES = 80
_HEIGHT = 150.0
_LEFT, _RIGHT = 8.0, FULL_WIDTH - 8
_TOP, _BASE = 8.0, 112.0
_CURVE_POINTS = 161


def residual_histogram(basis: Basis, totals: Totals, accent: str) -> Picture:
    """How many residuals lie in each of 80 equal classes, with the normal curve of their own spread.

    A value counts at the middle of the fine class that it was counted in while it was read.
    """
    means = {level.level: level.mean for level in basis.levels}
    residuals = [
        (float(value - mean), count)
        for level, mean in means.items()
        for value, count in totals.density.middles(level)
    ]
    ends = [end - means[level.level] for level in totals.levels for end in (level.lowest, level.highest)]
    scale = basis.difference_scale
    axis = make_axis(ends, _LEFT, _RIGHT, include_zero=True, power=scale.power)
    low, high = float(min(ends)), float(max(ends))
    width = (high - low) / _CLASSES
    counts = [0] * _CLASSES
    for residual, count in residuals:
        counts[min(_CLASSES - 1, max(0, int((residual - low) / width)))] += count
    sd = to_double(Root.of(basis.response.anova.within.ss / basis.total))
    curve = [_expected(low + (high - low) * at / (_CURVE_POINTS - 1), sd) for at in range(_CURVE_POINTS)]
    expected = [basis.total * width * share for share in curve]
    most = max(*counts, *expected)
    drawing = Drawing(FULL_WIDTH, _HEIGHT)
    for number, count in enumerate(counts):
        if count:
            left, right = axis.at(low + number * width), axis.at(low + (number + 1) * width)
            height = max(0.3, (_BASE - _TOP) * count / most)
            drawing.box(left, _BASE - height, right - left - 0.3, height, fill="#aab1b5")
    places = [axis.at(low + (high - low) * at / (_CURVE_POINTS - 1)) for at in range(_CURVE_POINTS)]
    drawing.polyline(
        [(x, _BASE - (_BASE - _TOP) * y / most) for x, y in zip(places, expected, strict=True)],
        stroke=accent,
        width=0.9,
    )
    drawing.line(axis.at(0), _TOP, axis.at(0), _BASE, stroke=SECOND_INK, width=THIN_LINE)
    draw_axis(drawing, axis, _BASE + 4, axis_title(axis, "residual", scale), (axis.at(low), axis.at(high)))
    words = f"{basis.total} residuals in {_CLASSES} classes, and the normal curve of their own spread."
    return Picture(basis.file("residuals-classes.svg"), drawing.svg(words), words, 164)


def _expected(residual: float, sd: float) -> float:
    """The density of the normal distribution around zero."""
    return exp(-((residual / sd) ** 2) / 2) / (sqrt(2 * pi) * sd)
