"""What the register's pages are made with: templates, and the files that lie beside the pages as they are."""

from collections.abc import Mapping
from functools import cache
from importlib.resources import files

from assayfolio.canonical import canonical_digest, sha256_hex
from assayfolio.errors import RenderingError
from assayfolio.report.assets import template_folder
from assayfolio.version import VERSION

_FORMAT = 1
"""Raised when the memory or the order of a data file's cells changes."""

_FOLDER = "register"
_FONTS = ("Inter-Regular.ttf", "Inter-SemiBold.ttf", "OFL.txt")


@cache
def page_templates() -> Mapping[str, str]:
    """The templates by name. Raises RenderingError where they are missing."""
    return {name: content.decode("utf-8") for name, content in _contents().items() if name.endswith(".j2")}


@cache
def page_files() -> Mapping[str, bytes]:
    """The style sheet, the script and the fonts, by their path in the register's folder."""
    fonts = files("assayfolio") / "fonts"
    plain = {name: content for name, content in _contents().items() if not name.endswith(".j2")}
    return {**plain, **{f"fonts/{name}": (fonts / name).read_bytes() for name in _FONTS}}


def made_by(laboratory: str) -> str:
    """A digest of everything that pages depend on beside trail and folios."""
    return canonical_digest(
        {
            "format": _FORMAT,
            "version": VERSION,
            "laboratory": laboratory,
            "files": {name: sha256_hex(content) for name, content in _contents().items()},
        }
    )


@cache
def _contents() -> Mapping[str, bytes]:
    folder = template_folder() / _FOLDER
    found = {path.name: path.read_bytes() for path in sorted(folder.glob("*.*"))}
    if not found:
        raise RenderingError(f"the register's templates are missing: {folder}; install the package again")
    return found
