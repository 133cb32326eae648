"""What was read from a raw-data file: exact decimals, each with the line it stands on."""

from dataclasses import dataclass
from typing import Literal

from assayfolio.exact import Decimal10


@dataclass(frozen=True, slots=True)
class Observation:
    """One value: the line of the file it starts on, its level, the number, the text as typed.

    `extras` holds the cells of the other columns, in the order of `Observations.extra_columns`; `order` is
    the position in the measuring order, None where the plan names no column with it.
    """

    line: int
    level: str
    value: Decimal10
    text: str
    extras: tuple[str, ...] = ()
    order: int | None = None


@dataclass(frozen=True, slots=True)
class Observations:
    """One response of a raw-data file, read once: the bytes that were parsed are the bytes that were hashed.

    `levels` is in the order of the plan where the plan declares levels, else in order of first appearance.
    `rows` is in the order of the file. `extra_columns` are those that the plan does not name. `places` is
    the largest number of decimal places recorded.
    """

    file: str
    size: int
    sha256: str
    separator: Literal["comma", "semicolon", "tab"]
    byte_order_mark: bool
    response: str
    factor: str
    levels: tuple[str, ...]
    extra_columns: tuple[str, ...]
    rows: tuple[Observation, ...]

    @property
    def places(self) -> int:
        """The largest number of decimal places among the values."""
        return max((row.value.places for row in self.rows), default=0)

    def values_of(self, level: str) -> tuple[Decimal10, ...]:
        """The values of one level in the order of the file."""
        return tuple(row.value for row in self.rows if row.level == level)
