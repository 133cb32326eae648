"""Reading the printed block of a signature out of the PDF, and holding it against the signature."""

from typing import Any

from assayfolio.evidence.signing.block import outlines, read_character_map, read_drawing, subset_font
from assayfolio.evidence.signing.statement import Statement, block_paragraphs

_FORM_KEYS = {"/Type", "/Subtype", "/BBox", "/Resources", "/Filter", "/Length"}


def block_problems(field: Any, statement: Statement) -> list[str]:
    """Why the block in the signature field does not print `statement`; nothing if it does.

    The text is read through the font's character map, and every letter's outline is held against that of
    the report's own font, so that a font that shows other letters than it names is found.
    Raises whatever the PDF and font libraries do for what they cannot read.
    """
    form = field["/AP"]["/N"]
    problems = _frame_problems(form, [float(end) for end in field["/Rect"]])
    font = form["/Resources"]["/Font"]["/F0"]
    characters = read_character_map(font["/ToUnicode"].data)
    lines = ["".join(characters.get(glyph, "\ufffd") for glyph in row) for row in read_drawing(form.data)]
    expected, shown = "".join(block_paragraphs(statement)), "".join(lines)
    if shown.replace(" ", "") != expected.replace(" ", ""):
        problems.append(f"it prints {' / '.join(lines)!r}")
    program = font["/DescendantFonts"][0]["/FontDescriptor"]["/FontFile2"].data
    problems.extend(_letter_problems(program, characters))
    return problems


def _frame_problems(form: Any, rect: list[float]) -> list[str]:
    problems = []
    if (
        set(form) - _FORM_KEYS
        or set(form["/Resources"]) != {"/Font"}
        or set(form["/Resources"]["/Font"]) != {"/F0"}
    ):
        problems.append("it is drawn with more than one font")
    box = [float(end) for end in form["/BBox"]]
    size = (rect[2] - rect[0], rect[3] - rect[1])
    if box[:2] != [0.0, 0.0] or max(abs(box[2] - size[0]), abs(box[3] - size[1])) > 0.01:
        problems.append("it does not fill its box")
    return problems


def _letter_problems(program: bytes, characters: dict[int, str]) -> list[str]:
    """The letters that the embedded font draws otherwise than the report's font."""
    own = subset_font("".join(characters.values()))
    drawn, reference = outlines(program), outlines(own.program)
    wrong = [
        text
        for glyph, text in sorted(characters.items())
        if drawn.get(glyph) != reference[own.glyph_of[text]]
    ]
    return [f"its font draws {', '.join(map(repr, wrong))} as something else"] if wrong else []
