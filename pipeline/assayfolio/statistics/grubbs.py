"""Grubbs' statistics of one and of two outlying values in a sample, exact, and the tail of the former.

One value: G = |x - mean| / s. Two values at one end: the sum of squares about the mean without them, divided
by that of all values; small where both lie far out. Sources: Grubbs 1950 (Ann. Math. Stat. 21, 27), Grubbs
and Beck 1972 (Technometrics 14, 847), ISO 5725-2:1994 7.3.4; from memory.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from math import sqrt

from assayfolio.exact import Decimal10, Root, in_one_unit, to_double
from assayfolio.statistics.tails import t_isf, t_sf


@dataclass(frozen=True, slots=True)
class OutlyingValue:
    """The value at `index` of a sample and its G."""

    index: int
    g: Root


@dataclass(frozen=True, slots=True)
class OutlyingPair:
    """The values at `indexes` of a sample, and the ratio of sums of squares without and with them."""

    indexes: tuple[int, int]
    ratio: Fraction


def lowest_and_highest(values: Sequence[Decimal10]) -> tuple[OutlyingValue, OutlyingValue]:
    """The smallest and the largest of at least two values that are not all equal, each with its G.

    Among equals the first is named.
    """
    deviations = _deviations(values)
    n = len(deviations)
    squares = sum(one * one for one in deviations)

    def outlying(index: int) -> OutlyingValue:
        square = Fraction(deviations[index] ** 2 * (n - 1), squares)
        return OutlyingValue(index, Root.of(square))

    return outlying(deviations.index(min(deviations))), outlying(deviations.index(max(deviations)))


def lowest_and_highest_pair(values: Sequence[Decimal10]) -> tuple[OutlyingPair, OutlyingPair]:
    """The two smallest and the two largest of at least three values that are not all equal.

    Among equals the first are named.
    """
    deviations = _deviations(values)
    total = sum(one * one for one in deviations)

    def outlying(order: list[int]) -> OutlyingPair:
        rest = [deviations[index] for index in order[2:]]
        squares = sum(one * one for one in rest) - Fraction(sum(rest) ** 2, len(rest))
        first, second = sorted(order[:2])
        return OutlyingPair((first, second), squares / total)

    rising = sorted(range(len(deviations)), key=lambda index: (deviations[index], index))
    falling = sorted(range(len(deviations)), key=lambda index: (-deviations[index], index))
    return outlying(rising), outlying(falling)


def _deviations(values: Sequence[Decimal10]) -> list[int]:
    # In units of 1/n of the finest decimal place deviations from the mean are whole; neither statistic
    # depends on the unit.
    units, _, _ = in_one_unit(values)
    total = sum(units)
    return [len(units) * one - total for one in units]


def grubbs_tail(g: Root, n: int, ends: int) -> float:
    """A bound on the probability that G of n normal values reaches `g` at one given end, or at either.

    `ends` is 1 or 2. ends * n * P(T >= t), t^2 = n (n - 2) g^2 / ((n - 1)^2 - n g^2), T on n - 2 degrees of
    freedom; at most 1. Never too small (Bonferroni's inequality), and exact where only one value can be so
    far out, as at the usual limits. Zero where all other values are equal.
    """
    room = (n - 1) ** 2 - n * g.square
    if not room:
        return 0.0
    t = to_double(Root.of(n * (n - 2) * g.square / room))
    return min(1.0, ends * n * float(t_sf(t, n - 2)))


def grubbs_limit(alpha: float, n: int, ends: int) -> float:
    """The G that n normal values exceed at one given end, or at either, with probability `alpha` at most.

    (n - 1) / sqrt(n) * sqrt(t^2 / (n - 2 + t^2)), t the upper alpha / (ends * n) point on n - 2 degrees of
    freedom.
    """
    t = float(t_isf(alpha / (ends * n), n - 2))
    return (n - 1) / sqrt(n) * sqrt(t * t / (n - 2 + t * t))
