"""Deviations that the dates of the measurements show: before the plan was fixed, or after the run."""

import re
from collections.abc import Iterator, Sequence
from datetime import UTC, date, datetime, timedelta

from assayfolio.findings_intake import Deviation
from assayfolio.observations.values import Observation, Observations
from assayfolio.study.plan import MeasurementFact, StudyDefinition

_DAY = re.compile(r"\d{4}-\d{2}-\d{2}", re.ASCII)
_MOMENT = re.compile(r"\d{4}-\d{2}-\d{2}[T ]\d{2}:\d{2}(?::\d{2}(?:\.\d+)?)?(?:Z|[+-]\d{2}:\d{2})?", re.ASCII)
_ONE_ZONE = timedelta(
    hours=14
)  # the local day of a measurement may begin that long before or after the UTC day


def date_deviations(
    study: StudyDefinition, observations: Sequence[Observations], registered: str | None, run: str
) -> tuple[Deviation, ...]:
    """Measurements dated before `registered`, the time the plan was registered, or after `run`, its start.

    Times are RFC 3339 in UTC. The dates are those of the plan's `measurement.measured-at`, a text or a
    column; what is no ISO date is named once, since it cannot be compared. A date without a zone counts as
    out of order only where it is so in every time zone. `registered` is None where no plan was.
    """
    fact = next((one for one in study.measurement if one.key == "measured-at"), None)
    if fact is None or not observations:
        return ()
    return tuple(_found(fact, observations[0], registered, run))


def _found(
    fact: MeasurementFact, observed: Observations, registered: str | None, run: str
) -> Iterator[Deviation]:
    dated = list(_dates(fact, observed))
    unclear = sorted({text for text, _ in dated if _span(text) is None})
    if unclear:
        more = f" and {len(unclear) - 1} more" if len(unclear) > 1 else ""
        what = f"measured-at: {unclear[0]!r}{more} cannot be compared with the dates of plan and run"
        yield Deviation(what, "dates: not an ISO date such as 2031-03-04", lines=_lines(dated, set(unclear)))
    early, late = set(), set()
    for text, _ in dated:
        span = _span(text)
        if span is not None and registered is not None and span[1] < datetime.fromisoformat(registered):
            early.add(text)
        if span is not None and span[0] > datetime.fromisoformat(run):
            late.add(text)
    if early and registered is not None:
        what = f"measured before the plan was registered on {registered[:10]}: {_named(early)}"
        yield Deviation(what, "dates: measured-at", lines=_lines(dated, early))
    if late:
        what = f"measured after the run that reports it began, on {run[:10]}: {_named(late)}"
        yield Deviation(what, "dates: measured-at", lines=_lines(dated, late))


def _named(texts: set[str]) -> str:
    listed = sorted(texts)
    return listed[0] if len(listed) == 1 else f"{listed[0]} to {listed[-1]}"


def _dates(fact: MeasurementFact, observed: Observations) -> Iterator[tuple[str, int]]:
    """Each date as typed, with the line it stands on; 0 where it is a text of the plan."""
    if fact.text is not None:
        yield fact.text, 0
    elif fact.column in observed.extra_columns:
        at = observed.extra_columns.index(fact.column)
        for row in observed.rows:
            for one in row.repeats or (row,):
                yield from _cell(one, at)


def _cell(row: Observation, at: int) -> Iterator[tuple[str, int]]:
    text = row.extras[at].strip() if at < len(row.extras) else ""
    if text:
        yield text, row.line


def _lines(dated: Sequence[tuple[str, int]], texts: set[str]) -> tuple[int, ...]:
    return tuple(line for text, line in dated if line and text in texts)


def _span(text: str) -> tuple[datetime, datetime] | None:
    """The earliest and the latest moment that a date can mean; None where it is no ISO date."""
    try:
        if _DAY.fullmatch(text):
            day = datetime.combine(date.fromisoformat(text), datetime.min.time(), UTC)
            return day - _ONE_ZONE, day + timedelta(days=1) + _ONE_ZONE
        if _MOMENT.fullmatch(text):
            moment = datetime.fromisoformat(text)
            if moment.tzinfo is not None:
                return moment, moment
            return moment.replace(tzinfo=UTC) - _ONE_ZONE, moment.replace(tzinfo=UTC) + _ONE_ZONE
    except (ValueError, OverflowError):
        return None
    return None
