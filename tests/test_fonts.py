"""The fonts that the package carries, and what it says about the characters that they can set."""

import subprocess
import sys
import unicodedata
from itertools import pairwise

import pytest
from fontTools.ttLib import TTFont

from assayfolio.characters import SETTABLE, describe, is_settable

FILES = ("Inter-Regular.ttf", "Inter-SemiBold.ttf", "Inter-Italic.ttf")


@pytest.fixture(scope="module")
def fonts(fonts_folder):
    return {name: TTFont(fonts_folder / name) for name in FILES}


def characters_set_by(font) -> set[int]:
    return set(font.getBestCmap())


def test_the_table_holds_exactly_the_characters_common_to_all_fonts(fonts):
    table = {code for first, last in SETTABLE for code in range(first, last + 1)}
    assert table == set.intersection(*(characters_set_by(font) for font in fonts.values()))


def test_the_table_is_in_order_and_without_touching_ranges():
    ends = [end for pair in SETTABLE for end in pair]
    assert ends == sorted(ends)
    assert all(later[0] > earlier[1] + 1 for earlier, later in pairwise(SETTABLE))


def test_is_settable_agrees_with_the_table_everywhere():
    table = {code for first, last in SETTABLE for code in range(first, last + 1)}
    assert {code for code in range(0x110000) if is_settable(chr(code))} == table


@pytest.mark.parametrize("character", list("aZ09äłΩµμχσω²⁻¹₀−×·±≤≥≠≈∞√Σ∂→✓●○°‰½…–—“”’€"))
def test_signs_that_reports_need_can_be_set(character):
    assert is_settable(character), describe(character)


@pytest.mark.parametrize(
    "character",
    list("\x00\t\n\r\x1b\x7f\x85\xad\u200b\u200d\u200e\u202a\u202e\u2028\u2066\u2069\ufeff\ue000\ud800"),
)
def test_controls_and_invisible_formatting_are_never_settable(character):
    assert not is_settable(character), describe(character)


def test_no_settable_character_is_a_control_or_a_formatting_character():
    kinds = {unicodedata.category(chr(code)) for first, last in SETTABLE for code in range(first, last + 1)}
    assert kinds.isdisjoint({"Cc", "Cf", "Cs", "Co", "Zl", "Zp"})


@pytest.mark.parametrize(
    ("character", "words"),
    [
        ("中", "U+4E2D CJK UNIFIED IDEOGRAPH-4E2D"),
        ("\u202e", "U+202E RIGHT-TO-LEFT OVERRIDE"),
        ("\x07", "U+0007 (control character)"),
        ("\ue000", "U+E000 (private use)"),
        ("\ud800", "U+D800 (half of a surrogate pair)"),
        ("\U000e0080", "U+E0080 (no assigned character)"),
        ("😀", "U+1F600 GRINNING FACE"),
    ],
)
def test_a_character_is_named_in_plain_ascii(character, words):
    assert describe(character) == words


@pytest.mark.parametrize("text", ["", "ab"])
def test_only_single_characters_are_asked_about(text):
    with pytest.raises(TypeError):
        is_settable(text)
    with pytest.raises(TypeError):
        describe(text)


@pytest.mark.parametrize("name", FILES)
def test_each_font_is_static_and_free_to_embed(fonts, name):
    font = fonts[name]
    assert "fvar" not in font
    assert "gvar" not in font
    assert font["OS/2"].fsType == 0


@pytest.mark.parametrize(
    ("name", "weight", "style"),
    [
        ("Inter-Regular.ttf", 400, "Regular"),
        ("Inter-SemiBold.ttf", 600, "SemiBold"),
        ("Inter-Italic.ttf", 400, "Italic"),
    ],
)
def test_each_font_says_what_it_is(fonts, name, weight, style):
    font = fonts[name]
    assert font["OS/2"].usWeightClass == weight
    assert font["name"].getBestFamilyName() == "Inter"
    assert font["name"].getBestSubFamilyName() == style
    assert bool(font["post"].italicAngle) == (style == "Italic")


@pytest.mark.parametrize("name", FILES)
def test_figures_can_be_set_in_columns_and_text_is_kerned(fonts, name):
    font = fonts[name]
    substitutions = {record.FeatureTag for record in font["GSUB"].table.FeatureList.FeatureRecord}
    positions = {record.FeatureTag for record in font["GPOS"].table.FeatureList.FeatureRecord}
    assert {"tnum", "sups", "subs", "zero"} <= substitutions
    assert {"kern", "mark"} <= positions


@pytest.mark.parametrize("name", FILES)
def test_no_font_changes_what_was_typed(fonts, name):
    """Contextual alternates and ligatures would set "->" as an arrow and "3x4" as "3×4"."""
    substitutions = {record.FeatureTag for record in fonts[name]["GSUB"].table.FeatureList.FeatureRecord}
    assert substitutions.isdisjoint({"calt", "liga", "clig", "rlig", "dlig"})


def test_the_licence_lies_beside_the_fonts(fonts_folder):
    licence = (fonts_folder / "OFL.txt").read_text(encoding="utf-8")
    assert "SIL OPEN FONT LICENSE Version 1.1" in licence
    assert sorted(path.name for path in fonts_folder.iterdir()) == sorted([*FILES, "OFL.txt"])


@pytest.mark.slow
def test_the_generator_makes_the_same_files_again(checkout):
    generator = checkout / "tests" / "generate" / "make_fonts.py"
    outcome = subprocess.run(
        [sys.executable, generator, "--check"], capture_output=True, text=True, check=False
    )
    assert outcome.returncode == 0, outcome.stdout + outcome.stderr
