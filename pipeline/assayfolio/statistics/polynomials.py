"""Trends over levels that stand for numbers: contrasts of orthogonal polynomials in the level scores.

With scores x_i, equally spaced or not, and n_i values at level i, p_0 = 1, p_1, p_2, ... are the monic
polynomials with sum(n_i p_a(x_i) p_b(x_i)) = 0 for a != b. The contrast of degree d has the weights
n_i p_d(x_i) / sum(n_j p_d(x_j)^2). Its value is the leading coefficient of the polynomial of degree d that
weighted least squares fits to the level means; of degree 1 that is the slope for each unit of the score.
Contrasts of different degrees are orthogonal, and with the pooled error the sums of squares of all k - 1
degrees add up to SS between. Everything is exact.
"""

from collections.abc import Iterator, Mapping, Sequence
from fractions import Fraction
from typing import Final

from assayfolio.statistics.estimates import Estimate
from assayfolio.statistics.oneway import OneWay

_NAMES: Final = ("linear", "quadratic", "cubic")


def degree_name(degree: int) -> str:
    """What the trend of a degree is called: linear, quadratic, cubic, then "degree 4" and so on."""
    return _NAMES[degree - 1] if degree <= len(_NAMES) else f"degree {degree}"


def polynomial_estimates(
    analysis: OneWay, scores: Mapping[str, Fraction], degree: int
) -> tuple[Estimate, ...]:
    """The trends of degree 1 to `degree` over the levels with these `scores`, labelled by `degree_name`.

    The unit of the row of degree d is the response's unit over the d-th power of the score's.
    Method: the recurrence of three terms for discrete orthogonal polynomials (Forsythe 1957, J. SIAM 5, 74;
    from memory), in fractions.
    Raises ValueError where a level has no score or a score no level, where two levels have the same score,
    and where `degree` is not from 1 to the number of levels less one.
    """
    x = _scores_in_order(analysis, scores)
    if not 1 <= degree < analysis.k:
        raise ValueError(
            f"a trend over {analysis.k} levels has a degree from 1 to {analysis.k - 1}, not {degree}"
        )
    n = [level.n for level in analysis.levels]
    polynomials = _orthogonal_polynomials(x, n)
    next(polynomials)  # the constant
    return tuple(
        _estimate(analysis, degree_name(d), [w * p for w, p in zip(n, values, strict=True)], norm)
        for d, (values, norm) in zip(range(1, degree + 1), polynomials, strict=False)
    )


def _scores_in_order(analysis: OneWay, scores: Mapping[str, Fraction]) -> list[Fraction]:
    names = [level.level for level in analysis.levels]
    for name in names:
        if name not in scores:
            raise ValueError(f"level {name!r} has no score")
    for name in scores:
        if name not in names:
            raise ValueError(f"there is a score for {name!r}, which is not a level")
    holder: dict[Fraction, str] = {}
    for name in names:
        other = holder.setdefault(Fraction(scores[name]), name)
        if other != name:
            raise ValueError(f"levels {other!r} and {name!r} have the same score")
    return list(holder)


def _orthogonal_polynomials(
    x: Sequence[Fraction], n: Sequence[int]
) -> Iterator[tuple[list[Fraction], Fraction]]:
    # The values of p_0, p_1, ... at the scores, each with sum(n_i p(x_i)^2).
    before, values = [Fraction(0)] * len(x), [Fraction(1)] * len(x)
    ratio = Fraction(0)
    while True:
        squares = [w * p * p for w, p in zip(n, values, strict=True)]
        norm = sum(squares, Fraction(0))
        yield values, norm
        centre = sum((at * s for at, s in zip(x, squares, strict=True)), Fraction(0)) / norm
        after = [(at - centre) * p - ratio * q for at, p, q in zip(x, values, before, strict=True)]
        ratio = sum((w * p * p for w, p in zip(n, after, strict=True)), Fraction(0)) / norm
        before, values = values, after


def _estimate(analysis: OneWay, label: str, weights: Sequence[Fraction], norm: Fraction) -> Estimate:
    weighted = tuple(
        (level, weight / norm) for level, weight in zip(analysis.levels, weights, strict=True) if weight
    )
    value = sum((weight * level.mean for level, weight in weighted), Fraction(0))
    return Estimate(label, value, 1 / norm, weighted)
