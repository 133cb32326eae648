"""Small figures of one quantity over the runs of a study, in SVG with their message in words.

A figure is as wide as its column, has no axis, and is drawn between the smallest and the largest value; the
table beside it has the numbers. Lines and dots take the colour of the text around them, so that they are
readable on light and on dark.
"""

from collections.abc import Sequence
from dataclasses import dataclass

from assayfolio.pages.values import RunSeries
from assayfolio.pages.wording import number_words

MOST_RUNS = 60
MOST_LEVELS = 12
_WIDTH, _HEIGHT, _EDGE = 180.0, 28.0, 4.0


@dataclass(frozen=True, slots=True)
class Spark:
    """One quantity over runs: its name and unit, the path and last point of its line, and it all in words."""

    name: str
    unit: str
    path: str
    end: tuple[str, str]
    words: str
    newest: str
    smallest: str
    largest: str
    runs: int


@dataclass(frozen=True, slots=True)
class ResponseSparks:
    """The figures of one response: level means, then the residual SD; `left_out` counts further levels."""

    response: str
    unit: str
    means: tuple[Spark, ...]
    precision: Spark | None
    left_out: int


def sparks_of(series: Sequence[RunSeries]) -> tuple[ResponseSparks, ...]:
    """The figures over `series`, oldest first; a level is drawn that at least two runs have in common."""
    names = list(dict.fromkeys(name for run in series for name in run.responses))
    found = (_response(name, series) for name in names)
    return tuple(one for one in found if one.means or one.precision)


def _response(name: str, series: Sequence[RunSeries]) -> ResponseSparks:
    runs = [(run.run, run.responses[name]) for run in series if name in run.responses]
    unit = runs[-1][1].unit
    levels = list(dict.fromkeys(level for _, found in reversed(runs) for level in found.levels))
    drawn = []
    for level in levels:
        points = [(run, found.levels[level]) for run, found in runs if level in found.levels]
        spark = _spark(f"Mean of {level}", level, unit, points)
        if spark is not None:
            drawn.append(spark)
    spreads = [(run, found.residual_sd) for run, found in runs if found.residual_sd is not None]
    precision = _spark("Residual standard deviation", "residual SD", unit, spreads)
    return ResponseSparks(name, unit, tuple(drawn[:MOST_LEVELS]), precision, max(0, len(drawn) - MOST_LEVELS))


def _spark(what: str, name: str, unit: str, points: Sequence[tuple[str, float]]) -> Spark | None:
    points = points[-MOST_RUNS:]
    if len(points) < 2:
        return None
    values = [value for _, value in points]
    low, high = min(values), max(values)
    places = [(_across(at, len(points)), _up(value, low, high)) for at, value in enumerate(values)]
    newest, smallest, largest = map(number_words, (values[-1], low, high))
    unit_words = f" {unit}" if unit else ""
    return Spark(
        name=name,
        unit=unit,
        path="M" + "L".join(f"{x} {y}" for x, y in places),
        end=places[-1],
        words=(
            f"{what} over {len(points)} runs, {points[0][0]} to {points[-1][0]}: smallest {smallest}, "
            f"largest {largest}, newest {newest}{unit_words}"
        ),
        newest=newest,
        smallest=smallest,
        largest=largest,
        runs=len(points),
    )


def _across(at: int, count: int) -> str:
    return _coordinate(_EDGE + (_WIDTH - 2 * _EDGE) * at / (count - 1))


def _up(value: float, low: float, high: float) -> str:
    share = 0.5 if high == low else (value - low) / (high - low)
    return _coordinate(_HEIGHT - _EDGE - (_HEIGHT - 2 * _EDGE) * share)


def _coordinate(value: float) -> str:
    return f"{value:.1f}"
