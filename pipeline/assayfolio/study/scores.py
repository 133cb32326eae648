"""Whether the levels of a trend have one number each, and enough of them for its degree."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Literal

from assayfolio.study.faults import shown
from assayfolio.study.names import few
from assayfolio.study.plan import Trend


@dataclass(frozen=True, slots=True)
class Misfit:
    """What keeps a trend from being formed: the key to change, what is wrong with it, what is expected."""

    key: Literal["trend", "scores", "degree"]
    found: str
    expected: str


def trend_misfits(trend: Trend, levels: Sequence[str]) -> Iterator[Misfit]:
    """All that keeps `trend` from being formed over `levels`."""
    key: Literal["trend", "scores"] = "scores" if trend.scores else "trend"
    numbers: dict[Fraction, str] = {}
    absent: list[str] = []
    for level in levels:
        try:
            number = trend.score_of(level)
        except KeyError:
            absent.append(level)
            continue
        if number in numbers:
            found = f"gives the levels {shown(numbers[number])} and {shown(level)} the same number"
            yield Misfit(key, found, "another number for each level, for they stand in an order")
        numbers.setdefault(number, level)
    if absent and trend.scores:
        yield Misfit(key, f"gives no number for {few(absent)}", "one for each level")
    elif absent:
        found = f"needs levels that are numbers, unlike {few(absent)}"
        expected = (
            "the numbers under `scores`, such as {low: 20, high: 40}; names without an order have no trend"
        )
        yield Misfit(key, found, f"{expected}, compare them by `pairs` or `contrasts`")
    if trend.degree > 1 and trend.degree > len(levels) - 1:
        found = f"is {trend.degree}, and there are {len(levels)} levels"
        yield Misfit("degree", found, "at most one less than the number of levels")
