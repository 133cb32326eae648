"""Checks 3.1 to 3.6: the folio as a BagIt folder, by itself."""

from assayfolio.evidence.folio_reading import FolioReading, content_of
from assayfolio.evidence.inventory import shown
from assayfolio.evidence.manifest import (
    BAG_INFO_FILE,
    BAGIT_FILE,
    BAGIT_TEXT,
    MANIFEST_FILE,
    PAYLOAD_FOLDER,
    TAG_FILES,
    TAG_MANIFEST_FILE,
    parse_manifest,
    parse_oxum,
)
from assayfolio.evidence.outcomes import Tally

SIGN_OFF_FOLDER = "sign-off"
LABORATORY_FOLDER = "_laboratory"
_KNOWN_AT_TOP = frozenset({*TAG_FILES, TAG_MANIFEST_FILE})


def check_declaration(folio: FolioReading, tally: Tally) -> None:
    """Check 3.1: bagit.txt."""
    content = content_of(folio, BAGIT_FILE, tally)
    if content is not None and content != BAGIT_TEXT:
        tally.failed.append(f"changed: {BAGIT_FILE} does not declare BagIt 1.0 in UTF-8 as written here")


def compare(folio: FolioReading, path: str, digest: str, listing: str, tally: Tally) -> None:
    """Whether the file at `path` has the digest that `listing` gives it."""
    file = folio.file(path)
    if file is None:
        content_of(folio, path, tally)
    elif file.sha256 is None:
        tally.unchecked.append(f"{path} could not be read: {file.trouble}")
    elif file.sha256 != digest:
        tally.failed.append(f"changed: {path} has SHA-256 {file.sha256}, {listing} says {digest}")


def check_tag_manifest(folio: FolioReading, tally: Tally) -> None:
    """Check 3.2: the tag manifest and the files it lists."""
    content = content_of(folio, TAG_MANIFEST_FILE, tally)
    if content is None:
        return
    tags = parse_manifest(content)
    tally.failed.extend(f"{TAG_MANIFEST_FILE}: {fault}" for fault in tags.faults)
    for path in sorted({*tags.digests, *TAG_FILES}):
        if path not in TAG_FILES:
            tally.failed.append(f"{TAG_MANIFEST_FILE} lists {path}, which is no tag file of a folio")
        elif path not in tags.digests:
            tally.failed.append(f"{TAG_MANIFEST_FILE} does not list {path}")
        else:
            compare(folio, path, tags.digests[path], TAG_MANIFEST_FILE, tally)


def check_manifest(folio: FolioReading, tally: Tally) -> None:
    """Check 3.3: the form of the manifest."""
    content_of(folio, MANIFEST_FILE, tally)
    if folio.payload is None:
        return
    tally.failed.extend(f"{MANIFEST_FILE}: {fault}" for fault in folio.payload.faults)
    for path in folio.payload.digests:
        if not path.startswith(f"{PAYLOAD_FOLDER}/"):
            tally.failed.append(f"{MANIFEST_FILE} lists {path}, which is outside {PAYLOAD_FOLDER}/")


def check_payload(folio: FolioReading, tally: Tally) -> None:
    """Check 3.4: the files that the manifest lists."""
    if folio.payload is None:
        tally.unchecked.append(f"without {MANIFEST_FILE} nothing says what the files should be")
        return
    for path, digest in folio.payload.digests.items():
        if path.startswith(f"{PAYLOAD_FOLDER}/"):
            compare(folio, path, digest, MANIFEST_FILE, tally)


def check_extras(folio: FolioReading, tally: Tally) -> None:
    """Check 3.5: whatever else lies in the folder."""
    listed = folio.payload.digests if folio.payload else {}
    for path in folio.inventory.files:
        inside = path.startswith(f"{PAYLOAD_FOLDER}/")
        if (inside and (path in listed or folio.payload is None)) or path in _KNOWN_AT_TOP:
            continue
        if path.startswith(f"{SIGN_OFF_FOLDER}/") and folio.study_folder != LABORATORY_FOLDER:
            continue  # check 5.1 speaks of it
        tally.failed.append(f"extra file: {shown(path)}{_explain_extra(path)}")
    for path, kind in folio.inventory.oddities.items():
        tally.failed.append(f"{kind}: {shown(path)}")
    for path, why in folio.inventory.unlisted.items():
        tally.unchecked.append(f"{shown(path) or 'the folder'} could not be listed: {why}")
    if folio.payload is None:
        tally.unchecked.append(
            f"without {MANIFEST_FILE} nothing says which files belong in {PAYLOAD_FOLDER}/"
        )


def _explain_extra(path: str) -> str:
    if path.startswith(("manifest-", "tagmanifest-")):
        return ": a manifest of an algorithm that folios do not use"
    if path == "fetch.txt":
        return ": a folio holds all its files, none is to be fetched"
    if path.startswith(f"{PAYLOAD_FOLDER}/"):
        return f": {MANIFEST_FILE} does not list it"
    return ""


def check_oxum(folio: FolioReading, tally: Tally) -> None:
    """Check 3.6: number and bytes of the payload."""
    content = content_of(folio, BAG_INFO_FILE, tally)
    if content is None:
        return
    try:
        stated = parse_oxum(content)
    except ValueError as error:
        tally.failed.append(f"{BAG_INFO_FILE}: {error}")
        return
    payload = [file for path, file in folio.inventory.files.items() if path.startswith(f"{PAYLOAD_FOLDER}/")]
    if folio.inventory.unreadable:
        tally.unchecked.append(f"could not be read: {'; '.join(folio.inventory.unreadable)}")
        return
    found = sum(file.size for file in payload), len(payload)
    if stated != found:
        tally.failed.append(
            f"{BAG_INFO_FILE} states {stated[0]} bytes in {stated[1]} files, "
            f"{PAYLOAD_FOLDER}/ has {found[0]} bytes in {found[1]} files"
        )
