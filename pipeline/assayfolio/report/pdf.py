"""From HTML and pictures to one PDF file: tagged PDF/A-3a and PDF/UA-1, attachments, signature fields.

The bytes depend on the input alone: not on clock, folder, locale, time zone or the fonts of the machine.
Whatever the renderer complains about fails the rendering.
"""

import atexit
import gc
import io
import logging
import os
import tempfile
import threading
import warnings
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass
from datetime import UTC, datetime
from functools import lru_cache
from pathlib import Path
from typing import Any

from assayfolio.errors import RenderingError
from assayfolio.report.assets import stylesheet_text
from assayfolio.report.facts import AttachedFile
from assayfolio.report.fetching import font_faces, make_fetcher
from assayfolio.report.finishing import finish
from assayfolio.report.typeface import FAMILY, FIGURES_FAMILY

VARIANT = "pdf/a-3a"
_TEXT_WIDTH, _INNER_MARGIN = 164.0, 26.0
PAPERS = {"A4": (210.0, 297.0), "Letter": (215.9, 279.4)}  # width and height in millimetres
_FIRST_PAGE_MARGINS = 16.0 + 24.0
_NO_SYSTEM_FONTS = (
    '<?xml version="1.0"?>\n<!DOCTYPE fontconfig SYSTEM "urn:fontconfig:fonts.dtd">\n'
    '<fontconfig><cachedir prefix="xdg">fontconfig</cachedir></fontconfig>\n'
)
_RENDERER_LOGS = ("weasyprint", "fontTools", "pydyf")
_LOCK = threading.Lock()  # the font configuration is shared, and the environment is changed for a moment


@dataclass(frozen=True, slots=True)
class Look:
    """What a laboratory sets about the look of its reports."""

    paper: str
    accent: str


@dataclass(frozen=True, slots=True)
class LaidOut:
    """Pages that are laid out but not yet written, and whether the first page holds what it must."""

    document: Any
    first_page_fits: bool


class _Complaints(logging.Handler):
    """Keeps what the renderer logs at the level of a warning or above."""

    def __init__(self) -> None:
        super().__init__(logging.WARNING)
        self.lines: list[str] = []

    def emit(self, record: logging.LogRecord) -> None:
        """Keep the message of `record`."""
        self.lines.append(record.getMessage())


@contextmanager
def strict() -> Iterator[None]:
    """Everything inside that is logged or warned about by the renderer raises RenderingError at the end."""
    complaints = _Complaints()
    loggers = [logging.getLogger(name) for name in _RENDERER_LOGS]
    kept = [(logger, logger.propagate, logger.level) for logger in loggers]
    for logger in loggers:
        logger.addHandler(complaints)
        logger.propagate = False
        logger.setLevel(logging.WARNING)
    try:
        with warnings.catch_warnings(record=True) as caught:
            warnings.simplefilter("always")
            yield
    finally:
        for logger, propagate, level in kept:
            logger.removeHandler(complaints)
            logger.propagate = propagate
            logger.setLevel(level)
    lines = complaints.lines + [str(warning.message) for warning in caught if _matters(warning)]
    if lines:
        raise RenderingError(
            "the report could not be set exactly as written: " + "; ".join(dict.fromkeys(lines))
        )


def _matters(warning: warnings.WarningMessage) -> bool:
    """Whether a warning is about this document; notices to programmers are not."""
    return not issubclass(
        warning.category, DeprecationWarning | PendingDeprecationWarning | ImportWarning | ResourceWarning
    )


@contextmanager
def _no_system_fonts() -> Iterator[None]:
    """Inside, the font library finds no font of the machine; the environment is put back afterwards."""
    before = os.environ.get("FONTCONFIG_FILE")
    with tempfile.TemporaryDirectory(prefix="assayfolio-") as folder:
        path = Path(folder) / "fonts.conf"
        path.write_text(_NO_SYSTEM_FONTS, encoding="utf-8")
        os.environ["FONTCONFIG_FILE"] = str(path)
        try:
            with warnings.catch_warnings():
                # The renderer warns that there are no fonts yet; those of the report are added just after.
                warnings.filterwarnings("ignore", message="No fonts configured in FontConfig")
                yield
        finally:
            if before is None:
                del os.environ["FONTCONFIG_FILE"]
            else:
                os.environ["FONTCONFIG_FILE"] = before


