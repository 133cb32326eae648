"""The clock, the person and the machine: read here and nowhere else, and passed down as values."""

import os
import pwd
import socket
from dataclasses import dataclass
from datetime import UTC, datetime


@dataclass(frozen=True, slots=True)
class Surroundings:
    """Who started the work, on which machine, and when (RFC 3339, UTC and local with offset)."""

    actor: str
    host: str
    started_utc: str
    started_local: str


def look_around() -> Surroundings:
    """Read the clock, the operating system's account and the host name, once.

    The account comes from the operating system, not from an environment variable or an option.
    """
    now = datetime.now(UTC)
    return Surroundings(account_name(), socket.gethostname(), _utc_text(now), now.astimezone().isoformat())


def account_name() -> str:
    """The operating system's name for the account that runs this process."""
    uid = os.geteuid()
    try:
        return pwd.getpwuid(uid).pw_name
    except KeyError:
        return f"uid-{uid}"


def utc_now() -> str:
    """The present time by this computer's clock: RFC 3339, UTC, microseconds."""
    return _utc_text(datetime.now(UTC))


def _utc_text(moment: datetime) -> str:
    return moment.strftime("%Y-%m-%dT%H:%M:%S.%fZ")
