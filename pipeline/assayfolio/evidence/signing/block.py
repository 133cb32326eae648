"""The printed block of a signature: its lines, its font, and the content stream that shows them.

The font is a subset of the report's own, at 1000 units per em, so that widths in the PDF are whole numbers.
The same statement and box give the same bytes.
"""

import io
import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from assayfolio.evidence.signing.refusals import SigningRefusedError

_FONT_FILE = Path(__file__).resolve().parents[2] / "fonts" / "Inter-Regular.ttf"
_UNITS = 1000
_SIZES = (7.6, 7.2, 6.8, 6.4, 6.0, 5.6, 5.2, 4.8)
_LEADING = 1.24
_TOP = 1.5

_LINE = re.compile(r"BT /F0 ([0-9.]+) Tf 0 g 1 0 0 1 0 ([0-9.]+) Tm <((?:[0-9a-f]{4})+)> Tj ET")


@dataclass(frozen=True, slots=True)
class SubsetFont:
    """A TrueType font program with the characters asked for, and what a PDF says about it."""

    program: bytes
    glyph_of: Mapping[str, int]
    advance: Mapping[str, int]
    ascent: int
    descent: int
    cap_height: int
    box: tuple[int, int, int, int]


def subset_font(characters: str) -> SubsetFont:
    """The report's regular face with no more than `characters`; the same bytes for the same characters."""
    from fontTools.subset import Options, Subsetter
    from fontTools.ttLib import TTFont
    from fontTools.ttLib.scaleUpem import scale_upem

    options = Options()
    options.layout_features = []
    options.hinting = False
    options.name_IDs = [1, 2, 4, 6]
    options.notdef_outline = True
    with TTFont(_FONT_FILE, recalcTimestamp=False) as font:
        for table in ("GDEF", "GSUB", "GPOS"):  # reading them would take most of the time
            del font[table]
        subsetter = Subsetter(options)
        subsetter.populate(unicodes=sorted({ord(character) for character in characters}))
        subsetter.subset(font)
        if font["head"].unitsPerEm != _UNITS:
            scale_upem(font, _UNITS)
        output = io.BytesIO()
        font.save(output)
        cmap, order = font.getBestCmap(), font.getReverseGlyphMap()
        missing = sorted(set(characters) - {chr(code) for code in cmap})
        if missing:
            raise SigningRefusedError(f"the font of the block has no {', '.join(map(repr, missing))}")
        head = font["head"]
        return SubsetFont(
            program=output.getvalue(),
            glyph_of={chr(code): order[name] for code, name in sorted(cmap.items())},
            advance={chr(code): font["hmtx"][name][0] for code, name in sorted(cmap.items())},
            ascent=font["hhea"].ascent,
            descent=font["hhea"].descent,
            cap_height=font["OS/2"].sCapHeight,
            box=(head.xMin, head.yMin, head.xMax, head.yMax),
        )


def outlines(program: bytes) -> dict[int, tuple[int, tuple[Any, ...]]]:
    """Advance and drawn outline of every glyph of a TrueType font program, by glyph number.

    Raises whatever the font library does for a program that it cannot read.
    """
    from fontTools.pens.recordingPen import DecomposingRecordingPen
    from fontTools.ttLib import TTFont

    with TTFont(io.BytesIO(program), lazy=True) as font:
        glyphs, found = font.getGlyphSet(), {}
        for number, name in enumerate(font.getGlyphOrder()):
            pen = DecomposingRecordingPen(glyphs)
            glyphs[name].draw(pen)
            found[number] = (font["hmtx"][name][0], tuple(pen.value))
        return found


