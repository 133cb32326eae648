"""What lies in a folio's `sign-off/`, and the entries of the audit trail that say what has to.

`report.pdf` is the sealed report with every signature so far. For each signature, by its number and field,
there are a record (`1-author.json`), the certificates from the signer's up to the anchor (`1-author.pem`),
and the revocation list of that moment (`1-author.crl`) where the laboratory's authority has one. A signature
is put together in `sign-off/.new`, entered as `signed` with the digest of every file, and moved into place.
"""

import os
import shutil
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from pathlib import Path

from assayfolio.canonical import sha256_hex
from assayfolio.evidence.entries import TrailEntry, is_digest
from assayfolio.evidence.files import explained, make_folder, read_regular, sync_folder, write_new
from assayfolio.evidence.signers import SIGNED_ENTRY

FOLDER = "sign-off"
STAGING = ".new"
REPORT = "report.pdf"
REPORTS: Mapping[str, str] = {"run": "data/report.pdf", "protocol": "data/protocol.pdf"}
"""The sealed report by the kind of the folio."""


@dataclass(frozen=True, slots=True)
class EnteredSignature:
    """One signature as its entry has it: who, in which field, with what, and the digests of its files.

    `report` is the digest of the signed report, `size` its length; `files` are the others by their names.
    """

    entry: TrailEntry
    number: int
    field: str
    role: str
    person: str
    certificate: str
    seal: str
    report: str
    size: int
    files: Mapping[str, str]


def entered_signature(entry: TrailEntry) -> EnteredSignature | None:
    """What a `signed` entry says; None for any other, and where it is malformed."""
    details = entry.details
    number, report, files = details.get("number"), details.get("report"), details.get("files")
    texts = {key: value for key in _TEXTS if isinstance(value := details.get(key), str)}
    if entry.action != SIGNED_ENTRY or set(texts) != set(_TEXTS):
        return None
    if not isinstance(number, int) or not isinstance(report, Mapping) or not isinstance(files, Mapping):
        return None
    digest, size = report.get("sha256"), report.get("bytes")
    digests = {name: str(value) for name, value in files.items() if is_digest(value)}
    if not is_digest(digest) or not isinstance(size, int) or set(digests) != set(files):
        return None
    if any("/" in name or name.startswith(".") for name in digests):
        return None
    return EnteredSignature(
        entry=entry,
        number=number,
        field=texts["field"],
        role=texts["role"],
        person=texts["person"],
        certificate=texts["certificate"],
        seal=texts["seal"],
        report=str(digest),
        size=size,
        files=digests,
    )


_TEXTS = ("field", "role", "person", "certificate", "seal")


def signatures_of(entries: Iterable[TrailEntry], subject: str) -> tuple[EnteredSignature, ...]:
    """The signatures that were entered for the folio `subject`, in their order."""
    found = (entered_signature(entry) for entry in entries if entry.subject == subject)
    return tuple(each for each in found if each is not None)


def expected_files(signatures: Iterable[EnteredSignature]) -> dict[str, str]:
    """The digest of every file that has to lie in `sign-off/`, by its name; none where nobody signed."""
    expected: dict[str, str] = {}
    for each in signatures:
        expected |= each.files
        expected[REPORT] = each.report
    return expected


def stage_signature(folio: Path, files: Mapping[str, bytes]) -> None:
    """Put the files of a new signature together; a leftover that was never entered is thrown away.

    Raises MachineError where the disk refuses; nothing that counts has been changed then.
    """
    staging = folio / FOLDER / STAGING
    discard_staged(folio)
    make_folder(staging)
    for name, content in sorted(files.items()):
        write_new(staging / name, content, 0o444)
    sync_folder(staging)


def discard_staged(folio: Path) -> None:
    """Throw away what a signing left that was interrupted before it was entered."""
    staging = folio / FOLDER / STAGING
    if os.path.lexists(staging):
        with explained("remove what an interrupted signing left", staging):
            shutil.rmtree(staging)
    with explained("look at the folder", folio / FOLDER):
        if (folio / FOLDER).is_dir() and not any((folio / FOLDER).iterdir()):
            (folio / FOLDER).rmdir()


def publish_signature(folio: Path) -> None:
    """Move the files of an entered signature into place, the report last.

    It may be interrupted at any point and done again. Raises MachineError where the disk refuses.
    """
    target, staging = folio / FOLDER, folio / FOLDER / STAGING
    names = sorted((path.name for path in staging.iterdir()), key=lambda name: (name == REPORT, name))
    for name in names:
        with explained("move the file into place", target / name):
            os.replace(staging / name, target / name)  # noqa: PTH105 - one plain system call
    with explained("remove the empty folder", staging):
        staging.rmdir()
    sync_folder(target)


def staged_as_entered(folio: Path, signatures: tuple[EnteredSignature, ...]) -> bool:
    """Whether what lies in `sign-off/.new` belongs to the newest entered signature, file by file."""
    if not signatures:
        return False
    wanted = {**signatures[-1].files, REPORT: signatures[-1].report}
    staged = _digests(folio / FOLDER / STAGING)
    placed = _digests(folio / FOLDER)
    whole = all(wanted[name] in (staged.get(name), placed.get(name)) for name in wanted)
    return whole and all(wanted.get(name) == digest for name, digest in staged.items())


def _digests(folder: Path) -> dict[str, str]:
    """The digest of each file in `folder`, as far as it can be read."""
    found = {}
    with explained("look at the folder", folder):
        paths = sorted(folder.iterdir()) if folder.is_dir() else []
    for path in paths:
        try:
            found[path.name] = sha256_hex(read_regular(path))
        except OSError:
            continue  # a folder, or something that this account may not read
    return found
