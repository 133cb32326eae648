"""Axes: from data to places on paper, and where the ticks stand.

Ticks follow Heckbert's rule of nice numbers (P. S. Heckbert, Nice numbers for graph labels, in Graphics Gems,
Academic Press, 1990): steps of 1, 2 or 5 times a power of ten. They are found in exact arithmetic, so that a
tick is where its label says and the same on every machine.
"""

from dataclasses import dataclass
from fractions import Fraction

from assayfolio.exact import magnitude
from assayfolio.report.notation import fixed

_STEPS = (Fraction(1, 2), Fraction(1), Fraction(2), Fraction(5), Fraction(10))


@dataclass(frozen=True, slots=True)
class Axis:
    """A linear axis from `low` to `high` (data) on `start` to `end` (points), with ticks.

    `origin` was taken off every label, since the labels would otherwise be too long; it is zero as a rule.
    """

    low: Fraction
    high: Fraction
    start: float
    end: float
    ticks: tuple[Fraction, ...]
    labels: tuple[str, ...]
    origin: Fraction

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
) -> Axis:
    """The axis that holds all `values` with a little room, with about `wanted` ticks.

    Labels count units of ten to the power `power`. Where they would have more than eight characters because
    the values share their leading figures, these are taken off as `origin`.
    """
    low, high = min(values), max(values)
    if include_zero:
        low, high = min(low, Fraction(0)), max(high, Fraction(0))
    room = (high - low) / 25 or abs(low) / 10 or Fraction(1)
    low, high = low - room, high + room
    step, ticks = nice_ticks(low, high, wanted)
    origin = _origin(ticks, step, power)
    places = max(0, power - magnitude(step))
    labels = tuple(fixed(tick - origin, places, power) for tick in ticks)
    return Axis(low, high, start, end, ticks, labels, origin)


def _origin(ticks: tuple[Fraction, ...], step: Fraction, power: int) -> Fraction:
    places = max(0, power - magnitude(step))
    longest = max(len(fixed(tick, places, power)) for tick in ticks)
    if longest <= 8:
        return Fraction(0)
    block = Fraction(10) ** (magnitude(ticks[-1] - ticks[0]) + 1)
    return (ticks[0] // block) * block
