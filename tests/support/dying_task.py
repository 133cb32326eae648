"""A task for other processes that kills the process on one of its inputs."""

import os


def ready() -> None:
    """Nothing to prepare."""


def double_or_die(number: int) -> int:
    """Twice the number; at 3 the process ends at once, as a crash would end it."""
    if number == 3:
        os._exit(1)
    return 2 * number
