"""The numbered steps of a run: the same numbers in DEVELOPERS.md, the trail and the log."""

from collections.abc import Callable
from enum import IntEnum


class Step(IntEnum):
    """What a run does, in this order."""

    READ = 1
    ALLOT = 2
    SELF_CHECK = 3
    COMPUTE = 4
    RENDER = 5
    STAGE = 6
    SEAL = 7


Progress = Callable[[Step, str], None]
"""Told of every step as it is done: its number and what was done."""
