"""BagIt 1.0 (RFC 8493) in text: names that may stand in a folio, manifests, bag-info.txt; made and read.

What is made here satisfies the standard, `sha256sum -c` and the `bagit` package at once. The three differ on
names with a percent sign (the standard writes it as %25, the other two take the name as it stands) and on
blanks and unusual line breaks in names, so such names are refused when a folio is made.

Reading is strict: exactly the form that is written here, anything else is a fault with its line.
"""

import re
import unicodedata
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass

from assayfolio.errors import InputError

BAGIT_FILE = "bagit.txt"
BAG_INFO_FILE = "bag-info.txt"
MANIFEST_FILE = "manifest-sha256.txt"
TAG_MANIFEST_FILE = "tagmanifest-sha256.txt"
# What the tag manifest lists; its own digest, the seal, is kept in the audit trail.
TAG_FILES = (BAG_INFO_FILE, BAGIT_FILE, MANIFEST_FILE)
PAYLOAD_FOLDER = "data"
PAYLOAD_OXUM = "Payload-Oxum"

BAGIT_TEXT = b"BagIt-Version: 1.0\nTag-File-Character-Encoding: UTF-8\n"

_LINE = re.compile(r"([0-9a-f]{64})  (.+)", re.ASCII)
_OXUM = re.compile(r"(0|[1-9][0-9]*)\.(0|[1-9][0-9]*)", re.ASCII)
_REFUSED_CATEGORIES = frozenset({"Cc", "Cf", "Cs", "Zl", "Zp"})
_LONGEST_NAME = 255


def name_fault(path: str) -> str | None:
    """Why `path` (with "/" between its parts) cannot be a file's place in a folio; None where it can.

    Refused: absolute paths, empty parts, "." and "..", backslash, percent sign, control and invisible
    formatting characters, line and paragraph separators, bytes that are no UTF-8, blanks at either end of a
    part, parts of more than 255 bytes.
    """
    if path.startswith("/") or re.match(r"[A-Za-z]:", path):
        return "it is an absolute path"
    for part in path.split("/"):
        fault = _part_fault(part)
        if fault:
            return fault
    return None


def _part_fault(part: str) -> str | None:
    if part in ("", ".", ".."):
        return f'it has the part "{part}"'
    for character in part:
        if unicodedata.category(character) in _REFUSED_CATEGORIES:
            return f"it holds the unprintable character U+{ord(character):04X}"
        if character in "\\%":
            return f'it holds "{character}", which tools that check folders read differently'
    if part != part.strip():
        return "a part begins or ends with a blank"
    if len(part.encode("utf-8")) > _LONGEST_NAME:
        return f"a part is longer than {_LONGEST_NAME} bytes"
    return None


def _folded(path: str) -> str:
    """What a disk that ignores case and Unicode composition makes of a name."""
    return unicodedata.normalize("NFC", unicodedata.normalize("NFC", path).casefold())


def collisions(paths: Iterable[str]) -> tuple[str, ...]:
    """Pairs of paths that some disk cannot hold side by side, in words, in the order of the paths.

    Equal but for case or Unicode composition (also of a folder on the way), or a file where another path
    has a folder.
    """
    found: list[str] = []
    spelt: dict[str, str] = {}
    files: dict[str, str] = {}
    folders: dict[str, str] = {}
    for path in sorted(paths):
        parts = path.split("/")
        for length in range(1, len(parts) + 1):
            prefix = "/".join(parts[:length])
            other = spelt.setdefault(_folded(prefix), prefix)
            if other != prefix:
                found.append(f"{prefix} and {other} differ only in case or in how letters are composed")
                break
            (files if length == len(parts) else folders).setdefault(prefix, path)
    found.extend(
        f"{path} is a file, and {folders[path]} needs a folder there" for path in files if path in folders
    )
    return tuple(found)


def encode_path(path: str) -> str:
    """`path` as a manifest writes it: %, CR and LF percent-encoded, nothing else (RFC 8493, 2.1.3)."""
    return path.replace("%", "%25").replace("\r", "%0D").replace("\n", "%0A")


def decode_path(text: str) -> str:
    """The path that a manifest's text means. Raises ValueError for a "%" that encodes none of the three."""
    if re.search(r"%(?!25|0[AaDd])", text):
        raise ValueError("it has a % that stands for neither %, CR nor LF")
    decoded = re.sub(r"%0[Dd]", "\r", text)
    decoded = re.sub(r"%0[Aa]", "\n", decoded)
    return decoded.replace("%25", "%")


