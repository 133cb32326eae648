"""Effect sizes of a one-way analysis, and the interval that noncentral F gives.

Definitions differ between libraries; those used here are in `EffectSizes`. Sums of squares are exact, so the
sizes are rational or the root of a rational.
"""

import math
from dataclasses import dataclass
from fractions import Fraction
from typing import Final

from assayfolio.exact import Root, round_significant, to_double
from assayfolio.statistics.noncentral import noncentral_f_noncentrality
from assayfolio.statistics.oneway import NotComputableError, OneWay

_LARGEST_F: Final = 10**100


@dataclass(frozen=True, slots=True)
class EffectSizes:
    """How large the differences between k levels are beside the variation, with N values in all.

    With SSB, SSW and SST the sums of squares between, within and in total, and MSW = SSW/(N - k):

        eta_squared      SSB / SST: the share of the variation in these data; biased upwards
        omega_squared    (SSB - (k - 1) MSW) / (SST + MSW)   (Hays 1963; from memory)
        epsilon_squared  (SSB - (k - 1) MSW) / SST           (Kelley 1935; from memory)
        cohen_f          sqrt(SSB / SSW), so that f^2 = eta^2 / (1 - eta^2)   (Cohen 1988; from memory)

    Omega and epsilon squared are kept as they are where F < 1 makes them negative. `cohen_f_ci` is the
    two-sided interval of sqrt(lambda / N), lambda = N f^2 being the noncentrality of F. Some libraries divide
    by N MSW in place of SSW, which makes f smaller, or take lambda = (N - k) f^2 for the interval. `cohen_f`
    and its interval are None where nothing varies within the levels.
    """

    eta_squared: Fraction
    omega_squared: Fraction
    epsilon_squared: Fraction
    cohen_f: Root | None
    cohen_f_ci: tuple[float, float] | None


def effect_sizes(analysis: OneWay, confidence: float) -> EffectSizes:
    """The effect sizes of `analysis`, the interval of Cohen's f at `confidence` (0.95 for 95 %).

    Raises NotComputableError where all values are equal, or F is beyond 1e100, and ValueError
    unless `confidence` is between 0 and 1.
    """
    between, total = analysis.ss_between, analysis.ss_total
    if not total:
        raise NotComputableError("all values are equal, so there is no variation of which to form shares")
    ms = analysis.ms_within
    true_between = between - analysis.df_between * ms
    f = analysis.f
    return EffectSizes(
        between / total,
        true_between / (total + ms),
        true_between / total,
        None if f is None else Root.of(between / analysis.ss_within),
        None if f is None else _cohen_f_interval(analysis, f, confidence),
    )


def noncentrality_interval(f: float, df1: float, df2: float, confidence: float) -> tuple[float, float]:
    """The two-sided interval for lambda from an observed `f`: (1 - confidence)/2 is left out on either side.

    An end is 0 where even lambda = 0 makes so large an F as likely as that. Source: Steiger 2004, Psychol.
    Methods 9, 164 (from memory). Measured: 12 digits.
    """
    if not 0 < confidence < 1:
        raise ValueError(f"a confidence between 0 and 1 is needed, not {confidence!r}")
    beyond = (1 - confidence) / 2
    lower = noncentral_f_noncentrality(f, df1, df2, 1 - beyond)
    return lower, noncentral_f_noncentrality(f, df1, df2, beyond)


def _cohen_f_interval(analysis: OneWay, f: Fraction, confidence: float) -> tuple[float, float]:
    if f > _LARGEST_F:
        raise NotComputableError("F is beyond 1e100, which is too large for an interval of Cohen's f")
    point = to_double(f)
    lower, upper = noncentrality_interval(point, analysis.df_between, analysis.df_within, confidence)
    n = analysis.n_total
    return round_significant(math.sqrt(lower / n)), round_significant(math.sqrt(upper / n))
