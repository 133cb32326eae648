"""Make the report's fonts, and the table of characters that they can set.

Source: the variable fonts of the Inter project as packaged in `fontpkg-inter` (SIL Open Font License 1.1,
no reserved font name, so a subset may keep the name). From them come three static files at optical size 14:
regular, semi-bold and italic, cut down to the scripts and signs a report needs. Static, because a variable
font would have to be instanced at every rendering, which costs time and is not reproducible.

    python tests/generate/make_fonts.py           write fonts, licence and character table
    python tests/generate/make_fonts.py --check   write nothing; exit 1 if a file would change

The bytes depend on the version of fontTools, which the tests' lock pins.
"""

import argparse
import importlib.util
import io
import re
import sys
import unicodedata
from dataclasses import dataclass
from pathlib import Path

from fontTools import subset
from fontTools.ttLib import TTFont
from fontTools.varLib.instancer import instantiateVariableFont

CHECKOUT = Path(__file__).resolve().parents[2]
PACKAGE = CHECKOUT / "pipeline" / "assayfolio"
FONTS = PACKAGE / "fonts"
CHARACTERS = PACKAGE / "characters.py"
BEGIN, END = "# begin of the made table\n", "# end of the made table\n"

UPRIGHT, SLANTED = "Inter[opsz,wght].ttf", "Inter-Italic[opsz,wght].ttf"


@dataclass(frozen=True, slots=True)
class Face:
    """One static font to make: file name, source file, weight and the name of its style."""

    file: str
    source: str
    weight: int
    style: str


FACES = (
    Face("Inter-Regular.ttf", UPRIGHT, 400, "Regular"),
    Face("Inter-SemiBold.ttf", UPRIGHT, 600, "SemiBold"),
    Face("Inter-Italic.ttf", SLANTED, 400, "Italic"),
)

# Ranges asked for; what the fonts do not have, and every control or formatting character, drops out.
WANTED = (
    (0x0020, 0x024F),  # Latin: basic, supplement, extended A and B
    (0x02B0, 0x036F),  # modifier letters, combining marks
    (0x0370, 0x03FF),  # Greek
    (0x1E00, 0x1EFF),  # Latin extended additional
    (0x2000, 0x206F),  # punctuation and spaces
    (0x2070, 0x209F),  # superscripts and subscripts
    (0x20A0, 0x20CF),  # currencies
    (0x2100, 0x218F),  # letter-like signs, number forms
    (0x2190, 0x21FF),  # arrows
    (0x2200, 0x22FF),  # mathematical operators
    (0x25A0, 0x25FF),  # geometric shapes
    (0x2713, 0x2717),  # check marks and crosses
)
# Controls, formatting and bidirectional marks, surrogates, private use, unassigned, line and paragraph
# separators.
NEVER = frozenset({"Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp"})
# Invisible, although Unicode files it under combining marks.
INVISIBLE = frozenset({0x034F})

# Left out on purpose: contextual alternates and ligatures, which turn "->" into an arrow and "3x4" into
# "3×4". A report shows what was typed.
FEATURES = ("kern", "mark", "mkmk", "ccmp", "locl", "tnum", "zero", "ss02", "case", "sups", "subs", "sinf")

NAME_COPYRIGHT, NAME_FAMILY, NAME_STYLE, NAME_UNIQUE, NAME_FULL, NAME_VERSION, NAME_POSTSCRIPT = range(7)
NAME_TYPOGRAPHIC_FAMILY, NAME_TYPOGRAPHIC_STYLE = 16, 17
NAMES_KEPT = (0, 5, 7, 8, 9, 11, 12, 13, 14)
WINDOWS_ENGLISH = (3, 1, 0x409)


def source_folder() -> Path:
    """The folder of the package that carries the variable fonts and their licence."""
    spec = importlib.util.find_spec("fontpkg_inter")
    if spec is None or spec.origin is None:
        raise SystemExit("The package fontpkg-inter is not installed; it is in the tests' lock.")
    return Path(spec.origin).parent


def wanted_characters() -> list[int]:
    """Every code point of `WANTED` that may ever be set."""
    return [
        code
        for first, last in WANTED
        for code in range(first, last + 1)
        if unicodedata.category(chr(code)) not in NEVER and code not in INVISIBLE
    ]