def manifest_bytes(digests: Mapping[str, str]) -> bytes:
    """A manifest of path -> SHA-256: one line a file, sorted by path, line feeds."""
    lines = (f"{digests[path]}  {encode_path(path)}\n" for path in sorted(digests))
    return "".join(lines).encode("utf-8")


@dataclass(frozen=True, slots=True)
class ManifestReading:
    """What a manifest lists (path -> SHA-256), and each thing wrong with its form, with its line."""

    digests: Mapping[str, str]
    faults: tuple[str, ...]


def parse_manifest(content: bytes) -> ManifestReading:
    """Read a manifest strictly. Unsafe paths are faults and are not among the digests."""
    try:
        text = content.decode("utf-8")
    except UnicodeDecodeError as error:
        return ManifestReading({}, (f"byte {error.start + 1} is not UTF-8",))
    *lines, rest = text.split("\n")
    faults: list[str] = []
    if not lines and not rest:
        faults.append("it is empty")
    digests: dict[str, str] = {}
    last = ""
    for number, line in enumerate(lines, start=1):
        path, digest, fault = _parse_line(line)
        if not fault and path in digests:
            fault = f"lists {path} a second time"
        if fault:
            faults.append(f"line {number} {fault}")
            continue
        if path < last:
            faults.append(f"line {number} is out of order")
        last = path
        digests[path] = digest
    if rest:
        faults.append(f"line {len(lines) + 1} has no line end")
    faults.extend(collisions(digests))
    return ManifestReading(digests, tuple(faults))


def _parse_line(line: str) -> tuple[str, str, str]:
    """Path, digest and fault of one line; the fault is empty for a good line."""
    if line.endswith("\r"):
        return "", "", "ends with a carriage return"
    matched = _LINE.fullmatch(line)
    if not matched:
        return "", "", "is not a SHA-256 (64 lower-case digits), two blanks and a path"
    digest, text = matched.groups()
    try:
        path = decode_path(text)
    except ValueError as error:
        return "", "", f"names an unreadable path: {error}"
    # A percent sign, CR or LF can stand in a folder that another BagIt program made.
    fault = name_fault(re.sub(r"[%\r\n]", "_", path))
    if fault:
        return "", "", f"names an unsafe path {path!r}: {fault}"
    return path, digest, ""


def bag_info_bytes(tags: Sequence[tuple[str, str]], sizes: Sequence[int]) -> bytes:
    """bag-info.txt: the given labels in their order, Payload-Oxum at the end.

    Runs of blanks and line breaks in a value become one blank. Raises InputError for a label or value that
    cannot stand there.
    """
    lines = []
    for label, raw in tags:
        value = " ".join(raw.split())
        unprintable = any(unicodedata.category(c) in ("Cc", "Cs", "Zl", "Zp") for c in label + value)
        if not label or not value or label != label.strip() or ":" in label or unprintable:
            raise InputError(f"{label!r}: {raw!r} cannot stand in {BAG_INFO_FILE}: empty or unprintable")
        if label.lower() == PAYLOAD_OXUM.lower():
            raise InputError(f"{PAYLOAD_OXUM} is counted, it cannot be given")
        lines.append(f"{label}: {value}\n")
    lines.append(f"{PAYLOAD_OXUM}: {sum(sizes)}.{len(sizes)}\n")
    return "".join(lines).encode("utf-8")


def parse_oxum(content: bytes) -> tuple[int, int]:
    """Bytes and number of payload files that bag-info.txt states. Raises ValueError with the reason."""
    try:
        lines = content.decode("utf-8").split("\n")
    except UnicodeDecodeError as error:
        raise ValueError(f"byte {error.start + 1} is not UTF-8") from None
    stated = [line for line in lines if line.lower().startswith(f"{PAYLOAD_OXUM.lower()}:")]
    if len(stated) != 1:
        raise ValueError(f"{PAYLOAD_OXUM} stands there {len(stated)} times")
    matched = _OXUM.fullmatch(stated[0].partition(":")[2].strip())
    if not matched:
        raise ValueError(f"{PAYLOAD_OXUM} is not <bytes>.<files>: {stated[0]!r}")
    return int(matched[1]), int(matched[2])
