"""The names of the register's pages among the folios, so that verification knows them for what they are.

The pages are derived and no evidence. What else lies in their folder is noted, and so is a register that is
older than the audit trail or was built from another one.
"""

import os
import re
from collections.abc import Iterator
from pathlib import Path

from assayfolio.canonical import canonical_bytes
from assayfolio.evidence.entries import TrailHead, TrailReading, is_digest
from assayfolio.evidence.files import plain_reason, read_regular
from assayfolio.evidence.inventory import shown
from assayfolio.evidence.strict_json import NotCanonicalError, parse_canonical

INDEX_FILE = "index.html"
REGISTER_FOLDER = "_register"
STANDS_FILE = "head.json"
MEMORY_FILE = "memory.sqlite"
LOCK = "pages"

_PAGE = re.compile(
    r"register\.(?:css|js)|fonts/(?:Inter-(?:Regular|SemiBold)\.ttf|OFL\.txt)"
    r"|data/(?:head|contents|runs-[0-9]{4,})\.js"
    r"|studies/[A-Z0-9][A-Z0-9-]{0,39}/(?:(?:index|run-[0-9]{4,})\.html|(?:contents|runs-[0-9]{4,})\.js)"
    rf"|{re.escape(STANDS_FILE)}",
    re.ASCII,
)
_KEPT = frozenset({MEMORY_FILE, f"{MEMORY_FILE}-journal", f".{LOCK}.lock"})
_MOST_NAMED = 10


def is_page(path: str) -> bool:
    """Whether a path below the register's folder is one of a page or of what pages load."""
    return _PAGE.fullmatch(path) is not None


def stands_bytes(head: TrailHead) -> bytes:
    """The file that says up to which entry of the trail the register tells."""
    return canonical_bytes({"seq": head.seq, "sha256": head.sha256}) + b"\n"


def register_remarks(runs: Path, reading: TrailReading) -> list[str]:
    """What is to be said of the register's folder: other files in it, and how it stands to the trail."""
    folder = runs / REGISTER_FOLDER
    strange = list(_strange(folder, ""))
    remarks = [f"{REGISTER_FOLDER}/{one}" for one in strange[:_MOST_NAMED]]
    if len(strange) > _MOST_NAMED:
        remarks.append(f"and {len(strange) - _MOST_NAMED} more such files in {REGISTER_FOLDER}")
    return [*remarks, *_standing(folder, reading)]


def files_of_register(folder: Path) -> Iterator[str]:
    """The paths of the pages that lie in the register's folder, and of what they load."""
    return (
        path for path, item in _items(folder, "") if item.is_file(follow_symlinks=False) and is_page(path)
    )


def _strange(folder: Path, prefix: str) -> Iterator[str]:
    try:
        for path, item in _items(folder, prefix):
            if item.is_symlink():
                yield f"{shown(path)} is a symbolic link; it is no evidence"
            elif path not in _KEPT and not is_page(path) and not _is_replacement(path):
                yield f"{shown(path)} lies there too; it is no evidence"
    except OSError as error:
        yield f"could not be listed: {plain_reason(error)}"


def _is_replacement(path: str) -> bool:
    """Whether a page was being written there when its writer was stopped."""
    above, _, name = path.rpartition("/")
    plain = name.removeprefix(".").removesuffix(".new")
    return name == f".{plain}.new" and is_page(f"{above}/{plain}" if above else plain)


def _items(folder: Path, prefix: str) -> Iterator[tuple[str, "os.DirEntry[str]"]]:
    with os.scandir(folder) as listing:
        found = sorted(listing, key=lambda item: item.name)
    for item in found:
        if item.is_dir(follow_symlinks=False):
            yield from _items(folder / item.name, f"{prefix}{item.name}/")
        else:
            yield f"{prefix}{item.name}", item


def _standing(folder: Path, reading: TrailReading) -> Iterator[str]:
    try:
        stands = parse_canonical(read_regular(folder / STANDS_FILE).removesuffix(b"\n"))
    except (OSError, NotCanonicalError):
        yield "the register's pages do not say how far they go; `assayfolio index --rebuild` makes them anew"
        return
    seq, digest = (stands.get(key) for key in ("seq", "sha256")) if isinstance(stands, dict) else (None, None)
    if not isinstance(seq, int) or not is_digest(digest) or seq > len(reading.digests):
        yield "the register's pages go further than the audit trail; `assayfolio index --rebuild` mends that"
    elif seq and reading.digests[seq - 1] != digest:
        yield (
            "the register's pages were made from another audit trail; "
            "`assayfolio index --rebuild` makes them anew"
        )
    elif seq < reading.last.seq:
        yield (
            f"the register's pages stand at entry {seq}, the audit trail at {reading.last.seq}; "
            "`assayfolio index` brings them up to date"
        )
