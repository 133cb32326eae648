"""The printed block as objects of the PDF: a form with its own embedded font."""

from typing import Any

from assayfolio.evidence.signing.block import SubsetFont, drawing, subset_font, to_unicode
from assayfolio.evidence.signing.statement import Statement, block_paragraphs

_FONT_NAME = "/SIGNED+Inter-Regular"


def stamp_style(statement: Statement) -> Any:
    """The signing library's style object that draws the block of `statement`."""
    from pyhanko.stamp import BaseStampStyle

    class Style(BaseStampStyle):
        """Makes the one appearance."""

        def create_stamp(self, writer: Any, box: Any, text_params: Any) -> Any:  # noqa: ARG002
            return _Stamp(writer, statement)

    return Style()


class _Stamp:
    """Puts the block into the annotation of a signature field."""

    def __init__(self, writer: Any, statement: Statement) -> None:
        self._writer, self._statement = writer, statement

    def apply_appearance(self, annotation: Any) -> None:
        """Make the block the annotation's only appearance."""
        left, bottom, right, top = (float(end) for end in annotation["/Rect"])
        annotation[_object("/AP")] = _object({"/N": self._form(right - left, top - bottom)})

    def _form(self, width: float, height: float) -> Any:
        paragraphs = block_paragraphs(self._statement)
        font = subset_font("".join(paragraphs))
        entries = {
            "/Type": "/XObject",
            "/Subtype": "/Form",
            "/BBox": [0, 0, width, height],
            "/Resources": {"/Font": {"/F0": add_font(self._writer, font)}},
        }
        content = drawing(paragraphs, font, width, height)
        return self._writer.add_object(_stream(content, entries))


def _object(value: Any) -> Any:
    """A plain value as an object of the PDF library; texts that begin with a slash are names."""
    from pyhanko.pdf_utils import generic

    made: Any = generic
    if isinstance(value, dict):
        return made.DictionaryObject({_object(key): _object(entry) for key, entry in value.items()})
    if isinstance(value, list):
        return made.ArrayObject([_object(entry) for entry in value])
    if isinstance(value, float):
        return made.FloatObject(f"{value:.4f}")
    if isinstance(value, int):
        return made.NumberObject(value)
    if isinstance(value, str):
        return made.NameObject(value) if value.startswith("/") else made.TextStringObject(value)
    return value


def _stream(content: bytes, entries: dict[str, Any]) -> Any:
    """A compressed stream with these entries in its dictionary."""
    from pyhanko.pdf_utils.generic import StreamObject

    stream: Any = StreamObject(stream_data=content)
    stream.compress()
    for key, value in entries.items():
        stream[_object(key)] = _object(value)
    return stream


def add_font(writer: Any, font: SubsetFont) -> Any:
    """Add `font` as a composite font with glyphs by number (ISO 32000-1, 9.7); its reference."""
    program = _stream(font.program, {"/Length1": len(font.program)})
    descriptor = {
        "/Type": "/FontDescriptor",
        "/FontName": _FONT_NAME,
        "/Flags": 4,
        "/FontBBox": list(font.box),
        "/ItalicAngle": 0,
        "/Ascent": font.ascent,
        "/Descent": font.descent,
        "/CapHeight": font.cap_height,
        "/StemV": 80,
        "/FontFile2": writer.add_object(program),
    }
    widths: list[Any] = []
    for glyph, advance in sorted({(font.glyph_of[c], font.advance[c]) for c in font.glyph_of}):
        widths.extend((glyph, [advance]))
    descendant = {
        "/Type": "/Font",
        "/Subtype": "/CIDFontType2",
        "/BaseFont": _FONT_NAME,
        "/CIDSystemInfo": {"/Registry": "Adobe", "/Ordering": "Identity", "/Supplement": 0},
        "/FontDescriptor": writer.add_object(_object(descriptor)),
        "/W": widths,
        "/CIDToGIDMap": "/Identity",
    }
    composite = {
        "/Type": "/Font",
        "/Subtype": "/Type0",
        "/BaseFont": _FONT_NAME,
        "/Encoding": "/Identity-H",
        "/DescendantFonts": [writer.add_object(_object(descendant))],
        "/ToUnicode": writer.add_object(_stream(to_unicode(font), {})),
    }
    return writer.add_object(_object(composite))
