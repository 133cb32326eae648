"""What this computer's clock says of the moment of an entry, and how far that can be believed.

The time of day can be set; the counter since start-up cannot, so two entries of one start-up show by how much
the clock was moved between them. Whether the clock is kept by a time source is what the kernel says of it.
"""

import ctypes
import time
from collections.abc import Mapping
from datetime import UTC, datetime, timedelta
from pathlib import Path

from assayfolio.canonical import Json
from assayfolio.evidence.trail import TrailEntry

_BOOT_ID = Path("/proc/sys/kernel/random/boot_id")
# adjtimex(2): the answer 5 means that no time source keeps the clock; -1 that the question was refused.
_CLOCK_STATES = range(5)
_NOT_KEPT = 5
_TIMEX_BYTES = 512  # more than the structure takes on any platform


class EntryClock:
    """The clock for the entries of one opening of the trail: one reading an entry, told in two ways."""

    def __init__(self) -> None:
        self._moment = datetime.now(UTC)
        self._boot = _boot_id()

    def now(self) -> str:
        """Read the clock: RFC 3339, UTC, microseconds."""
        self._moment = datetime.now(UTC)
        return self._moment.strftime("%Y-%m-%dT%H:%M:%S.%fZ")

    def at(self, last: TrailEntry | None) -> Mapping[str, Json]:
        """What else is to be said of the moment that `now` gave last.

        `local` is the same moment with this computer's offset; `boot` and `monotonic_us` are the start-up and
        the microseconds since (time asleep counts); `synchronised` is None where the system does not tell;
        `behind_seconds` is there where the moment lies before the time of the entry `last`.
        """
        told: dict[str, Json] = {
            "local": self._moment.astimezone().isoformat(timespec="microseconds"),
            "boot": self._boot,
            "monotonic_us": _microseconds_since_start(),
            "synchronised": clock_is_synchronised(),
        }
        if last is not None:
            behind = datetime.fromisoformat(last.time) - self._moment
            if behind > timedelta(0):
                told["behind_seconds"] = behind.total_seconds()
        return told


def _boot_id() -> str | None:
    try:
        return _BOOT_ID.read_text("ascii").strip()
    except (OSError, ValueError):
        return None


def _microseconds_since_start() -> int:
    since_boot = getattr(time, "CLOCK_BOOTTIME", time.CLOCK_MONOTONIC)
    return time.clock_gettime_ns(since_boot) // 1000


def clock_is_synchronised() -> bool | None:
    """Whether a time source keeps this computer's clock, by its kernel; None where that cannot be asked."""
    try:
        ask = ctypes.CDLL(None, use_errno=True).adjtimex
    except (OSError, AttributeError):
        return None
    state = int(ask(ctypes.create_string_buffer(_TIMEX_BYTES)))
    if state == _NOT_KEPT:
        return False
    return True if state in _CLOCK_STATES else None
