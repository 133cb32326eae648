"""Data and measures that the benchmarks of whole procedures share."""

import math
import random
import statistics
import time
from collections.abc import Callable, Sequence
from typing import TypeVar

from assayfolio.exact import ExactSums, parse_decimal
from assayfolio.statistics.oneway import OneWay, one_way

Answer = TypeVar("Answer")

Texts = dict[str, list[str]]


def levels_of(k: int, n: int) -> Texts:
    """`k` levels of `n` values with two decimals, the same at every call; means differ a little."""
    generator = random.Random(20_260_117)
    centres = [100 + generator.gauss(0, 1.2) for _ in range(k)]
    return {
        f"L{at:03d}": [f"{generator.gauss(centre, 1.5):.2f}" for _ in range(n)]
        for at, centre in enumerate(centres)
    }


def doubles_of(texts: Texts) -> list[list[float]]:
    """The same values as doubles, a list a level."""
    return [[float(text) for text in values] for values in texts.values()]


def analysis_of(texts: Texts) -> OneWay:
    """The exact analysis, from the text of the values on."""
    return one_way(
        [(level, ExactSums.of([parse_decimal(text) for text in values])) for level, values in texts.items()]
    )


def timed(call: Callable[[], Answer], repeats: int) -> tuple[float, float, Answer]:
    """The first call in milliseconds, the median of `repeats` more, and the answer."""
    begin = time.perf_counter()
    answer = call()
    first = time.perf_counter() - begin
    times = []
    for _ in range(repeats):
        begin = time.perf_counter()
        call()
        times.append(time.perf_counter() - begin)
    return 1000 * first, 1000 * statistics.median(times), answer


def digits_in_common(ours: Sequence[float], theirs: Sequence[float], from_p: float) -> tuple[float, float]:
    """The worst and the median number of digits in which those p-values agree that are at least `from_p`."""
    digits = [
        16.0 if a == b else min(16.0, -math.log10(abs(a - b) / b))
        for a, b in zip(ours, theirs, strict=True)
        if b >= from_p
    ]
    return min(digits), statistics.median(digits)
