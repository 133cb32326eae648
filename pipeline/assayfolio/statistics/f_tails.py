"""Tails of variance ratios that are exact, as pairs of p and its logarithm."""

from collections.abc import Sequence
from fractions import Fraction

import numpy as np

from assayfolio.exact import to_double
from assayfolio.statistics.adjustment import Tail
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.statistics.tails import f_log10_sf, f_sf


def f_tails(ratios: Sequence[Fraction], df1: float, df2: float) -> tuple[Tail, ...]:
    """P(F >= ratio) for F on `df1` and `df2` degrees of freedom, a tail a ratio.

    Raises NotComputableError where a ratio is beyond the range of doubles.
    """
    try:
        f = np.array([to_double(ratio) for ratio in ratios], dtype=np.float64)
    except OverflowError:
        raise NotComputableError("the values differ by more than 150 powers of ten") from None
    p, log10_p = f_sf(f, df1, df2), f_log10_sf(f, df1, df2)
    return tuple(Tail(a, b) for a, b in zip(p.tolist(), log10_p.tolist(), strict=True))
