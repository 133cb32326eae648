"""Noncentral F as a mixture of central ratios, with Poisson weights: each tail a sum of positive terms.

P(F > f) = sum over j of w_j U_j, with w_j the Poisson probabilities of mean lambda/2 and U_j the upper tail
of a ratio of chi-squares on df1 + 2j and df2 degrees of freedom. U rises with j by steps g_j that are known
in closed form, and the lower tails fall by the same steps; one central tail at an end of the range of j gives
all of them without cancellation. Method: C. G. Ding, Appl. Stat. 46, 1997, and its forerunners (from memory).

Where lambda is so large that the range of j would fill the memory, every m-th j is taken, with a central tail
each: w_j U_j is then a smooth function of j, much wider than m, and the trapezoidal rule is exact to the last
digit.
"""

import math
from dataclasses import dataclass
from typing import Final

import numpy as np

from assayfolio.statistics.arguments import Floats
from assayfolio.statistics.deviance import excess
from assayfolio.statistics.incomplete_beta import Ratios, Tails, ratio_tails

_NEGLIGIBLE: Final = 75.0  # exp(-75) is 3e-33
_MOST_STEPS: Final = 100_000
_NODES_A_DEVIATION: Final = 3


@dataclass(frozen=True, slots=True)
class MixtureTails:
    """P(F > f), P(F <= f), and how fast the first rises with the noncentrality."""

    upper: float
    lower: float
    slope: float


def mixture_tails(f: float, df1: float, df2: float, noncentrality: float) -> MixtureTails:
    """The tails at `f` > 0 of noncentral F on `df1` and `df2` degrees of freedom.

    Measured: 12 digits of either tail wherever it exceeds 1e-14, for df up to 1e6 and a noncentrality up
    to 1e5.
    """
    law = _Central(f, df1, df2)
    mean = noncentrality / 2
    # Bounds of the Poisson tails after Bernstein.
    first = max(0, math.floor(mean - math.sqrt(2 * _NEGLIGIBLE * mean)))
    last = math.ceil(mean + _NEGLIGIBLE / 3 + math.sqrt((_NEGLIGIBLE / 3) ** 2 + 2 * _NEGLIGIBLE * mean))
    if last - first > _MOST_STEPS:
        return _by_sampling(law, mean, first, last)
    index = np.arange(first, last + 1, dtype=np.float64)
    weights = _poisson_weights(mean, index)
    steps = law.steps(index)
    upper, lower = np.empty_like(steps), np.empty_like(steps)
    upper[0] = law.at(first).survival()[0]
    upper[1:] = upper[0] + np.add.accumulate(steps[:-1])
    lower[-1] = law.at(last).cumulative()[0]
    lower[:-1] = lower[-1] + np.add.accumulate(steps[-2::-1])[::-1]
    return _averaged(weights, upper, lower, steps)


def _averaged(weights: Floats, upper: Floats, lower: Floats, steps: Floats) -> MixtureTails:
    return MixtureTails(
        min(1.0, float(np.sum(weights * upper))),
        min(1.0, float(np.sum(weights * lower))),
        float(np.sum(weights * steps)) / 2,
    )


@dataclass(frozen=True, slots=True)
class _Central:
    """The ratios on df1 + 2j and df2 degrees of freedom, at the point that is f for j = 0."""

    f: float
    df1: float
    df2: float

    def at(self, j: float) -> Tails:
        """The tails for one j."""
        df = self.df1 + 2 * j
        return ratio_tails(Ratios.of_multiples(np.array([self.f * self.df1]), df), df / 2, self.df2 / 2)

    def step(self, j: float) -> float:
        """What the upper tail gains from `j` to j + 1: y^a x^b / (a B(a, b)), a = df1/2 + j, b = df2/2."""
        return self.step_of(self.at(j), j)

    def step_of(self, tails: Tails, j: float) -> float:
        """The step from `j` on, from the tails for `j`."""
        return float(np.exp(tails.log_density()[0])) / (self.df1 / 2 + j)

    def steps(self, index: Floats) -> Floats:
        """The steps for successive j, from the largest of them outwards: what underflows is negligible."""
        a, b = self.df1 / 2 + index, self.df2 / 2
        y = 1 / (1 + self.df2 / (self.df1 * self.f))
        growth = y * ((a + b) / (a + 1))  # from one step to the next; once below 1, it stays there
        peak = int(np.argmax(np.append(growth[:-1] <= 1, True)))
        return _outwards(growth, peak, self.step(float(index[peak])))


def _poisson_weights(mean: float, index: Floats) -> Floats:
    if mean == 0:
        return np.where(index == 0, 1.0, 0.0)
    growth = mean / (index + 1)
    weights = _outwards(growth, int(mean) - int(index[0]), 1.0)
    return weights / np.sum(weights)


def _outwards(growth: Floats, peak: int, value: float) -> Floats:
    # growth[i] leads from term i to term i + 1.
    terms = np.empty_like(growth)
    terms[peak] = value
    terms[peak + 1 :] = value * np.multiply.accumulate(growth[peak:-1])
    terms[:peak] = value * np.multiply.accumulate(1 / growth[:peak][::-1])[::-1]
    return terms


def _by_sampling(law: _Central, mean: float, first: int, last: int) -> MixtureTails:
    stride = math.floor(math.sqrt(mean) / _NODES_A_DEVIATION)
    index = np.arange(first, last + 1, stride, dtype=np.float64)
    u = (mean - index) / index
    weights = np.exp(-index * excess(u, np.log1p(u)) - 1 / (12 * index)) / np.sqrt(index)
    weights = weights / np.sum(weights)
    tails = [law.at(float(j)) for j in index]
    upper = np.array([float(tail.survival()[0]) for tail in tails])
    lower = np.array([float(tail.cumulative()[0]) for tail in tails])
    steps = np.array([law.step_of(tail, float(j)) for tail, j in zip(tails, index, strict=True)])
    return _averaged(weights, upper, lower, steps)
