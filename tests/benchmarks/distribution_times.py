# A script for a terminal.
# ruff: noqa: T201
"""How long the distribution functions take.

    python tests/benchmarks/distribution_times.py

The first call for a number of means makes that number's curves, and is shown by itself; else the median of
repeated calls.
"""

import math
import statistics
import time
from collections.abc import Callable

import numpy as np

from assayfolio.statistics import tails
from assayfolio.statistics.distributions import studentized_range_isf, studentized_range_sf

MANY = np.linspace(0.01, 20, 5000)
PAIRS_OF_30 = np.linspace(0.1, 12, 435)
PAIRS_OF_200 = np.linspace(0.1, 12, 19_900)

CALLS: list[tuple[str, Callable[[], object]]] = [
    (
        "first studentized_range_sf, k = 30, df = 210, 435 q",
        lambda: studentized_range_sf(PAIRS_OF_30, 30, 210),
    ),
    ("studentized_range_sf, k = 30, df = 210, 435 q", lambda: studentized_range_sf(PAIRS_OF_30, 30, 210)),
    ("studentized_range_sf, k = 30, df = 1, 435 q", lambda: studentized_range_sf(PAIRS_OF_30, 30, 1)),
    (
        "studentized_range_sf, k = 30, df infinite, 435 q",
        lambda: studentized_range_sf(PAIRS_OF_30, 30, math.inf),
    ),
    ("studentized_range_sf, k = 30, df = 210, one q", lambda: studentized_range_sf(5.0, 30, 210)),
    ("studentized_range_isf, k = 30, df = 210, one p", lambda: studentized_range_isf(0.05, 30, 210)),
    (
        "first studentized_range_sf, k = 200, df = 800, 19900 q",
        lambda: studentized_range_sf(PAIRS_OF_200, 200, 800),
    ),
    (
        "studentized_range_sf, k = 200, df = 800, 19900 q",
        lambda: studentized_range_sf(PAIRS_OF_200, 200, 800),
    ),
    ("f_sf, df 3 and 20, 5000 F", lambda: tails.f_sf(MANY, 3, 20)),
    ("f_sf, df 3 and 1e6, 5000 F", lambda: tails.f_sf(MANY, 3, 1e6)),
    ("f_sf, df 1e6 and 1e6, one F", lambda: tails.f_sf(1.001, 1e6, 1e6)),
    ("f_sf, df 3 and 20, one F", lambda: tails.f_sf(3.1, 3, 20)),
    ("f_isf, df 3 and 20, one p", lambda: tails.f_isf(0.05, 3, 20)),
    ("t_isf, df 20, one p", lambda: tails.t_isf(0.025, 20)),
]


def main() -> None:
    """Print the times in milliseconds."""
    for name, call in CALLS:
        times = []
        for _ in range(1 if name.startswith("first") else 15):
            begin = time.perf_counter()
            call()
            times.append(time.perf_counter() - begin)
        print(f"{1000 * statistics.median(times):8.2f} ms  {name}")


if __name__ == "__main__":
    main()
