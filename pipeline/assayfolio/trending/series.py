"""From the findings of sealed runs to series of values over lots, in the order in which the lots came."""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from assayfolio.study.plan import StudyDefinition
from assayfolio.study.trend_plan import ChartQuantity

AGAINST = "against"


@dataclass(frozen=True, slots=True)
class LotResult:
    """The result of one lot: the sealed run, when it was started, and its findings document.

    `study_sha256` is the digest of the study definition that it was run under, `seal` that of its folio.
    """

    lot: str
    run: str
    started: str
    seal: str
    study_sha256: str
    findings: Mapping[str, Any]


@dataclass(frozen=True, slots=True)
class Point:
    """One lot on a chart: its value exactly, and its confidence interval where it has one.

    An end of the interval is None where that is open.
    """

    lot: str
    run: str
    started: str
    value: Fraction
    interval: tuple[float | None, float | None] | None = None


@dataclass(frozen=True, slots=True)
class Series:
    """The values of one quantity over lots; `of` names the difference, and is empty for other quantities.

    `absent` are lots without a value, each with the reason.
    """

    response: str
    unit: str | None
    quantity: ChartQuantity
    of: str
    points: tuple[Point, ...]
    absent: tuple[tuple[str, str], ...]


def series_of(study: StudyDefinition, results: Sequence[LotResult]) -> tuple[Series, ...]:
    """The series that the study's `trend` asks for, response by response.

    The mean of a lot is that of all its values; where the lot is itself a level of the factor it is the mean
    of that level, exactly, from the exact sums. The repeatability standard deviation and the differences to
    a reference, with their intervals, are taken as the findings have them.
    """
    assert study.trend is not None, "asked for by a study with a trend"
    found: list[Series] = []
    for response in study.data.response:
        unit = study.data.unit_of(response)
        fits, absent = _fitting(results, response, unit)
        for quantity in study.trend.quantities:
            if quantity == "difference":
                found += _differences(response, unit, fits, absent)
            else:
                found.append(_single(response, unit, quantity, (fits, absent)))
    return tuple(found)


_Fits = Sequence[tuple[LotResult, Mapping[str, Any]]]
_Absent = tuple[tuple[str, str], ...]


def _fitting(results: Sequence[LotResult], response: str, unit: str | None) -> tuple[_Fits, _Absent]:
    """The lots with this response in this unit, and the others with the reason."""
    fits: list[tuple[LotResult, Mapping[str, Any]]] = []
    absent: list[tuple[str, str]] = []
    for result in results:
        part = result.findings["responses"].get(response)
        if part is None:
            absent.append((result.lot, f"its run has no response {response}"))
        elif part["unit"] != unit:
            absent.append(
                (result.lot, f"its run is in {part['unit'] or 'no unit'}, the plan in {unit or 'none'}")
            )
        else:
            fits.append((result, part))
    return fits, tuple(absent)


def _single(response: str, unit: str | None, quantity: ChartQuantity, found: tuple[_Fits, _Absent]) -> Series:
    fits, absent = found
    points: list[Point] = []
    without: list[tuple[str, str]] = []
    for result, part in fits:
        value = _mean(result, part) if quantity == "lot-mean" else _scatter(part)
        if value is None:
            without.append((result.lot, "no level of its run has two values"))
        else:
            points.append(Point(result.lot, result.run, result.started, value))
    return Series(response, unit, quantity, "", tuple(points), (*absent, *without))


def _mean(result: LotResult, part: Mapping[str, Any]) -> Fraction:
    own = [level for level in part["levels"] if level["level"] == result.lot]
    sums = [level["sums"] for level in own or part["levels"]]
    total = sum((Fraction(one["sum"]) for one in sums), Fraction(0))
    return total / sum(int(one["n"]) for one in sums)


def _scatter(part: Mapping[str, Any]) -> Fraction | None:
    sd = part["anova"]["residual_sd"]
    return None if sd is None else Fraction(sd)


def _differences(response: str, unit: str | None, fits: _Fits, absent: _Absent) -> Iterator[Series]:
    """A series for each difference to a reference, in the order of first appearance."""
    found: dict[str, list[Point]] = {}
    for result, part in fits:
        for name, row in _rows(result, part):
            ends = row["ci"]
            interval = None if ends is None else (ends[0], ends[1])
            point = Point(result.lot, result.run, result.started, Fraction(row["estimate"]), interval)
            points = found.setdefault(name, [])
            if not points or points[-1].run != result.run:  # the first family that has the difference counts
                points.append(point)
    for name, points in found.items():
        there = {point.run for point in points}
        without = tuple(
            (result.lot, "its run does not have this difference")
            for result, _ in fits
            if result.run not in there
        )
        yield Series(response, unit, "difference", name, tuple(points), (*absent, *without))


def _rows(result: LotResult, part: Mapping[str, Any]) -> Iterator[tuple[str, Mapping[str, Any]]]:
    """The rows of comparisons against a reference, each under the name of its series."""
    levels = {level["level"] for level in part["levels"]}
    for family in part.get("comparisons", ()):
        if family["kind"] != AGAINST:
            continue
        for row in family["rows"]:
            level = row["label"].removesuffix(f" - {family['against']}")
            if result.lot not in levels:
                yield row["label"], row
            elif level == result.lot:
                yield f"lot - {family['against']}", row
