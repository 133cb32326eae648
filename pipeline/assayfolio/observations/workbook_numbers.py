"""Numbers and dates of a spreadsheet as text: the shortest decimal of a double, and ISO 8601."""

import re
from datetime import datetime, time, timedelta

from assayfolio.observations.workbook_parts import Shown

MOST_DIGITS = 17
"""What a double needs at most; a stored number of more digits was written by something else than a double."""

_NUMBER = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d{1,6})?\Z", re.ASCII)


class NotTakenError(ValueError):
    """A stored number cannot be taken; the message says why, `advice` what to do."""

    def __init__(self, why: str, advice: str) -> None:
        super().__init__(why)
        self.advice = advice


def shortest(stored: str) -> str:
    """The shortest decimal that is the same double as `stored`: 0.1 for 0.10000000000000001, 12 for 12.0.

    Raises NotTakenError where `stored` is no number, has more digits than a double tells apart, or is beyond
    its range.
    """
    match = _NUMBER.match(stored)
    if match is None:
        raise NotTakenError("the stored number is none", "type it again")
    digits = match[1].replace(".", "").strip("0")
    if len(digits) > MOST_DIGITS:
        why = f"the number is stored with {len(digits)} digits, more than a spreadsheet's number holds"
        raise NotTakenError(why, "store it as text, or give the values as text (CSV)")
    number = float(stored)
    if abs(number) == float("inf") or (number == 0 and digits):
        raise NotTakenError(
            "the stored number is beyond the range of a spreadsheet's number", "type it again"
        )
    return repr(number).removesuffix(".0")


def moment(stored: str, shown: Shown, from_1904: bool) -> str:
    """The date, time of day or duration that `stored` counts in days, in ISO 8601.

    A date without a time of day is given alone unless the cell shows one.
    Raises NotTakenError where it is out of the calendar's range.
    """
    from openpyxl.utils.datetime import MAC_EPOCH, WINDOWS_EPOCH, from_excel

    epoch = MAC_EPOCH if from_1904 else WINDOWS_EPOCH
    try:
        found = from_excel(float(shortest(stored)), epoch, timedelta=shown == "duration")
    except (OverflowError, ValueError) as error:
        if isinstance(error, NotTakenError):
            raise
        raise NotTakenError("the date is out of the calendar's range", "type it again") from None
    if isinstance(found, timedelta):
        return _duration(found)
    if isinstance(found, datetime):
        if shown == "date" and found.time() == time():
            return found.date().isoformat()
        return found.isoformat(timespec="milliseconds" if found.microsecond else "seconds")
    if isinstance(found, time):
        return found.isoformat(timespec="milliseconds" if found.microsecond else "seconds")
    raise NotTakenError("the date is out of the calendar's range", "type it again")


def _duration(length: timedelta) -> str:
    """`length` in ISO 8601, as hours, minutes and seconds: PT36H30M0S."""
    sign = "-" if length < timedelta() else ""
    thousandths = abs(length) // timedelta(milliseconds=1)
    minutes, rest = divmod(thousandths, 60_000)
    hours, minutes = divmod(minutes, 60)
    seconds, rest = divmod(rest, 1000)
    return f"{sign}PT{hours}H{minutes}M{seconds}{f'.{rest:03}' if rest else ''}S"
