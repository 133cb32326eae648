"""What is compared: pairs of level means, differences from a reference, contrasts.

A comparison is a weighted sum of level means, L = sum(c_i * mean_i) with sum(c_i) = 0. Its value and
sum(c_i^2 / n_i), which the pooled error needs, are exact.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from itertools import combinations
from typing import Final

from assayfolio.statistics.oneway import LevelSummary, OneWay

_PLUS: Final = Fraction(1)
_MINUS: Final = Fraction(-1)


@dataclass(frozen=True, slots=True)
class Estimate:
    """A comparison before inference: its label, its value, and sum(c_i^2 / n_i).

    `weights` holds the levels whose weight c_i is not zero, each with it; a comparison with separate
    variances goes by them.
    """

    label: str
    value: Fraction
    variance_factor: Fraction
    weights: tuple[tuple[LevelSummary, Fraction], ...]


def pair_estimates(analysis: OneWay) -> tuple[Estimate, ...]:
    """Every pair of levels, "A - B" with A before B in the order of the levels."""
    return tuple(_difference(a, b) for a, b in combinations(analysis.levels, 2))


def reference_estimates(analysis: OneWay, reference: str) -> tuple[Estimate, ...]:
    """Every other level minus the reference, in the order of the levels.

    Raises KeyError where there is no level of that name.
    """
    r = analysis.summary_of(reference)
    return tuple(_difference(x, r) for x in analysis.levels if x.level != reference)


def contrast_estimate(analysis: OneWay, label: str, weights: Mapping[str, Fraction]) -> Estimate:
    """The contrast with these weights; levels that are not named have weight zero.

    Raises ValueError where the weights do not sum to zero or are all zero, KeyError for an unknown level.
    """
    if sum(weights.values()) != 0:
        raise ValueError("the weights of a contrast sum to zero")
    if not any(weights.values()):
        raise ValueError("a contrast has at least two weights that are not zero")
    weighted = [(analysis.summary_of(level), Fraction(weight)) for level, weight in weights.items()]
    used = tuple((level, weight) for level, weight in weighted if weight)
    return Estimate(
        label,
        sum((weight * level.mean for level, weight in used), Fraction(0)),
        sum((weight**2 / level.n for level, weight in used), Fraction(0)),
        used,
    )


def _difference(a: LevelSummary, b: LevelSummary) -> Estimate:
    return Estimate(
        f"{a.level} - {b.level}",
        a.mean - b.mean,
        Fraction(a.n + b.n, a.n * b.n),
        ((a, _PLUS), (b, _MINUS)),
    )