def _require_subsetter() -> None:
    from weasyprint.pdf import fonts

    if not fonts.harfbuzz_subset or not fonts.harfbuzz.hb_version_atleast(4, 1, 0):
        raise RenderingError(
            "the library that subsets fonts is missing, so the same report would not give the same bytes; "
            "install HarfBuzz-Subset 4.1 or later (Debian: apt install libharfbuzz-subset0; Fedora: dnf "
            "install harfbuzz; Alpine: apk add harfbuzz-subset; macOS: brew install harfbuzz)"
        )


@lru_cache(maxsize=4)
def _styles(look: Look) -> tuple[Any, Any]:
    """The font configuration and the style sheet for one look, made once."""
    with _no_system_fonts():
        import weasyprint
        from weasyprint.text.fonts import FontConfiguration

        fonts = FontConfiguration()
        return fonts, weasyprint.CSS(string=_sheet(look), font_config=fonts, url_fetcher=make_fetcher({}))


def _sheet(look: Look) -> str:
    """The style sheet with the fonts and what the laboratory sets; the text is as wide on every paper."""
    width, height = PAPERS[look.paper]
    outer = width - _INNER_MARGIN - _TEXT_WIDTH
    return (
        f"{font_faces()}\n{stylesheet_text()}\n"
        f"@page {{ size: {look.paper}; margin-left: {_INNER_MARGIN}mm; margin-right: {outer:.1f}mm }}\n"
        f":root {{ --accent: {look.accent}; --cover-height: {height - _FIRST_PAGE_MARGINS:.1f}mm }}\n"
    )


def load(look: Look) -> tuple[Any, Any]:
    """The renderer's font configuration and style sheet for `look`; loads its libraries on first use.

    Raises RenderingError where the machine lacks a library.
    """
    try:
        loaded = _styles(look)
    except OSError as error:
        raise RenderingError(
            "the libraries that set text are missing (Debian: apt install libpango-1.0-0 libpangoft2-1.0-0 "
            f"libharfbuzz-subset0): {error}"
        ) from error
    _require_subsetter()
    return loaded


atexit.register(_styles.cache_clear)  # each look keeps a temporary folder with the fonts; let go of it


def lay_out(html: str, pictures: Mapping[str, bytes], look: Look) -> LaidOut:
    """The pages of `html`; `pictures` are SVG files by the name under which the HTML asks for them.

    Raises RenderingError for anything the renderer complains about, and where the machine lacks a library.
    """
    with _LOCK, strict(), _paused_collector():
        fonts, sheet = load(look)
        import weasyprint

        document = weasyprint.HTML(string=html, url_fetcher=make_fetcher(pictures)).render(
            stylesheets=[sheet], font_config=fonts, pdf_variant=VARIANT, pdf_forms=True
        )
        anchors = document.pages[0].anchors
        fits = "cover-end" in anchors and "cover-foot" in anchors
        fits = fits and anchors["cover-end"][1] + 6 <= anchors["cover-foot"][1]
        return LaidOut(document, fits)


def write(laid_out: LaidOut, attachments: tuple[AttachedFile, ...], moment: str) -> bytes:
    """The PDF file; attachments are sorted by name and dated `moment` (RFC 3339, UTC).

    Raises RenderingError for anything the renderer complains about, and for a glyph from another font.
    """
    from weasyprint import Attachment

    when = datetime.fromisoformat(moment).astimezone(UTC)
    attached = [
        Attachment(
            url=_data_url(file),
            url_fetcher=make_fetcher({}, {_data_url(file): (file.media_type, file.content)}),
            name=file.name,
            description=file.description,
            created=when,
            modified=when,
            relationship=file.relationship,
        )
        for file in sorted(attachments, key=lambda file: file.name)
    ]
    with _LOCK, strict(), _paused_collector():
        output = io.BytesIO()
        laid_out.document.write_pdf(
            output, finisher=finish, attachments=attached, pdf_variant=VARIANT, pdf_forms=True
        )
        _refuse_other_fonts(laid_out.document)
    return output.getvalue()


def _data_url(file: AttachedFile) -> str:
    return f"attachment:{file.name}"


def _refuse_other_fonts(document: Any) -> None:
    for font in document.fonts.values():
        if font.family.split(",")[0] not in (FAMILY, FIGURES_FAMILY):
            raise RenderingError(f"some text was set in {font.family}, which is not the report's font")
        if font.missing:
            named = ", ".join(f"U+{code:04X}" for code in sorted(font.missing))
            raise RenderingError(f"the report's font has no glyph for {named}")


@contextmanager
def _paused_collector() -> Iterator[None]:
    """Rendering makes very many objects that live until its end; looking for garbage among them is wasted."""
    running = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if running:
            gc.enable()
