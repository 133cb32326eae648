"""A folio as the register looks at it: whether it is as it was sealed, and what it says.

The look covers every file of the folio against its manifests and the seal of the audit trail. Signatures and
what else verification checks are not looked at. Nothing is taken from a folio that is not as it was sealed.
"""

import os
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from assayfolio.canonical import sha256_hex
from assayfolio.evidence import package_checks
from assayfolio.evidence.files import read_regular
from assayfolio.evidence.folio_reading import FolioReading, read_folio
from assayfolio.evidence.manifest import BAG_INFO_FILE, TAG_MANIFEST_FILE
from assayfolio.evidence.outcomes import Tally
from assayfolio.evidence.strict_json import NotCanonicalError, parse_json
from assayfolio.pages.values import CHANGED, MISSING, NOT_READABLE, NOT_SEALED, UNCHANGED

FINDINGS_FILE = "data/findings.json"
_TITLE = "External-Description: "
_CHECKS = (
    package_checks.check_declaration,
    package_checks.check_tag_manifest,
    package_checks.check_manifest,
    package_checks.check_payload,
    package_checks.check_extras,
    package_checks.check_oxum,
)
_MOST_NOTES = 5


@dataclass(frozen=True, slots=True)
class FolioLook:
    """What a look at a folio found: its result in a word of the pages, notes, and what the folio says.

    `title`, `run` and `findings` are empty where the folio is not as it was sealed; `files` are the paths
    that lie in it.
    """

    result: str
    notes: tuple[str, ...] = ()
    title: str = ""
    run: Mapping[str, Any] | None = None
    findings: Mapping[str, Any] | None = None
    files: frozenset[str] = frozenset()


def look_at_folio(folder: Path, seal: str | None) -> FolioLook:
    """Look at the folio in `folder`, which the audit trail has sealed with `seal` (None: it has not)."""
    if seal is None:
        return FolioLook(NOT_SEALED)
    if not os.path.lexists(folder):
        return FolioLook(MISSING, ("the audit trail has its seal, and it is not there",))
    if folder.is_symlink() or not folder.is_dir():
        return FolioLook(CHANGED, ("something else stands in its place",))
    reading = read_folio(folder, None, "")
    tally = Tally()
    for check in _CHECKS:
        check(reading, tally)
    tag_manifest = reading.contents.get(TAG_MANIFEST_FILE)
    if tag_manifest is not None and sha256_hex(tag_manifest) != seal:
        tally.failed.append(f"{TAG_MANIFEST_FILE} is not what the audit trail has the seal of")
    files = frozenset(reading.inventory.files)
    if tally.failed:
        return FolioLook(CHANGED, _first(tally.failed), files=files)
    if tally.unchecked:
        return FolioLook(NOT_READABLE, _first(tally.unchecked), files=files)
    return FolioLook(UNCHANGED, (), _title(reading), reading.run, _findings(folder, reading), files)


def _first(notes: list[str]) -> tuple[str, ...]:
    listed = list(dict.fromkeys(notes))
    more = len(listed) - _MOST_NOTES
    return (*listed[:_MOST_NOTES], *([f"and {more} more"] if more > 0 else []))


def _title(reading: FolioReading) -> str:
    text = reading.contents.get(BAG_INFO_FILE, b"").decode("utf-8", "replace")
    found = (line.removeprefix(_TITLE) for line in text.split("\n") if line.startswith(_TITLE))
    return next(found, "")


def _findings(folder: Path, reading: FolioReading) -> Mapping[str, Any] | None:
    file = reading.file(FINDINGS_FILE)
    if file is None:
        return None  # a run that failed
    try:
        content = read_regular(folder / FINDINGS_FILE)
        value: Any = parse_json(content)
    except (OSError, NotCanonicalError):
        return None
    same = sha256_hex(content) == file.sha256
    return value if same and isinstance(value, dict) else None
