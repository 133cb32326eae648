"""What was read from raw-data files: exact decimals, each with the place it stands at."""

from dataclasses import dataclass
from typing import Literal

from assayfolio.exact import Decimal10
from assayfolio.observations.totals import Totals

Kind = Literal["measured", "below limit", "above limit", "mean of repeats"]
Cause = Literal["missing", "below limit", "above limit", "excluded"]
BelowLimit = Literal["omit", "half-limit", "limit"]


@dataclass(frozen=True, slots=True)
class RawFile:
    """One raw data file as read once: the bytes that were parsed are the bytes that were hashed.

    `separator` is None and `sheet` a name for a spreadsheet. `metadata` holds the cells of the rows above
    the header, `notices` what was met in reading that a person should know (a formula taken by its value).
    """

    file: str
    size: int
    sha256: str
    form: Literal["text", "gzip text", "spreadsheet"] = "text"
    separator: Literal["comma", "semicolon", "tab"] | None = "comma"
    encoding: str = "utf-8"
    byte_order_mark: bool = False
    sheet: str | None = None
    header_row: int = 1
    metadata: tuple[tuple[str, ...], ...] = ()
    notices: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Observation:
    """One value: the line of the file it starts on, its level, the number, the text as typed.

    `extras` holds the cells of the other columns, in the order of `Observations.extra_columns`; `order` its
    place in the measuring order where the plan names a column for it. `file` is the position of its file in
    `Observations.files`, `column` the column of the cell, from one. `kind` says how the number came about:
    measured, put in for a value beyond a limit as planned, or the mean of `repeats` (then `text` holds the
    texts of all, and `value` is the exact mean). `limit` is the limit that the value was reported against.
    """

    line: int
    level: str
    value: Decimal10
    text: str
    extras: tuple[str, ...] = ()
    order: int | None = None
    file: int = 0
    column: int = 1
    kind: Kind = "measured"
    repeats: tuple["Observation", ...] = ()
    limit: Decimal10 | None = None


@dataclass(frozen=True, slots=True)
class SetAside:
    """A row that was received and is not analysed: where it stands, its text, why.

    `value` is None where it has no number, and the limit where it was reported against one. For an exclusion
    `reason`, `decided_by`, `decided_at` and `approved_by` are those of the exclusions file.
    """

    file: int
    line: int
    level: str
    text: str
    cause: Cause
    value: Decimal10 | None = None
    reason: str = ""
    decided_by: str = ""
    decided_at: str = ""
    approved_by: str = ""


@dataclass(frozen=True, slots=True)
class CountFlow:
    """The counts of one level: `received` less what was set aside and merged is `analysed`; checked."""

    level: str
    received: int
    missing: int
    below_limit: int
    above_limit: int
    excluded: int
    merged: int
    analysed: int


@dataclass(frozen=True, slots=True)
class Observations:
    """The observations of one response.

    `levels` is in the order of the plan where the plan declares levels, else in order of first appearance.
    `rows` is what is analysed, in the order of the files. `with_excluded` is the same as if nothing had been
    excluded by a person (equal to `rows` where nothing was). `under_policies` holds what would be analysed
    under each policy for values below a limit; it is empty where none is, and has no half-limit where a limit
    is not above zero. `places` is the largest number of decimal places recorded.

    Where the values are too many to be kept, `totals` has what is known of them and `rows` is empty.
    """

    files: tuple[RawFile, ...]
    response: str
    factor: str
    levels: tuple[str, ...]
    extra_columns: tuple[str, ...]
    rows: tuple[Observation, ...]
    set_aside: tuple[SetAside, ...] = ()
    with_excluded: tuple[Observation, ...] = ()
    flow: tuple[CountFlow, ...] = ()
    under_policies: tuple[tuple[BelowLimit, tuple[Observation, ...]], ...] = ()
    totals: Totals | None = None

    @property
    def file(self) -> str:
        """The name of the data file, or of the first of several."""
        return self.files[0].file

    @property
    def places(self) -> int:
        """The largest number of decimal places among the values."""
        if self.totals is not None:
            return self.totals.places
        return max((row.value.places for row in self.rows), default=0)

    @property
    def n(self) -> int:
        """How many values are analysed."""
        return len(self.rows) if self.totals is None else self.totals.n

    def values_of(self, level: str) -> tuple[Decimal10, ...]:
        """The values of one level in the order of the file."""
        return tuple(row.value for row in self.rows if row.level == level)
