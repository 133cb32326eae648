"""Widths of text in the report's typeface, read from the shipped fonts, for laying out tables and figures."""

from functools import cache
from pathlib import Path
from typing import Literal

Face = Literal["regular", "semibold", "italic"]

FACES: dict[Face, str] = {
    "regular": "Inter-Regular.ttf",
    "semibold": "Inter-SemiBold.ttf",
    "italic": "Inter-Italic.ttf",
}
FAMILY = "Inter"
FIGURES_FAMILY = "Inter Tabular"  # the regular face with figures of equal width, for columns in drawings
FONT_FOLDER = Path(__file__).resolve().parent.parent / "fonts"

POINTS_PER_MM = 72 / 25.4

# What tabular figures do to advances in this typeface: as wide as a figure space, or a fixed narrow width.
_FIGURE_SPACE = 0x2007
_EQUAL = "0123456789-\u2212\u00d7=<>+"
_NARROW = ".,: "
_NARROW_ADVANCE = 550


@cache
def _advances(face: Face) -> tuple[dict[int, int], int, int]:
    from fontTools.ttLib import TTFont

    with TTFont(FONT_FOLDER / FACES[face], lazy=True) as font:
        metrics = font["hmtx"].metrics
        characters = {code: metrics[name][0] for code, name in font.getBestCmap().items()}
        return characters, metrics[".notdef"][0], font["head"].unitsPerEm


def text_width(text: str, size: float, face: Face = "regular") -> float:
    """The width of `text` set in `size` points, in points."""
    characters, missing, units = _advances(face)
    return sum(characters.get(ord(character), missing) for character in text) * size / units


def figures_width(text: str, size: float) -> float:
    """The width of `text` with figures and signs of equal width, as in a column of numbers, in points."""
    characters, missing, units = _advances("regular")
    equal = characters[_FIGURE_SPACE]
    total = 0
    for character in text:
        if character in _EQUAL:
            total += equal
        elif character in _NARROW:
            total += _NARROW_ADVANCE
        else:
            total += characters.get(ord(character), missing)
    return total * size / units


def wrapped(text: str, size: float, width: float, face: Face = "regular") -> list[str]:
    """`text` in lines no wider than `width` points; a word that is too wide by itself is cut."""
    lines: list[str] = []
    line = ""
    for word in text.split(" "):
        longer = f"{line} {word}" if line else word
        if text_width(longer, size, face) <= width:
            line = longer
            continue
        if line:
            lines.append(line)
        line = word
        while text_width(line, size, face) > width and len(line) > 1:
            cut = _fitting(line, size, width, face)
            lines.append(line[:cut])
            line = line[cut:]
    lines.append(line)
    return lines


def _fitting(word: str, size: float, width: float, face: Face) -> int:
    """How many characters of `word` fit, at least one; a hyphen or underscore is the place to cut at."""
    fits = 1
    while fits < len(word) and text_width(word[: fits + 1], size, face) <= width:
        fits += 1
    for place in range(fits, fits // 2, -1):
        if word[place - 1] in "-_/.":
            return place
    return fits
