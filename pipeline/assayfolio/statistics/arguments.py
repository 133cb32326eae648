"""The shape and the domain of what the distribution functions are given.

A function of this package that takes "a value or an array" answers a float with a float and an array with an
array of the same shape. What lies outside a function's domain is refused in words, never coerced.
"""

from typing import TypeVar, cast

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Flags = NDArray[np.bool_]
Places = NDArray[np.intp]
Values = TypeVar("Values", float, Floats)


def shaped(like: Values, values: Floats) -> Values:
    """`values`, one a number of `like`: a float where `like` is a number, else an array of its shape."""
    answer = values.item() if np.ndim(like) == 0 else values.reshape(np.shape(like))
    return cast("Values", answer)


def statistic_values(values: float | Floats, name: str) -> Floats:
    """The numbers of a statistic that is never negative, as a flat array; infinity is allowed.

    Raises ValueError for NaN and for negative numbers.
    """
    flat = real_values(values, name)
    if (flat < 0).any():
        raise ValueError(f"{name} may not be negative ({float(flat[flat < 0][0])!r})")
    return flat


def real_values(values: float | Floats, name: str) -> Floats:
    """The numbers of a statistic of either sign, as a flat array; infinities are allowed.

    Raises ValueError for NaN.
    """
    flat = np.array(values, dtype=np.float64).reshape(-1)
    if np.isnan(flat).any():
        raise ValueError(f"{name} is not a number")
    return flat


def probabilities(values: float | Floats) -> Floats:
    """Tail probabilities between zero and one, both excluded, as a flat array.

    Raises ValueError for anything else.
    """
    flat = np.array(values, dtype=np.float64).reshape(-1)
    outside = ~((flat > 0) & (flat < 1))
    if outside.any():
        raise ValueError(f"a probability between 0 and 1 is needed, not {float(flat[outside][0])!r}")
    return flat


def degrees_of_freedom(value: float, name: str = "the degrees of freedom") -> float:
    """`value` as a finite number of degrees of freedom, at least one; it need not be whole.

    Raises ValueError for anything else.
    """
    if not 1 <= value < np.inf:
        raise ValueError(f"{name} must be a number from 1 upwards, not {value!r}")
    return float(value)


def degrees_of_freedom_or_infinite(value: float, name: str = "the degrees of freedom") -> float:
    """`value` as a number of degrees of freedom, at least one; infinity stands for a known variance.

    Raises ValueError for anything else.
    """
    if not value >= 1:
        raise ValueError(f"{name} must be a number from 1 upwards or infinite, not {value!r}")
    return float(value)
