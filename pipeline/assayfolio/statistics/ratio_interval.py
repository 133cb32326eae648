"""Limits for the ratio of two means: Fieller's theorem, with one variance or with two.

For independent means X and R with variances v_X and v_R, the ratios rho that a one-sided t test at level
alpha does not reject are those with |X - rho R| <= t sqrt(v_X + rho^2 v_R), t the upper alpha point. They
form an interval where g = t^2 v_R / R^2 < 1, that is where R itself differs from zero (Fieller 1954, J. R.
Stat. Soc. B 16, 175; from memory). Distances of the limits from X / R are given, not the limits, so that no
digit is lost where they are small beside the ratio.
"""

from dataclasses import dataclass
from fractions import Fraction
from math import atan2, copysign, cos, hypot, pi, sin
from typing import Final

import numpy as np
from scipy.special import stdtr

from assayfolio.exact import Root, to_double
from assayfolio.statistics.arguments import Floats
from assayfolio.statistics.comparisons import signed_root
from assayfolio.statistics.false_position import root_between
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.statistics.tails import t_isf, t_sf

_DIRECTIONS: Final = 1025
_SETTLED: Final = 5e-14  # relative to alpha; the digits of a t tail


@dataclass(frozen=True, slots=True)
class MeanRatio:
    """Two independent means and their variances; the second mean is that of the reference."""

    x: Fraction
    r: Fraction
    v_x: Fraction
    v_r: Fraction


def require_reference(ratio: MeanRatio, t: float) -> None:
    """Raises NotComputableError where the reference mean does not differ from zero: r^2 <= t^2 v_r."""
    if ratio.r**2 <= Fraction(t) ** 2 * ratio.v_r:
        raise NotComputableError(
            "the mean of the reference cannot be told from zero at the level of the interval, so a "
            "difference in percent of it has no meaning; state the margins in units of the response"
        )


def fieller_distances(ratio: MeanRatio, t: float) -> tuple[float, float]:
    """How far the lower and the upper limit lie from x / r: (negative, positive).

    Raises NotComputableError where g >= 1.
    """
    require_reference(ratio, t)
    # The distances solve (1 - g) d^2 - 2 g rho d - c = 0; the root without cancellation comes first, the
    # other from the product of the two.
    squared = Fraction(t) ** 2 / ratio.r**2
    rho, g = ratio.x / ratio.r, squared * ratio.v_r
    c = squared * (ratio.v_x + rho**2 * ratio.v_r)
    half = abs(to_double(g * rho)) + to_double(Root.of((g * rho) ** 2 + (1 - g) * c))
    if not half:  # a mean of zero that does not vary: the ratio is zero without error
        return 0.0, 0.0
    far, near = half / to_double(1 - g), to_double(c) / half
    return (-near, far) if rho >= 0 else (-far, near)


def fieller_distances_separate(ratio: MeanRatio, df_x: int, df_r: int, alpha: float) -> tuple[float, float]:
    """As `fieller_distances`, where each mean has a variance of its own.

    The degrees of freedom are those of Welch and Satterthwaite for X - rho R, which depend on rho: at each
    limit the test of that very ratio has p = alpha.
    Raises NotComputableError where the reference mean does not differ from zero on its own degrees of
    freedom, and where more than one ratio on a side has p = alpha, so that there is no interval.
    """
    require_reference(ratio, float(t_isf(alpha, df_r)))
    if not ratio.v_x or not ratio.v_r:
        return fieller_distances(ratio, float(t_isf(alpha, df_r if ratio.v_r else df_x)))
    scale = to_double(Root.of(ratio.v_x / ratio.v_r))
    x_over_se, r_over_se = (
        to_double(signed_root(ratio.x, ratio.x**2 / ratio.v_x)),
        to_double(signed_root(ratio.r, ratio.r**2 / ratio.v_r)),
    )
    start = atan2(copysign(x_over_se, x_over_se * r_over_se), abs(r_over_se))
    height = hypot(x_over_se, r_over_se)
    lower = _Directions(-start, height, df_x, df_r).turn_to(alpha)
    upper = _Directions(start, height, df_x, df_r).turn_to(alpha)
    return (
        -scale * sin(lower) / (cos(start) * cos(start - lower)),
        scale * sin(upper) / (cos(start) * cos(start + upper)),
    )


@dataclass(frozen=True, slots=True)
class _Directions:
    """The ratios rho on one side of x / r, as angles: rho = +- sqrt(v_x / v_r) tan(start + turn).

    The t statistic of a ratio is height * sin(turn), its degrees of freedom a smooth function of the angle.
    """

    start: float
    height: float
    df_x: int
    df_r: int

    def df(self, turn: Floats) -> Floats:
        square = np.sin(self.start + turn) ** 2
        return np.maximum(1 / ((1 - square) ** 2 / self.df_x + square**2 / self.df_r), 1.0)

    def turn_to(self, alpha: float) -> float:
        """The one turn at which the test has p = alpha."""
        turns = np.linspace(0, pi / 2 - self.start, _DIRECTIONS)
        rejected = stdtr(self.df(turns), -self.height * np.sin(turns)) <= alpha
        changes = np.flatnonzero(rejected[1:] != rejected[:-1])
        if changes.size != 1:
            raise NotComputableError(
                "with so few values the ratios that the tests do not reject form no interval; state the "
                "margins in units of the response"
            )

        def excess(turn: float) -> float:
            df = float(self.df(np.array(turn)))
            return 1 - float(t_sf(self.height * sin(turn), df)) / alpha

        at = changes[0]
        return root_between(excess, float(turns[at]), float(turns[at + 1]), _SETTLED)
