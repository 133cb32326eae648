"""What a call of `assayfolio index` did, in words for people and as a document for programs."""

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

from assayfolio.canonical import Json
from assayfolio.errors import ExitCode
from assayfolio.evidence.entries import TrailHead

_MOST_NAMED = 20


@dataclass(frozen=True, slots=True)
class IndexOutcome:
    """All runs, those looked at, files written; lines of the trail that are not orderly; troubled folios.

    `troubled` names every run whose folio is not as it was sealed, with what it is.
    """

    index: Path
    head: TrailHead
    rebuilt: bool
    runs: int
    looked_at: int
    written: int
    faults: int
    troubled: tuple[tuple[str, str], ...]

    @property
    def exit_code(self) -> ExitCode:
        """FINDING where the trail or a folio is not as it should be."""
        return ExitCode.FINDING if self.faults or self.troubled else ExitCode.DONE

    def lines(self) -> list[str]:
        """For people."""
        how = "built from everything" if self.rebuilt else "brought up to date"
        listed = [f"{subject}: the folio is {words}" for subject, words in self.troubled[:_MOST_NAMED]]
        if len(self.troubled) > len(listed):
            listed.append(f"and {len(self.troubled) - len(listed)} more such folios")
        if self.faults:
            lines = "1 line of the audit trail is" if self.faults == 1 else f"{self.faults} lines of it are"
            listed.append(f"{lines} not as an orderly writer leaves them; `assayfolio verify` says more")
        counts = f"{self.runs} runs, {self.looked_at} looked at, {self.written} files written"
        return [*listed, f"Register  {self.index}", f"{how} to entry {self.head.seq}: {counts}"]

    def document(self) -> Mapping[str, Json]:
        """For programs."""
        return {
            "exit_code": int(self.exit_code),
            "index": str(self.index),
            "head": {"seq": self.head.seq, "sha256": self.head.sha256},
            "rebuilt": self.rebuilt,
            "runs": self.runs,
            "looked_at": self.looked_at,
            "written": self.written,
            "trail_faults": self.faults,
            "folios": [{"run": subject, "result": words} for subject, words in self.troubled],
        }
