"""Power of comparisons with a reference under one critical value: of one level, at least one, every one.

Every other level differs from the reference by `difference`. Given the reference's mean and s the outcomes
are independent, so each power is an integral over those two, for equal and unequal numbers of values.

At least one (any-pair power): at least one level is declared different from the reference, in either
direction where the test is two-sided.
Every one (all-pairs power): every level is declared different, in its true direction.
"""

import math
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np
from scipy.special import ndtr

from assayfolio.statistics.arguments import Floats
from assayfolio.statistics.comparisons import TWO_SIDED
from assayfolio.statistics.distributions import many_to_one_isf
from assayfolio.statistics.power import error_df, pair_power, positive
from assayfolio.statistics.spread_rule import spread_rule

_REACH: Final = 9.0  # P(Z > 9) is 1e-19
_STEP: Final = 0.2


def dunnett_critical(n_control: int, n_others: Sequence[int], alpha: float, alternative: str) -> float:
    """What t, or |t| two-sided, of each level is held against by Dunnett's procedure, single-step."""
    df = error_df((n_control, *n_others))
    two_sided = alternative == TWO_SIDED
    return float(many_to_one_isf(alpha, n_control, n_others, df, two_sided=two_sided))


def dunnett_one_power(
    n_control: int,
    n_others: Sequence[int],
    which: int,
    difference: float,
    sigma: float,
    alpha: float,
    alternative: str,
) -> float:
    """The probability that the level at position `which` of the others is declared different by Dunnett.

    Raises ValueError unless `difference` and `sigma` are positive, NotComputableError where N = k.
    """
    critical = dunnett_critical(n_control, n_others, alpha, alternative)
    df = error_df((n_control, *n_others))
    return pair_power(n_control, n_others[which], df, difference, sigma, critical, alternative)


def dunnett_any_power(
    n_control: int,
    n_others: Sequence[int],
    difference: float,
    sigma: float,
    alpha: float,
    alternative: str,
) -> float:
    """The any-pair power of Dunnett's procedure; see `any_reference_power`."""
    critical = dunnett_critical(n_control, n_others, alpha, alternative)
    return any_reference_power(n_control, n_others, difference, sigma, critical, alternative)


def dunnett_all_power(
    n_control: int,
    n_others: Sequence[int],
    difference: float,
    sigma: float,
    alpha: float,
    alternative: str,
) -> float:
    """The all-pairs power of Dunnett's procedure; see `all_reference_power`."""
    critical = dunnett_critical(n_control, n_others, alpha, alternative)
    return all_reference_power(n_control, n_others, difference, sigma, critical)


def any_reference_power(
    n_control: int,
    n_others: Sequence[int],
    difference: float,
    sigma: float,
    critical: float,
    alternative: str,
) -> float:
    """The probability that at least one level is declared different from the reference.

    Each differs by `difference`, in the direction that a one-sided test is after; each t is held against
    `critical`. Measured: absolute error below 1e-12.
    Raises ValueError unless `difference` and `sigma` are positive, NotComputableError where N = k.
    """
    given = _Given.of(n_control, n_others, difference, sigma, critical)
    none = np.ones_like(given.weights)
    for n, count in sorted(Counter(n_others).items()):
        shift, hurdle = given.shift_and_hurdle(n)
        quiet = ndtr(hurdle - shift)
        if alternative == TWO_SIDED:
            quiet = quiet - ndtr(-hurdle - shift)
        none = none * quiet**count
    return max(0.0, 1 - float(np.sum(given.weights * none)))


def all_reference_power(
    n_control: int, n_others: Sequence[int], difference: float, sigma: float, critical: float
) -> float:
    """The probability that every level is declared different from the reference, in its true direction.

    Arguments as for `any_reference_power`; the critical value alone tells one- from two-sided.
    Measured: absolute error below 1e-12.
    """
    given = _Given.of(n_control, n_others, difference, sigma, critical)
    every = np.ones_like(given.weights)
    for n, count in sorted(Counter(n_others).items()):
        shift, hurdle = given.shift_and_hurdle(n)
        every = every * ndtr(shift - hurdle) ** count
    return min(1.0, float(np.sum(given.weights * every)))


@dataclass(frozen=True, slots=True)
class _Given:
    """What the outcomes depend on: nodes for the reference's mean `z` (rows) and the spread `s` (columns)."""

    n_control: int
    effect: float
    critical: float
    z: Floats
    s: Floats
    weights: Floats

    @staticmethod
    def of(
        n_control: int, n_others: Sequence[int], difference: float, sigma: float, critical: float
    ) -> "_Given":
        """The nodes and weights with which sums over both are averages."""
        effect = positive("the difference", difference) / positive("sigma", sigma)
        df = error_df((n_control, *n_others))
        ratios = [(math.sqrt(n / n_control), effect * math.sqrt(n)) for n in set(n_others)]
        steepest = max(math.hypot(1, ratio) for ratio, _ in ratios)
        step = _STEP / steepest
        count = math.ceil(_REACH / step)
        z = step * np.arange(-count, count + 1, dtype=np.float64)
        z_weights: Floats = step * np.exp(-z * z / 2) / math.sqrt(2 * math.pi)
        scale = critical * steepest
        reach = [(_REACH * (ratio + 1), shift, critical * math.hypot(1, ratio)) for ratio, shift in ratios]
        active = (
            scale * min((shift - far) / rise for far, shift, rise in reach),
            scale * max((shift + far) / rise for far, shift, rise in reach),
        )
        s, s_weights = spread_rule(df, scale, active)
        return _Given(n_control, effect, critical, z[:, None], s, z_weights[:, None] * s_weights)

    def shift_and_hurdle(self, n: int) -> tuple[Floats, Floats]:
        """How far a level of `n` values is off the reference's mean, and how far it would have to be.

        Both in standard deviations of the level's mean.
        """
        ratio = math.sqrt(n / self.n_control)
        return self.effect * math.sqrt(n) - ratio * self.z, self.critical * math.hypot(1, ratio) * self.s
