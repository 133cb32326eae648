"""The clock, the person and the machine: read here and nowhere else, and passed down as values."""

import os
import pwd
import socket
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path


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


FIRST_PERSONAL_UID = 1000
"""Below it are the accounts of services, root's apart (common practice of Linux distributions, no source)."""

_LOGIN_UID = Path("/proc/self/loginuid")
_NOBODY_LOGGED_IN = 2**32 - 1


def account_name() -> str:
    """The operating system's name for the account that this process works for.

    It is the account that runs the process. A service's account works for whoever has logged in: the kernel
    keeps that from login on, whatever programs change the account (audit login identity), and gives nobody
    for a scheduled job.
    """
    uid = os.geteuid()
    if 0 < uid < FIRST_PERSONAL_UID:
        uid = _login_uid() or uid
    try:
        return pwd.getpwuid(uid).pw_name
    except KeyError:
        return f"uid-{uid}"


def _login_uid() -> int | None:
    try:
        uid = int(_LOGIN_UID.read_text("ascii"))
    except (OSError, ValueError):
        return None
    return None if uid == _NOBODY_LOGGED_IN else uid


def utc_now() -> str:
    """The present time by this computer's clock: RFC 3339, UTC, microseconds."""
    return _utc_text(datetime.now(UTC))


def _utc_text(moment: datetime) -> str:
    return moment.strftime("%Y-%m-%dT%H:%M:%S.%fZ")
