"""Findings about what was received: counts, exclusions, values beyond a limit, deviations from the plan."""

from dataclasses import dataclass
from fractions import Fraction


@dataclass(frozen=True, slots=True)
class FlowFindings:
    """The counts of one level from received to analysed.

    received - missing - below_limit - above_limit - excluded - merged = analysed. `below_limit` and
    `above_limit` count what was omitted as beyond a limit; what was replaced is analysed. `merged` is by how
    many averaging repeats made the values fewer.
    """

    level: str
    received: int
    missing: int
    below_limit: int
    above_limit: int
    excluded: int
    merged: int
    analysed: int


@dataclass(frozen=True, slots=True)
class ExclusionFindings:
    """One value that a person left out: where it stands, its text, the number (None: none), who and why."""

    response: str
    file: str
    line: int
    level: str
    text: str
    value: Fraction | None
    reason: str
    decided_by: str
    decided_at: str
    approved_by: str | None


@dataclass(frozen=True, slots=True)
class CensoredLevel:
    """How many received values of a level, exclusions apart, lie below and above a limit; the limits, rising.

    Repeats count one by one.
    """

    level: str
    received: int
    below: int
    above: int
    below_limits: tuple[Fraction, ...]
    above_limits: tuple[Fraction, ...]


@dataclass(frozen=True, slots=True)
class PolicyRow:
    """One comparison under a policy, test of equivalence or ratio of variances."""

    label: str
    estimate: Fraction
    p_adjusted: float
    verdict: str


@dataclass(frozen=True, slots=True)
class PolicyFamily:
    """A family of such rows under a policy; `name` is empty for the ratios of variances."""

    name: str
    rows: tuple[PolicyRow, ...]


@dataclass(frozen=True, slots=True)
class PolicyFindings:
    """The result under one policy for values below a limit, the rest as planned.

    `levels` holds level, number of values and mean; `p` and what follows are those of the planned overall
    test, None where it is not assessable. `criteria` are the verdicts on the criteria, in the plan's order.
    """

    policy: str
    planned: bool
    levels: tuple[tuple[str, int, Fraction], ...]
    p: float | None
    p_adjusted: float | None
    verdict: str
    comparisons: tuple[PolicyFamily, ...]
    equivalence: tuple[PolicyFamily, ...]
    spread: PolicyFamily | None
    criteria: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class CensoringFindings:
    """Values beyond a limit: the planned policies, the counts, and the result under each policy.

    `levels` holds the levels that have such values. `sensitivity` is empty where none lies below a limit; a
    policy under which no analysis is possible is left out, with its reason among what is not reported.
    `verdicts_agree` says whether every planned verdict is the same under all of it.
    """

    below_limit: str
    above_limit: str
    below: int
    above: int
    levels: tuple[CensoredLevel, ...]
    sensitivity: tuple[PolicyFindings, ...]
    verdicts_agree: bool


@dataclass(frozen=True, slots=True)
class Deviation:
    """Something that was not done as planned, and what is on record about it.

    `lines` are those of the data that show it, empty where no single line does.
    """

    what: str
    reason: str
    response: str | None = None
    lines: tuple[int, ...] = ()
