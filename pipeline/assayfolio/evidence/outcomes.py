"""What a check comes to: passed, failed, or not checkable, always with its reasons."""

from collections.abc import Iterable
from dataclasses import dataclass, field
from typing import Literal

from assayfolio.errors import ExitCode

Outcome = Literal["passed", "failed", "not checkable"]


@dataclass(frozen=True, slots=True)
class CheckOutcome:
    """One numbered check of one subject. `notes` name what was found, or why nothing could be said."""

    number: str
    title: str
    subject: str
    outcome: Outcome
    notes: tuple[str, ...]


@dataclass(slots=True)
class Tally:
    """What a check has gathered while it runs."""

    failed: list[str] = field(default_factory=list)
    unchecked: list[str] = field(default_factory=list)
    remarks: list[str] = field(default_factory=list)

    def outcome(self, number: str, title: str, subject: str) -> CheckOutcome:
        """The tally as an outcome: one finding fails it, else one gap makes it not checkable."""
        verdict: Outcome = "failed" if self.failed else "not checkable" if self.unchecked else "passed"
        return CheckOutcome(number, title, subject, verdict, (*self.failed, *self.unchecked, *self.remarks))


@dataclass(frozen=True, slots=True)
class Verification:
    """All outcomes, in the order of their numbers, runs sorted by study and number."""

    outcomes: tuple[CheckOutcome, ...]

    def with_outcome(self, outcome: Outcome) -> tuple[CheckOutcome, ...]:
        """The outcomes that came out so."""
        return tuple(each for each in self.outcomes if each.outcome == outcome)

    @property
    def exit_code(self) -> ExitCode:
        """FINDING if a check failed, else NOT_CHECKABLE if one could not be made, else DONE."""
        return exit_code_of(self.outcomes)


def exit_code_of(outcomes: Iterable[CheckOutcome]) -> ExitCode:
    """What a command that ends with these outcomes answers."""
    found = {each.outcome for each in outcomes}
    if "failed" in found:
        return ExitCode.FINDING
    return ExitCode.NOT_CHECKABLE if "not checkable" in found else ExitCode.DONE
