"""What a check of a signed report comes to: which statements hold, fail or cannot be checked."""

from collections.abc import Iterable
from dataclasses import dataclass, field
from typing import Literal

from assayfolio.evidence.outcomes import Outcome
from assayfolio.evidence.signing.statement import Statement

DocumentCheck = Literal[
    "begins with the unsigned report",
    "readable",
    "signatures and records match",
    "nothing after the last signature",
]
SignatureCheck = Literal[
    "readable",
    "intact",
    "covers its document",
    "adds only a signature",
    "certificate trusted",
    "certificate enrolled",
    "certificate valid when signed",
    "not revoked when signed",
    "time",
    "printed block",
    "record",
]


@dataclass(frozen=True, slots=True)
class Finding:
    """One check's outcome, with the words for it."""

    check: DocumentCheck | SignatureCheck
    outcome: Outcome
    words: str


@dataclass(frozen=True, slots=True)
class SignatureFindings:
    """What was found about one signature; `statement` is what it says of itself, None if unreadable."""

    number: int
    field: str
    statement: Statement | None
    certificate: str
    findings: tuple[Finding, ...]

    @property
    def outcome(self) -> Outcome:
        """The worst outcome among the findings."""
        return worst(self.findings)


@dataclass(frozen=True, slots=True)
class ReportFindings:
    """What was found about the document, then about each signature in the order of signing."""

    findings: tuple[Finding, ...]
    signatures: tuple[SignatureFindings, ...]

    @property
    def outcome(self) -> Outcome:
        """The worst outcome of all; a report without signatures that has no records passes."""
        return worst([*self.findings, *(each for found in self.signatures for each in found.findings)])

    @property
    def failures(self) -> tuple[str, ...]:
        """Every failed check in words, with the signature that it is about."""
        document = [f"{each.check}: {each.words}" for each in self.findings if each.outcome == "failed"]
        own = [
            f"signature {found.number} ({found.field}), {each.check}: {each.words}"
            for found in self.signatures
            for each in found.findings
            if each.outcome == "failed"
        ]
        return (*document, *own)


def worst(findings: Iterable[Finding]) -> Outcome:
    """`failed` if one failed, else `not checkable` if one could not be checked, else `passed`."""
    outcomes = {each.outcome for each in findings}
    return "failed" if "failed" in outcomes else "not checkable" if "not checkable" in outcomes else "passed"


@dataclass(slots=True)
class Gathered:
    """Findings as they come."""

    findings: list[Finding] = field(default_factory=list)

    def holds(self, check: DocumentCheck | SignatureCheck, words: str) -> None:
        """Add a check that passed."""
        self.findings.append(Finding(check, "passed", words))

    def fails(self, check: DocumentCheck | SignatureCheck, words: str) -> None:
        """Add a check that failed."""
        self.findings.append(Finding(check, "failed", words))

    def unknown(self, check: DocumentCheck | SignatureCheck, words: str) -> None:
        """Add a check that could not be made, with the reason."""
        self.findings.append(Finding(check, "not checkable", words))

    def conclude(self, check: SignatureCheck, problems: Iterable[str], words: str) -> None:
        """Fail with the problems if there are any, else pass with `words`."""
        listed = "; ".join(problems)
        if listed:
            self.fails(check, listed)
        else:
            self.holds(check, words)
