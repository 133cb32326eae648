"""Intervals for a weighted sum of mean squares, as the total variance of a random-effects analysis is one.

A mean square MS_i on df_i degrees of freedom (distributed as its expectation times chi-square over df_i)
enters with a weight c_i that is not negative. The estimate sum(c_i MS_i) is exact; its interval is
approximate, by one of two methods:

    modified large sample: F. A. Graybill and C. M. Wang 1980, J. Am. Stat. Assoc. 75, 869
    Satterthwaite:         F. E. Satterthwaite 1946, Biometrics Bull. 2, 110

(both from memory, and compared in R. K. Burdick and F. A. Graybill, Confidence Intervals on Variance
Components, 1992: the first keeps its level, the second falls short of it where the parts differ much).
"""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from math import hypot, sqrt

from assayfolio.exact import round_significant, to_double
from assayfolio.statistics.tails import chi2_isf, chi2_ppf


@dataclass(frozen=True, slots=True)
class Part:
    """One mean square with its degrees of freedom and its weight, which is not negative."""

    weight: Fraction
    mean_square: Fraction
    df: int

    @property
    def amount(self) -> Fraction:
        """What the mean square adds to the sum."""
        return self.weight * self.mean_square


def estimate(parts: Sequence[Part]) -> Fraction:
    """The weighted sum of mean squares."""
    return sum((part.amount for part in parts), Fraction(0))


def satterthwaite_df(parts: Sequence[Part]) -> Fraction:
    """The degrees of freedom of one mean square with the same mean and variance as the sum; not whole.

    (sum of c_i MS_i)^2 / sum of (c_i MS_i)^2 / df_i. Raises ZeroDivisionError where every part is zero.
    """
    return estimate(parts) ** 2 / sum(part.amount**2 / part.df for part in parts)


def sd_interval_by_chi_square(variance: Fraction, df: Fraction | int, alpha: float) -> tuple[float, float]:
    """The 1 - alpha interval of a standard deviation whose square is estimated as `variance` on `df`.

    sqrt(df s^2 / chi-square point), equal tails; exact for one mean square of normal values.
    """
    v, s = to_double(Fraction(df)), sqrt(to_double(variance))
    upper_point, lower_point = float(chi2_isf(alpha / 2, v)), float(chi2_ppf(alpha / 2, v))
    return round_significant(s * sqrt(v / upper_point)), round_significant(s * sqrt(v / lower_point))


def modified_large_sample_interval(parts: Sequence[Part], alpha: float) -> tuple[float, float]:
    """The 1 - alpha interval of the expectation of the sum, a variance, never below zero; not rounded.

    With G_i = 1 - df_i / (upper alpha/2 point) and H_i = df_i / (lower alpha/2 point) - 1 of chi-square on
    df_i, the estimate less sqrt(sum (G_i c_i MS_i)^2), and the estimate plus sqrt(sum (H_i c_i MS_i)^2).
    Exact where only one part is not zero.
    """
    down = hypot(*((1 - part.df / float(chi2_isf(alpha / 2, part.df))) * _double(part) for part in parts))
    up = hypot(*((part.df / float(chi2_ppf(alpha / 2, part.df)) - 1) * _double(part) for part in parts))
    centre = to_double(estimate(parts))
    return max(0.0, centre - down), centre + up


def _double(part: Part) -> float:
    return to_double(part.amount)
