"""Adjustment of p-values and of interval levels for the size of a family.

A tail is a pair: the probability itself, and its base-10 logarithm, which stays finite where the probability
is too small for a double. Sources: Bonferroni's inequality; Sidak 1967 (J. Am. Stat. Assoc. 62, 626);
Holm 1979 (Scand. J. Stat. 6, 65). Formulas from memory.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from math import expm1, log1p, log10


@dataclass(frozen=True, slots=True)
class Tail:
    """A tail probability `p` and its base-10 logarithm."""

    p: float
    log10_p: float


def unadjusted(tails: Sequence[Tail]) -> tuple[Tail, ...]:
    """The tails as they are: each comparison keeps its own error rate."""
    return tuple(tails)


def bonferroni(tails: Sequence[Tail]) -> tuple[Tail, ...]:
    """Each tail times the size of the family, at most 1."""
    return tuple(_times(tail, len(tails)) for tail in tails)


def sidak(tails: Sequence[Tail]) -> tuple[Tail, ...]:
    """1 - (1 - p)^m for a family of m; exact for independent comparisons, conservative for pairs of means."""
    return tuple(_sidak(tail, len(tails)) for tail in tails)


def holm(tails: Sequence[Tail]) -> tuple[Tail, ...]:
    """Holm's step-down: the i-th smallest of m tails times m - i + 1, never below the one before it."""
    order = sorted(range(len(tails)), key=lambda index: (tails[index].log10_p, index))
    adjusted: list[Tail] = list(tails)
    floor = Tail(0.0, float("-inf"))
    for rank, index in enumerate(order):
        stepped = _times(tails[index], len(tails) - rank)
        floor = stepped if stepped.log10_p > floor.log10_p else floor
        adjusted[index] = floor
    return tuple(adjusted)


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
}


def _times(tail: Tail, factor: int) -> Tail:
    return Tail(min(1.0, factor * tail.p), min(0.0, tail.log10_p + log10(factor)))


def _sidak(tail: Tail, size: int) -> Tail:
    if tail.p >= 1.0:
        return tail
    if tail.p < 1e-290:
        return Tail(size * tail.p, tail.log10_p + log10(size))  # the two agree far beyond double precision
    p = -expm1(size * log1p(-tail.p))
    return Tail(p, log10(p))
