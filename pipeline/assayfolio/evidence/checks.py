"""The numbered checks of one folio. Each is made whatever the others found, and has three outcomes.

3.1   bagit.txt declares BagIt 1.0 in UTF-8.
3.2   The tag manifest is well formed, lists the tag files, and these are there unchanged.
3.3   The manifest is well formed and lists files inside data/ only.
3.4   Every file that the manifest lists is there unchanged.
3.5   Nothing else is in the folder: no further file, empty folder, link or special file.
3.6   bag-info.txt states the number and bytes of the payload's files.
3.7   data/run.json can be read and agrees with the folder's name and place.
3.8   The digests in data/run.json are those of the inputs, the findings and the report.
3.9   The lines of data/trail.jsonl stand in the audit trail, byte for byte and in order, none left out.
3.10  The seal is the one in the audit trail.
3.11  The trail head that data/run.json was made under stands in the audit trail.
3.12  Outcome and digests in data/run.json are those that the audit trail holds.

Checks 3.1 to 3.8 need the folio alone; 3.9 to 3.12 need the workspace's trail and are "not checkable"
without one. What the trail itself is worth is for checks 1 and 2 (`verification`).
"""

from collections.abc import Callable
from dataclasses import dataclass, replace
from pathlib import Path

from assayfolio.evidence import package_checks, run_checks
from assayfolio.evidence.entries import TrailReading
from assayfolio.evidence.folio_reading import FolioReading, TrailIndex, read_folio
from assayfolio.evidence.inventory import Inventory, shown
from assayfolio.evidence.outcomes import CheckOutcome, Tally

OUTSIDE = "the folio lies outside any workspace, so there is no audit trail to compare it with"


@dataclass(frozen=True, slots=True)
class FolioCheck:
    """A check's number, what it states, and how it is made."""

    number: str
    title: str
    make: Callable[[FolioReading, Tally], None]


FOLIO_CHECKS = (
    FolioCheck("3.1", "bagit.txt declares BagIt 1.0", package_checks.check_declaration),
    FolioCheck("3.2", "tag files unchanged", package_checks.check_tag_manifest),
    FolioCheck("3.3", "manifest well formed", package_checks.check_manifest),
    FolioCheck("3.4", "payload files there and unchanged", package_checks.check_payload),
    FolioCheck("3.5", "nothing else in the folder", package_checks.check_extras),
    FolioCheck("3.6", "payload size as stated", package_checks.check_oxum),
    FolioCheck("3.7", "run record agrees with the folder's place", run_checks.check_place),
    FolioCheck("3.8", "run record agrees with the files", run_checks.check_digests),
    FolioCheck("3.9", "the run's entries stand in the audit trail", run_checks.check_entries),
    FolioCheck("3.10", "seal as in the audit trail", run_checks.check_seal),
    FolioCheck("3.11", "trail head at start stands in the audit trail", run_checks.check_head_at_start),
    FolioCheck("3.12", "run record agrees with the audit trail", run_checks.check_against_trail),
)


def verify_folio(folio: Path, reading: TrailReading | None) -> tuple[CheckOutcome, ...]:
    """Make checks 3.1 to 3.12 on the folder `folio`, against the trail of its workspace where there is one.

    The folder's name and its parent's name are taken for run and study. Never raises for what is found.
    """
    return check_folio(folio, TrailIndex(reading) if reading is not None else None, OUTSIDE)


def check_folio(
    folio: Path, trail: TrailIndex | None, no_trail: str, inventory: Inventory | None = None
) -> tuple[CheckOutcome, ...]:
    """The same with a ready index, and inventory where it was taken; `no_trail`: why there is no index."""
    subject = read_folio(folio, trail, no_trail, inventory)
    return _made(subject, subject.subject if trail is not None else shown(str(folio)))


def check_copy(folio: Path, trail: TrailIndex) -> tuple[CheckOutcome, ...]:
    """The same for a copy outside the workspace, held against the entries of the run that it names."""
    subject = read_folio(folio, trail, "")
    study, run = (subject.run.get(key) if subject.run else None for key in ("study", "run"))
    if isinstance(study, str) and isinstance(run, str):
        subject = replace(subject, study_folder=study, name=run)
    return _made(subject, shown(str(folio)))


def _made(subject: FolioReading, label: str) -> tuple[CheckOutcome, ...]:
    """Every check on one folio."""
    outcomes = []
    for check in FOLIO_CHECKS:
        tally = Tally()
        check.make(subject, tally)
        outcomes.append(tally.outcome(check.number, check.title, label))
    return tuple(outcomes)
