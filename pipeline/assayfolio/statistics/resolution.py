"""Whether the values are recorded finely enough for their own spread. It informs and never chooses."""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from math import gcd
from typing import Final

from assayfolio.exact import Decimal10, Root, in_one_unit
from assayfolio.statistics.oneway import OneWay

COARSE_FROM: Final = Fraction(1, 2)
"""A step of more than this share of the pooled standard deviation is called coarse."""

_DISTINCT_VALUES: Final = 8


@dataclass(frozen=True, slots=True)
class Resolution:
    """The step in which the values are recorded, held against the pooled standard deviation.

    `rounding_share` is the variance of rounding, step^2 / 12, divided by the pooled variance; None where
    nothing varies within the levels.
    """

    step: Fraction
    pooled_sd: Root
    rounding_share: Fraction | None
    coarse: bool


def recorded_step(groups: Sequence[tuple[str, Sequence[Decimal10]]]) -> Fraction:
    """The step in which all values are recorded: one unit of the finest decimal place that any of them has.

    Where at least 8 different values all differ by multiples of a larger step (readings to 0.05, say), that
    step: fewer values may do so by chance.
    """
    numbers, exponent, divisor = in_one_unit(value for _, values in groups for value in values)
    units = set(numbers)
    lowest = min(units)
    multiple = gcd(*(one - lowest for one in units)) if len(units) >= _DISTINCT_VALUES else 1
    return multiple * Fraction(10) ** exponent / divisor


def resolution(groups: Sequence[tuple[str, Sequence[Decimal10]]], analysis: OneWay) -> Resolution:
    """Whether the recorded step of all values is coarse, as `resolution_of` has it."""
    return resolution_of(recorded_step(groups), analysis)


def resolution_of(step: Fraction, analysis: OneWay) -> Resolution:
    """Whether the recorded `step` of the values is coarse: step > s / 2, compared exactly.

    Rounding to a step w (see `recorded_step`) adds w^2 / 12 to the variance (the uniform distribution); at
    w = s / 2 that is 2 % of s^2. The limit of s / 2 is common practice without a source. Where nothing varies
    within the levels the step is coarse.
    """
    variance = analysis.ms_within
    return Resolution(
        step=step,
        pooled_sd=Root.of(variance),
        rounding_share=step**2 / 12 / variance if variance else None,
        coarse=step**2 > COARSE_FROM**2 * variance,
    )
