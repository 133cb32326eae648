"""Axes: from data to places on paper, and where the ticks stand.

Ticks follow Heckbert's rule of nice numbers (P. S. Heckbert, Nice numbers for graph labels, in Graphics Gems,
Academic Press, 1990): steps of 1, 2 or 5 times a power of ten. They are found in exact arithmetic, so that a
tick is where its label says and the same on every machine. Labels are measured, and there are no more of them
than stand clear of one another.
"""

from dataclasses import dataclass, replace
from fractions import Fraction
from itertools import pairwise

from assayfolio.exact import magnitude
from assayfolio.report.notation import fixed
from assayfolio.report.typeface import figures_width

_STEPS = (Fraction(1, 2), Fraction(1), Fraction(2), Fraction(5), Fraction(10))
_LONGEST = 8  # characters of a label
_CLEAR = 0.8  # of the size of the type, between two labels


@dataclass(frozen=True, slots=True)
class Lettering:
    """How labels stand below an axis: their size, and the places that none reaches beyond, in points."""

    size: float
    left: float
    right: float


@dataclass(frozen=True, slots=True)
class Axis:
    """A linear axis from `low` to `high` (data) on `start` to `end` (points), with ticks.

    Labels count units of ten to the power `power`. `origin` was taken off every label, since the labels would
    otherwise be too long; it is zero as a rule.
    """

    low: Fraction
    high: Fraction
    start: float
    end: float
    ticks: tuple[Fraction, ...]
    labels: tuple[str, ...]
    origin: Fraction = Fraction(0)
    power: int = 0

    def at(self, value: Fraction | float) -> float:
        """The place of `value` on paper."""
        along = float(Fraction(value) - self.low) / float(self.high - self.low)
        return self.start + along * (self.end - self.start)


def nice_ticks(low: Fraction, high: Fraction, wanted: int) -> tuple[Fraction, tuple[Fraction, ...]]:
    """The step and the ticks from `low` to `high` whose number is nearest to `wanted`; of two, the fewer."""
    base = Fraction(10) ** magnitude((high - low) / wanted)
    best: tuple[int, Fraction, tuple[Fraction, ...]] | None = None
    for step in (base * factor for factor in _STEPS):
        first = -(-low // step)
        ticks = tuple(step * (first + number) for number in range(int((high - step * first) // step) + 1))
        distance = abs(len(ticks) - wanted)
        if len(ticks) > 1 and (best is None or distance <= best[0]):
            best = (distance, step, ticks)
    if best is None:
        raise ValueError("an axis needs two ends")
    return best[1], best[2]


def make_axis(
    values: list[Fraction],
    start: float,
    end: float,
    *,
    wanted: int = 6,
    include_zero: bool = False,
    power: int = 0,
    lettering: Lettering | None = None,
) -> Axis:
    """The axis that holds all `values` with a little room, with about `wanted` ticks.

    Labels count units of ten to the power `power`. Where they would have more than eight characters, the
    leading figures that the values share are taken off as `origin`, or a higher power of ten is counted.
    With `lettering` the axis has as many ticks as have labels that stand clear of one another, two at least,
    and is made shorter where a label would else reach beyond its place.
    """
    low, high = min(values), max(values)
    if include_zero:
        low, high = min(low, Fraction(0)), max(high, Fraction(0))
    room = (high - low) / 25 or abs(low) / 10 or Fraction(1)
    low, high = low - room, high + room
    for count in range(wanted, 1, -1):
        axis = _labelled(low, high, start, end, nice_ticks(low, high, count), power)
        if lettering is None:
            break
        axis = _drawn_in(axis, lettering)
        if _stand_clear(axis, lettering.size):
            break
    return axis


def _labelled(
    low: Fraction,
    high: Fraction,
    start: float,
    end: float,
    found: tuple[Fraction, tuple[Fraction, ...]],
    power: int,
) -> Axis:
    step, ticks = found
    block = Fraction(10) ** (magnitude(ticks[-1] - ticks[0]) + 1)
    largest = magnitude(max(abs(ticks[0]), abs(ticks[-1])))
    ways = [(Fraction(0), power), ((ticks[0] // block) * block, power), (Fraction(0), max(power, largest))]
    written = [_labels(ticks, step, origin, counted) for origin, counted in ways]
    lengths = [max(map(len, labels)) for labels in written]
    way = 0 if lengths[0] <= _LONGEST else lengths.index(min(lengths))
    return Axis(low, high, start, end, ticks, written[way], *ways[way])


def _labels(ticks: tuple[Fraction, ...], step: Fraction, origin: Fraction, power: int) -> tuple[str, ...]:
    places = max(0, power - magnitude(step))
    return tuple(fixed(tick - origin, places, power) for tick in ticks)


def _drawn_in(axis: Axis, lettering: Lettering) -> Axis:
    """The axis made shorter at either end by what the label there would reach beyond its place."""
    first, last = axis.ticks[0], axis.ticks[-1]
    left, right = (figures_width(label, lettering.size) / 2 for label in (axis.labels[0], axis.labels[-1]))
    low, high = max(axis.at(first), lettering.left + left), min(axis.at(last), lettering.right - right)
    scale = (high - low) / float(last - first)
    start = low - float(first - axis.low) * scale
    return replace(axis, start=start, end=start + float(axis.high - axis.low) * scale)


def _stand_clear(axis: Axis, size: float) -> bool:
    spans = [
        (axis.at(tick) - figures_width(label, size) / 2, axis.at(tick) + figures_width(label, size) / 2)
        for tick, label in zip(axis.ticks, axis.labels, strict=True)
    ]
    return all(left >= right + _CLEAR * size for (_, right), (left, _) in pairwise(spans))
