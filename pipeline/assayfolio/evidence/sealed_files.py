"""Reading single files of a sealed folio, each held against the seal that the audit trail has."""

from collections.abc import Iterable, Mapping
from pathlib import Path

from assayfolio.canonical import sha256_hex
from assayfolio.errors import ChangedError
from assayfolio.evidence.files import plain_reason, read_regular
from assayfolio.evidence.manifest import MANIFEST_FILE, TAG_MANIFEST_FILE, parse_manifest


def sealed_files(folio: Path, seal: str, paths: Iterable[str]) -> Mapping[str, bytes]:
    """The bytes of the files at `paths`, read once and unchanged since the folio was sealed with `seal`.

    The tag manifest has to have the seal as its digest, the manifest the digest that the tag manifest lists,
    each file the digest that the manifest lists; other files of the folio are not looked at. Raises
    ChangedError, saying which file is missing or changed.
    """
    tags = _read(folio, TAG_MANIFEST_FILE)
    if sha256_hex(tags) != seal:
        raise ChangedError(f"changed: the seal of {folio.name} is not the one in the audit trail")
    manifest = _listed(folio, MANIFEST_FILE, parse_manifest(tags).digests)
    digests = parse_manifest(manifest).digests
    return {path: _listed(folio, path, digests) for path in paths}


def _listed(folio: Path, path: str, digests: Mapping[str, str]) -> bytes:
    content = _read(folio, path)
    if sha256_hex(content) != digests.get(path):
        raise ChangedError(f"changed: {path} is not as it was sealed")
    return content


def _read(folio: Path, path: str) -> bytes:
    try:
        return read_regular(folio / path)
    except FileNotFoundError:
        raise ChangedError(f"missing: {path}") from None
    except OSError as error:
        raise ChangedError(f"{path} cannot be read: {plain_reason(error)}") from error