def name_face(font: TTFont, face: Face) -> None:
    """Give the static font the names of its own style; family "Inter" for all three."""
    names = font["name"]
    names.names = [record for record in names.names if record.nameID in NAMES_KEPT]
    version = names.getDebugName(NAME_VERSION)
    own = {
        NAME_FAMILY: "Inter" if face.style in {"Regular", "Italic"} else f"Inter {face.style}",
        NAME_STYLE: "Italic" if face.style == "Italic" else "Regular",
        NAME_UNIQUE: f"{version};Inter-{face.style};static subset",
        NAME_FULL: f"Inter {face.style}",
        NAME_POSTSCRIPT: f"Inter-{face.style}",
        NAME_TYPOGRAPHIC_FAMILY: "Inter",
        NAME_TYPOGRAPHIC_STYLE: face.style,
    }
    for identifier, text in own.items():
        names.setName(text, identifier, *WINDOWS_ENGLISH)


def make_face(face: Face, folder: Path) -> bytes:
    """The bytes of one static subset font; equal on every run."""
    font = TTFont(folder / "files" / face.source, recalcTimestamp=False)
    options = subset.Options()
    options.layout_features = list(FEATURES)
    options.hinting = False
    options.glyph_names = False
    options.notdef_outline = True
    options.name_IDs = ["*"]
    cutter = subset.Subsetter(options)
    cutter.populate(unicodes=wanted_characters())
    cutter.subset(font)
    font = instantiateVariableFont(font, {"opsz": 14, "wght": face.weight}, static=True)
    name_face(font, face)
    font["OS/2"].usWeightClass = face.weight
    buffer = io.BytesIO()
    font.save(buffer)
    return buffer.getvalue()


def common_ranges(fonts: list[bytes]) -> list[tuple[int, int]]:
    """Ranges of code points that every one of the fonts maps to a glyph."""
    maps = [set(TTFont(io.BytesIO(font)).getBestCmap()) for font in fonts]
    ranges: list[tuple[int, int]] = []
    for code in sorted(set.intersection(*maps)):
        if ranges and ranges[-1][1] == code - 1:
            ranges[-1] = (ranges[-1][0], code)
        else:
            ranges.append((code, code))
    return ranges


def character_module(ranges: list[tuple[int, int]]) -> bytes:
    """`characters.py` with its table replaced by these ranges."""
    table = "".join(f"    (0x{first:04X}, 0x{last:04X}),\n" for first, last in ranges)
    made = f"{BEGIN}SETTABLE: tuple[tuple[int, int], ...] = (\n{table})\n{END}"
    text = CHARACTERS.read_text(encoding="utf-8")
    pattern = re.compile(re.escape(BEGIN) + ".*?" + re.escape(END), re.DOTALL)
    if len(pattern.findall(text)) != 1:
        raise SystemExit(f"{CHARACTERS} does not hold one table between its two marks.")
    return pattern.sub(lambda _: made, text).encode("utf-8")


def make_all() -> dict[Path, bytes]:
    """Every file that this program is responsible for, with the bytes it should have."""
    folder = source_folder()
    files = {FONTS / face.file: make_face(face, folder) for face in FACES}
    ranges = common_ranges(list(files.values()))
    files[FONTS / "OFL.txt"] = (folder / "LICENSE").read_bytes()
    files[CHARACTERS] = character_module(ranges)
    return files


def main() -> int:
    """Write the files, or compare them with what is there."""
    parser = argparse.ArgumentParser(description="Make the report's fonts and its table of characters.")
    parser.add_argument("--check", action="store_true", help="write nothing; exit 1 if a file differs")
    check = parser.parse_args().check
    different = []
    for path, content in make_all().items():
        if path.exists() and path.read_bytes() == content:
            continue
        different.append(path.relative_to(CHECKOUT))
        if not check:
            path.parent.mkdir(parents=True, exist_ok=True)
            path.write_bytes(content)
    for path in different:
        print(f"{path}: {'differs from what the generator makes' if check else 'written'}")
    if check and different:
        print("To write them anew: python tests/generate/make_fonts.py")
        return 1
    return 0


if __name__ == "__main__":
    sys.exit(main())
