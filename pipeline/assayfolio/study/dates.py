"""Dates and times as people sign with them."""

import re
from datetime import date

from assayfolio.study.faults import shown
from assayfolio.study.fields import Value, scalar

_EXPECTED = "a date such as 2031-03-04, or a time with its zone such as 2031-03-04T09:30:00+01:00"
_DATE = re.compile(r"(\d{4})-(\d{2})-(\d{2})", re.ASCII)
_TIME = re.compile(r"[Tt](\d{2}):(\d{2}):(\d{2})(?:\.\d+)?(?:[Zz]|[+-](\d{2}):(\d{2}))", re.ASCII)


def date_or_time(value: Value) -> str:
    """A day (`YYYY-MM-DD`) or a point in time (RFC 3339), as typed; it must exist in the calendar."""
    text = scalar(value, _EXPECTED).text
    day, rest = _DATE.match(text), text[10:]
    if day is None or (rest and not _is_time(rest)):
        raise value.unreadable(f"is {shown(text)}", _EXPECTED)
    try:
        date(int(day[1]), int(day[2]), int(day[3]))
    except ValueError:
        raise value.unreadable(f"is {shown(text)}, which is no day of the calendar", _EXPECTED) from None
    return text


def _is_time(text: str) -> bool:
    """Whether `text` is the part of a time from its T on; a minute may have 61 seconds (a leap second)."""
    time = _TIME.fullmatch(text)
    if time is None:
        return False
    hour, minute, second, zone_hour, zone_minute = (int(part or "0") for part in time.groups())
    return hour < 24 and minute < 60 and second <= 60 and zone_hour < 24 and zone_minute < 60
