"""The interval of the standard deviation that the levels add, from the mean squares.

With F the ratio of the mean squares on k - 1 and N - k degrees of freedom, F_l and F_u its lower and upper
alpha/2 points and X_l, X_u those of chi-square on k - 1, the interval of the variance between levels is

    (k - 1) (MS between - F_u MS within) / (n X_u)   to   (k - 1) (MS between - F_l MS within) / (n X_l)

with ends below zero taken as zero (Williams 1962, Biometrika 49, 278, and Tukey 1951; from memory). For
unequal n the mean of squares of the level means, without weights, takes the place of MS between / n, and the
harmonic mean of the n_i that of n (Thomas and Hultquist 1978, Ann. Stat. 6, 582; from memory).

Coverage in simulations of 40,000 studies each at 95 %: 94.9 to 97.7 % for five layouts with equal n and true
standard deviations from 0 to 3 s_r; 93.3 to 97.8 % for six with unequal n up to 1 against 20. The weighted
MS between with n0 covered 89.7 % in the worst of the latter.
"""

from fractions import Fraction
from math import sqrt

from assayfolio.exact import round_significant, to_double
from assayfolio.statistics.oneway import OneWay
from assayfolio.statistics.tails import chi2_isf, chi2_ppf, f_isf


def between_sd_interval(analysis: OneWay, alpha: float) -> tuple[float, float] | None:
    """The 1 - `alpha` interval of the standard deviation between levels; None where all values are equal."""
    if not analysis.ss_total:
        return None
    df1, df2 = analysis.df_between, analysis.df_within
    # Each in the unit of a variance between levels: what the means scatter, and the error's part in it.
    means = to_double(_scatter_of_means(analysis))
    error = to_double(
        analysis.ms_within * sum(Fraction(1, level.n) for level in analysis.levels) / analysis.k
    )
    lower = df1 * (means - float(f_isf(alpha / 2, df1, df2)) * error) / float(chi2_isf(alpha / 2, df1))
    upper = df1 * (means - error / float(f_isf(alpha / 2, df2, df1))) / float(chi2_ppf(alpha / 2, df1))
    return round_significant(sqrt(max(0.0, lower))), round_significant(sqrt(max(0.0, upper)))


def _scatter_of_means(analysis: OneWay) -> Fraction:
    mean = sum((level.mean for level in analysis.levels), Fraction(0)) / analysis.k
    return sum(((level.mean - mean) ** 2 for level in analysis.levels), Fraction(0)) / analysis.df_between
