"""What differs between two environment records, and which of it can move a line of a report."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any, Literal

from assayfolio.canonical import Json

Share = Literal["program", "renderer", "other"]

# Libraries that break lines, shape, subset and pack: another version of them may give other bytes.
RENDERER_PACKAGES = frozenset(
    {
        "brotli",
        "cssselect2",
        "fonttools",
        "jinja2",
        "markupsafe",
        "pillow",
        "pydyf",
        "pyphen",
        "tinycss2",
        "tinyhtml5",
        "weasyprint",
        "zopfli",
    }
)
RENDERER_LIBRARIES = (
    "libpango",
    "libharfbuzz",
    "libfontconfig",
    "libfreetype",
    "libglib",
    "libgobject",
    "libz",
)


@dataclass(frozen=True, slots=True)
class EnvironmentChange:
    """One thing that is another now: what it is, then and now, and what it has a share in.

    `share` is program for this program itself, renderer for what sets the report, other for the rest.
    """

    what: str
    old: str
    new: str
    share: Share

    @property
    def document(self) -> Mapping[str, Json]:
        """The change as the record holds it."""
        return {"what": self.what, "old": self.old, "new": self.new, "share": self.share}

    def __str__(self) -> str:
        """One line."""
        return f"{self.what}: {self.old} then, {self.new} now"


def environment_changes(old: Mapping[str, Any], new: Mapping[str, Any]) -> tuple[EnvironmentChange, ...]:
    """What differs between the archived record `old` and `new`.

    Settings, processor and kernel are left out: results and reports do not depend on them. Raises no error
    for what a record does not hold.
    """
    return (*_program(old, new), *_interpreter(old, new), *_packages(old, new), *_libraries(old, new))


def _at(record: Mapping[str, Any], *keys: str) -> Any:
    value: Any = record
    for key in keys:
        value = value.get(key) if isinstance(value, Mapping) else None
    return value


def _program(old: Mapping[str, Any], new: Mapping[str, Any]) -> Iterator[EnvironmentChange]:
    source = [_at(record, "own_files", "source_sha256") for record in (old, new)]
    if source[0] != source[1]:
        yield EnvironmentChange(
            "assayfolio, source", f"SHA-256 {_short(source[0])}", f"SHA-256 {_short(source[1])}", "program"
        )
    files = [_named(_at(record, "own_files", "data"), "file", "sha256") for record in (old, new)]
    for name in sorted({*files[0], *files[1]}):
        one, other = files[0].get(name), files[1].get(name)
        if one != other:
            yield EnvironmentChange(f"assayfolio, {name}", _digest(one), _digest(other), "program")


def _interpreter(old: Mapping[str, Any], new: Mapping[str, Any]) -> Iterator[EnvironmentChange]:
    facts: tuple[tuple[str, tuple[str, ...], Share], ...] = (
        ("interpreter", ("interpreter", "implementation"), "other"),
        ("interpreter's version", ("interpreter", "version"), "other"),
        ("interpreter's zlib", ("interpreter", "zlib", "running"), "renderer"),
        ("system", ("platform", "system"), "other"),
        ("C library", ("platform", "libc"), "other"),
        ("machine", ("platform", "machine"), "other"),
    )
    for what, keys, share in facts:
        one, other = _at(old, *keys), _at(new, *keys)
        if one != other:
            yield EnvironmentChange(what, str(one or "none"), str(other or "none"), share)


def _packages(old: Mapping[str, Any], new: Mapping[str, Any]) -> Iterator[EnvironmentChange]:
    versions = [_named(_at(record, "packages"), "name", "version") for record in (old, new)]
    for name in sorted({*versions[0], *versions[1]}):
        one, other = versions[0].get(name), versions[1].get(name)
        if one != other:
            share: Share = "program" if name == "assayfolio" else _share_of_package(name)
            yield EnvironmentChange(f"package {name}", one or "not there", other or "not there", share)


def _share_of_package(name: str) -> Share:
    return "renderer" if name in RENDERER_PACKAGES else "other"


def _libraries(old: Mapping[str, Any], new: Mapping[str, Any]) -> Iterator[EnvironmentChange]:
    found = [_rendering_libraries(_at(record, "native_libraries", "libraries")) for record in (old, new)]
    for name in sorted({*found[0], *found[1]}):
        one, other = found[0].get(name, "not there"), found[1].get(name, "not there")
        if one != other:
            yield EnvironmentChange(f"library {name}", one, other, "renderer")


def _rendering_libraries(listed: Any) -> dict[str, str]:
    """Name -> version and digest. The same version built again counts as another: its bytes are others."""
    found = {}
    for each in listed if isinstance(listed, list) else []:
        name = str(_at(each, "file")).partition(".so")[0].partition(".dylib")[0]
        if name.startswith(RENDERER_LIBRARIES):
            version = _at(each, "version")
            found[name] = f"{version + ', ' if version else ''}{_digest(_at(each, 'sha256'))}"
    return found


def _named(listed: Any, key: str, value: str) -> dict[str, str]:
    rows = listed if isinstance(listed, list) else []
    return {str(_at(row, key)): str(_at(row, value)) for row in rows}


def _digest(digest: Any) -> str:
    return f"SHA-256 {_short(digest)}" if digest else "not there"


def _short(digest: Any) -> str:
    return str(digest)[:16]