def drawing(paragraphs: Sequence[str], font: SubsetFont, width: float, height: float) -> bytes:
    """The content stream that shows `paragraphs` in a box of this size, as large as fits.

    Raises SigningRefusedError where they do not fit in the smallest size.
    """
    for size in _SIZES:
        lines = [line for text in paragraphs for line in _wrapped(text, font, size, width)]
        leading = size * _LEADING
        if len(lines) * leading <= height - _TOP:
            top = height - _TOP - font.cap_height * size / _UNITS
            shown = [_shown(line, font, size, top - place * leading) for place, line in enumerate(lines)]
            return "\n".join(shown).encode("ascii")
    raise SigningRefusedError("name and meaning are too long for the sign-off block")


def _shown(line: str, font: SubsetFont, size: float, bottom: float) -> str:
    glyphs = "".join(f"{font.glyph_of[character]:04x}" for character in line)
    return f"BT /F0 {size:g} Tf 0 g 1 0 0 1 0 {bottom:.2f} Tm <{glyphs}> Tj ET"


def _width(text: str, font: SubsetFont, size: float) -> float:
    return sum(font.advance[character] for character in text) * size / _UNITS


def _wrapped(text: str, font: SubsetFont, size: float, width: float) -> list[str]:
    """`text` in lines no wider than `width`; a word that is wider by itself is cut."""
    lines, line = [], ""
    for word in text.split(" "):
        longer = f"{line} {word}" if line else word
        if _width(longer, font, size) <= width:
            line = longer
            continue
        if line:
            lines.append(line)
        line = word
        while _width(line, font, size) > width and len(line) > 1:
            fits = max(n for n in range(1, len(line)) if n == 1 or _width(line[:n], font, size) <= width)
            lines.append(line[:fits])
            line = line[fits:]
    return [*lines, line]


def to_unicode(font: SubsetFont) -> bytes:
    """The character map that readers use to copy text out of the block (ISO 32000-1, 9.10.3)."""
    pairs = [f"<{glyph:04x}> <{_utf16(character)}>" for character, glyph in sorted(font.glyph_of.items())]
    blocks = [pairs[start : start + 100] for start in range(0, len(pairs), 100)]
    body = "\n".join(f"{len(block)} beginbfchar\n" + "\n".join(block) + "\nendbfchar" for block in blocks)
    return (
        "/CIDInit /ProcSet findresource begin\n12 dict begin\nbegincmap\n"
        "/CIDSystemInfo << /Registry (Adobe) /Ordering (UCS) /Supplement 0 >> def\n"
        "/CMapName /Adobe-Identity-UCS def\n/CMapType 2 def\n"
        "1 begincodespacerange\n<0000> <ffff>\nendcodespacerange\n"
        f"{body}\nendcmap\nCMapName currentdict /CMap defineresource pop\nend\nend"
    ).encode("ascii")


def _utf16(character: str) -> str:
    return character.encode("utf-16-be").hex()


def read_character_map(content: bytes) -> dict[int, str]:
    """Glyph number to text, from a map that `to_unicode` wrote. Raises ValueError for another kind."""
    found = {}
    pair = re.compile(r"<([0-9a-f]{4})> <((?:[0-9a-f]{4})+)>")
    body = content.decode("ascii")
    for block in re.findall(r"beginbfchar\n(.*?)\nendbfchar", body, re.DOTALL):
        for line in block.split("\n"):
            match = pair.fullmatch(line)
            if match is None:
                raise ValueError("the character map is not as this program writes it")
            found[int(match[1], 16)] = bytes.fromhex(match[2]).decode("utf-16-be")
    return found


def read_drawing(content: bytes) -> list[list[int]]:
    """The glyph numbers of each line of a content stream that `drawing` wrote.

    Raises ValueError for a stream that does anything else than show lines in black and in one of the sizes.
    """
    lines = []
    for row in content.decode("ascii").split("\n"):
        match = _LINE.fullmatch(row)
        if match is None or float(match[1]) not in _SIZES:
            raise ValueError("the printed block is not drawn as this program draws it")
        glyphs = match[3]
        lines.append([int(glyphs[place : place + 4], 16) for place in range(0, len(glyphs), 4)])
    return lines
