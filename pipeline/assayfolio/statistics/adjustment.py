"""Adjustment of p-values and of interval levels for the size of a family.

A tail is a pair: the probability itself, and its base-10 logarithm, which stays finite where the probability
is too small for a double. What each method assumes about the tests of a family is said with it. Sources:
Bonferroni's inequality; Sidak 1967 (J. Am. Stat. Assoc. 62, 626); Holm 1979 (Scand. J. Stat. 6, 65);
Hochberg 1988 (Biometrika 75, 800). Formulas from memory.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from math import expm1, log1p, log10

from assayfolio.exact import round_significant

_SMALLEST_P = 1e-290  # below it a double soon loses digits, and the logarithm stands alone


@dataclass(frozen=True, slots=True)
class Tail:
    """A tail probability `p` and its base-10 logarithm."""

    p: float
    log10_p: float


def stated(tail: Tail) -> Tail:
    """`tail` as findings state it: p rounded to 12 significant digits, and the logarithm of that p.

    Near p = 1 the logarithm says no more than the stated digits of p do; taken from them, the two always
    agree. Where p is too small for a double the logarithm is the tail's own.
    """
    p = round_significant(tail.p)
    log10_p = log10(p) if tail.p >= _SMALLEST_P else tail.log10_p
    return Tail(p, round_significant(log10_p))


def unadjusted(tails: Sequence[Tail]) -> tuple[Tail, ...]:
    """The tails as they are: each comparison keeps its own error rate."""
    return tuple(tails)


def bonferroni(tails: Sequence[Tail]) -> tuple[Tail, ...]:
    """Each tail times the size of the family, at most 1; holds under any dependence of the tests."""
    return tuple(_times(tail, len(tails)) for tail in tails)


def sidak(tails: Sequence[Tail]) -> tuple[Tail, ...]:
    """1 - (1 - p)^m for a family of m; exact for independent comparisons, conservative for pairs of means."""
    return tuple(_sidak(tail, len(tails)) for tail in tails)


def holm(tails: Sequence[Tail]) -> tuple[Tail, ...]:
    """Holm's step-down: the i-th smallest of m tails times m - i + 1, never below the one before it.

    Holds under any dependence of the tests, and is never above Bonferroni's.
    """
    adjusted: list[Tail] = list(tails)
    floor = Tail(0.0, float("-inf"))
    for rank, index in enumerate(_rising(tails)):
        stepped = _times(tails[index], len(tails) - rank)
        floor = Tail(max(floor.p, stepped.p), max(floor.log10_p, stepped.log10_p))
        adjusted[index] = floor
    return tuple(adjusted)


def hochberg(tails: Sequence[Tail]) -> tuple[Tail, ...]:
    """Hochberg's step-up: the i-th smallest of m tails times m - i + 1, never above the one after it.

    Assumes that the tests are independent or positively dependent, as Simes' inequality asks. Tests of
    several levels against one reference are positively correlated; for all pairs of means, some of which are
    negatively correlated, the inequality is not proved. Never above Holm's, which assumes nothing.
    """
    adjusted: list[Tail] = list(tails)
    ceiling = Tail(1.0, 0.0)
    for rank, index in reversed(list(enumerate(_rising(tails)))):
        stepped = _times(tails[index], len(tails) - rank)
        ceiling = Tail(min(ceiling.p, stepped.p), min(ceiling.log10_p, stepped.log10_p))
        adjusted[index] = ceiling
    return tuple(adjusted)


def whole_level(alpha: float, _size: int) -> float:
    """The level of an interval that stands by itself: alpha, whatever the size of the family."""
    return alpha


def bonferroni_level(alpha: float, size: int) -> float:
    """The level of each of `size` intervals that together hold with probability 1 - alpha or more."""
    return alpha / size


def sidak_level(alpha: float, size: int) -> float:
    """1 - (1 - alpha)^(1/size)."""
    return -expm1(log1p(-alpha) / size)


P_ADJUSTMENTS: dict[str, Callable[[Sequence[Tail]], tuple[Tail, ...]]] = {
    "none": unadjusted,
    "bonferroni": bonferroni,
    "sidak": sidak,
    "holm": holm,
    "hochberg": hochberg,
}


def adjusted_beside_missing(adjust: str, tails: Sequence[Tail], missing: int) -> tuple[Tail, ...]:
    """`tails` adjusted in their family, of which `missing` more could not be computed and count as p = 1.

    So the family keeps the size that was planned. Raises KeyError for an unknown adjustment.
    """
    return P_ADJUSTMENTS[adjust]([*tails, *(Tail(1.0, 0.0) for _ in range(missing))])[: len(tails)]


INTERVAL_LEVELS: dict[str, Callable[[float, int], float]] = {
    "none": whole_level,
    "bonferroni": bonferroni_level,
    "sidak": sidak_level,
}
"""The level of each interval of a family of a size, for the adjustments that have simultaneous intervals."""


def _rising(tails: Sequence[Tail]) -> list[int]:
    return sorted(range(len(tails)), key=lambda index: (tails[index].p, tails[index].log10_p, index))


def _times(tail: Tail, factor: int) -> Tail:
    return Tail(min(1.0, factor * tail.p), min(0.0, tail.log10_p + log10(factor)))


def _sidak(tail: Tail, size: int) -> Tail:
    if size == 1 or tail.p >= 1.0:
        return tail
    if tail.p < _SMALLEST_P:
        return Tail(size * tail.p, tail.log10_p + log10(size))  # equal far beyond double precision
    p = -expm1(size * log1p(-tail.p))
    return Tail(p, log10(p))
