"""The program that runs, as a wheel (binary distribution format 1.0 of PyPA), made from its installed files.

The same installed files give the same bytes: entries sorted and dated 1980-01-01, stored without compression,
so that no version of a packing library has a share in the digest. What an installer adds (its own records,
compiled files, start scripts) is left out; installing the wheel makes it anew.
"""

import base64
import csv
import hashlib
import importlib.metadata
import io
import zipfile
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from pathlib import Path

_NAME = "assayfolio"
_ADDED_BY_INSTALLERS = frozenset({"RECORD", "INSTALLER", "REQUESTED", "direct_url.json"})
_PACKAGE = Path(__file__).resolve().parent.parent


@dataclass(frozen=True, slots=True)
class OwnWheel:
    """A wheel: its file name and its bytes."""

    name: str
    content: bytes


@cache
def own_wheel() -> OwnWheel | None:
    """The wheel of the program that runs; None where it is not installed, as in a source checkout."""
    try:
        distribution = importlib.metadata.distribution(_NAME)
    except importlib.metadata.PackageNotFoundError:
        return None
    if Path(str(distribution.locate_file(_NAME))).resolve() != _PACKAGE:
        return None  # another copy is installed than the one that runs
    files = dict(sorted(_installed_files(distribution).items()))
    metadata = next(name for name in files if name.endswith(".dist-info/METADATA"))
    folder = metadata.rpartition("/")[0]
    tags = [line for line in files[f"{folder}/WHEEL"].decode("utf-8").splitlines() if line.startswith("Tag:")]
    tag = tags[0].partition(":")[2].strip() if tags else "py3-none-any"
    record = f"{folder}/RECORD"
    content = _zipped({**files, record: _record(files, record)})
    return OwnWheel(f"{_NAME}-{distribution.version}-{tag}.whl", content)


def _installed_files(distribution: importlib.metadata.Distribution) -> dict[str, bytes]:
    found = {}
    for path in distribution.files or ():
        parts = path.parts
        inside = not path.is_absolute() and ".." not in parts and "__pycache__" not in parts
        added = parts[0].endswith(".dist-info") and path.name in _ADDED_BY_INSTALLERS
        if inside and not added and path.suffix != ".pyc":
            found[path.as_posix()] = Path(str(distribution.locate_file(path))).read_bytes()
    return found


def _record(files: Mapping[str, bytes], record: str) -> bytes:
    text = io.StringIO()
    rows = csv.writer(text, lineterminator="\n")
    for name, content in files.items():
        digest = base64.urlsafe_b64encode(hashlib.sha256(content).digest()).rstrip(b"=").decode("ascii")
        rows.writerow((name, f"sha256={digest}", len(content)))
    rows.writerow((record, "", ""))
    return text.getvalue().encode("utf-8")


def _zipped(files: Mapping[str, bytes]) -> bytes:
    packed = io.BytesIO()
    with zipfile.ZipFile(packed, "w", zipfile.ZIP_STORED) as archive:
        for name, content in files.items():
            entry = zipfile.ZipInfo(name, (1980, 1, 1, 0, 0, 0))
            entry.create_system = 3
            entry.external_attr = 0o100644 << 16
            archive.writestr(entry, content)
    return packed.getvalue()
