"""The laws of the statistics whose tails the second route recomputes.

F and t by the incomplete beta function of scipy.special (Boost's), where `tails` has its own continued
fractions; ranges and many-to-one differences by `second_nodes`. A law is a frozen value, so that rows of the
same law are recomputed together.
"""

from dataclasses import dataclass
from typing import ClassVar, Final, Protocol

import numpy as np
from scipy.special import betainc, betaincc

from assayfolio.statistics.arguments import Floats
from assayfolio.statistics.second_nodes import many_to_one_tails, range_tails

ELEMENTARY_BOUND: Final = 1e-11
"""For F and t: a stated p is rounded to 12 digits (5e-12), and both routes hold 12.5."""

MAXIMUM_BOUND: Final = 1e-10
"""For ranges and many-to-one differences: the accuracy that their first route promises."""


class Law(Protocol):
    """The distribution of a statistic under its null hypothesis; degrees of freedom are finite.

    `bound` is the largest relative difference that the tails of both routes may have.
    """

    bound: ClassVar[float]

    @property
    def effort(self) -> int:
        """How much a tail costs, as a multiple of one that takes a fraction of a millisecond."""

    def tails(self, statistics: Floats) -> Floats:
        """The tail probabilities at `statistics`."""


@dataclass(frozen=True, slots=True)
class VarianceRatio:
    """P(F > f) on `df1` and `df2` degrees of freedom, not necessarily whole."""

    df1: float
    df2: float
    bound: ClassVar[float] = ELEMENTARY_BOUND
    effort: ClassVar[int] = 1

    def tails(self, statistics: Floats) -> Floats:
        """The upper tails at f of zero or more. Measured: 12.5 digits down to 1e-280, for df to 1e6."""
        return _ratio_tails(statistics, self.df1, self.df2)


@dataclass(frozen=True, slots=True)
class StudentTwoSided:
    """P(|T| > |t|) on `df` degrees of freedom."""

    df: float
    bound: ClassVar[float] = ELEMENTARY_BOUND
    effort: ClassVar[int] = 1

    def tails(self, statistics: Floats) -> Floats:
        """The two tails together, at t of either sign."""
        return _ratio_tails(_squares(statistics), 1, self.df)


@dataclass(frozen=True, slots=True)
class StudentAbove:
    """P(T > t) on `df` degrees of freedom; for the other direction give -t."""

    df: float
    bound: ClassVar[float] = ELEMENTARY_BOUND
    effort: ClassVar[int] = 1

    def tails(self, statistics: Floats) -> Floats:
        """The upper tails, at t of either sign."""
        beyond = _ratio_tails(_squares(statistics), 1, self.df) / 2
        return np.where(statistics >= 0, beyond, 1 - beyond)


@dataclass(frozen=True, slots=True)
class StudentizedRange:
    """P(Q > q) for the range of `k` means on `df` degrees of freedom; q = |t| times the square root of 2."""

    k: int
    df: float
    bound: ClassVar[float] = MAXIMUM_BOUND
    effort: ClassVar[int] = 1

    def tails(self, statistics: Floats) -> Floats:
        """The upper tails at q of zero or more. Measured: 10.6 digits for k = 200 on 1 df, else 12.5."""
        return range_tails(statistics, self.k, self.df)


@dataclass(frozen=True, slots=True)
class ManyToOneTwoSided:
    """P(max |T_i| > |d|) for differences of means of `n_others` values from the mean of `n_control`."""

    n_control: int
    n_others: tuple[int, ...]
    df: float
    bound: ClassVar[float] = MAXIMUM_BOUND

    @property
    def effort(self) -> int:
        """The number of different sizes: each is an integrand of its own."""
        return len(set(self.n_others))

    def tails(self, statistics: Floats) -> Floats:
        """The tails outside -|d| and |d|."""
        return many_to_one_tails(np.abs(statistics), self.n_control, self.n_others, self.df, two_sided=True)


@dataclass(frozen=True, slots=True)
class ManyToOneAbove:
    """P(max T_i > d) for differences of means of `n_others` values from the mean of `n_control`.

    For the other direction give -d.
    """

    n_control: int
    n_others: tuple[int, ...]
    df: float
    bound: ClassVar[float] = MAXIMUM_BOUND

    @property
    def effort(self) -> int:
        """The number of different sizes: each is an integrand of its own."""
        return len(set(self.n_others))

    def tails(self, statistics: Floats) -> Floats:
        """The upper tails, at d of either sign."""
        return many_to_one_tails(statistics, self.n_control, self.n_others, self.df, two_sided=False)


def _squares(t: Floats) -> Floats:
    with np.errstate(over="ignore"):
        return t * t


def _ratio_tails(f: Floats, df1: float, df2: float) -> Floats:
    # Whichever of y and 1 - y is below 1/2 is formed, so that neither loses digits near 1.
    with np.errstate(over="ignore", invalid="ignore"):
        odds = df1 / df2 * f
        y, rest = odds / (1 + odds), 1 / (1 + odds)
    near = odds < 1
    return np.where(near, betaincc(df1 / 2, df2 / 2, y), betainc(df2 / 2, df1 / 2, rest))
