"""Ticks, dots side by side, words with emphasis, widths of tables: the rules that place things on a page."""

from fractions import Fraction
from itertools import pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.exact import magnitude
from assayfolio.report.axes import make_axis, nice_ticks
from assayfolio.report.prose import Span, joined, plain, prose
from assayfolio.report.swarm import lanes, offsets
from assayfolio.report.tables import TEXT_WIDTH_MM, Column, fits, lay_out
from assayfolio.report.typeface import figures_width, text_width, wrapped

VALUES = st.lists(st.fractions(-1000, 1000, max_denominator=1000), min_size=1, max_size=20)


@given(VALUES, st.integers(3, 8))
def test_ticks_are_one_two_or_five_times_a_power_of_ten_apart_and_on_the_axis(values, wanted):
    axis = make_axis(values, 0, 100, wanted=wanted)
    steps = {after - before for before, after in pairwise(axis.ticks)}
    assert len(steps) == 1
    step = steps.pop()
    assert step / Fraction(10) ** magnitude(step) in (1, 2, 5)
    assert all(axis.low <= tick <= axis.high and tick % step == 0 for tick in axis.ticks)


@given(VALUES)
def test_every_value_is_on_the_paper_of_its_axis(values):
    axis = make_axis(values, 10, 90)
    assert all(10 <= axis.at(value) <= 90 for value in values)


def test_the_number_of_ticks_is_the_nearest_to_the_wanted():
    step, ticks = nice_ticks(Fraction("9.86"), Fraction("10.39"), 6)
    assert (step, len(ticks)) == (Fraction(1, 10), 5)


def test_leading_figures_that_all_labels_share_are_taken_off():
    axis = make_axis([Fraction(10**13 + 3), Fraction(10**13 + 8)], 0, 100)
    assert axis.origin == 10**13
    assert max(map(len, axis.labels)) <= 3


def test_an_axis_holds_values_that_are_all_equal():
    axis = make_axis([Fraction(5)] * 3, 0, 100)
    assert axis.low < 5 < axis.high


@given(st.lists(st.floats(0, 50), max_size=40))
def test_dots_that_lie_side_by_side_do_not_overlap(places):
    chosen = lanes(places, 4.4)
    for i in range(len(places)):
        for j in range(i):
            assert chosen[i] != chosen[j] or abs(places[i] - places[j]) >= 4.4


def test_equal_values_go_to_the_lanes_nearest_the_middle():
    assert sorted(lanes([7.0] * 5, 4.4)) == [-2, -1, 0, 1, 2]


def test_dots_move_closer_where_there_is_no_room():
    assert max(offsets(lanes([7.0] * 41, 4.4), 4.4, 10.0)) == pytest.approx(10.0)


def test_dots_keep_their_distance_where_there_is_room():
    assert sorted(offsets(lanes([7.0] * 3, 4.4), 4.4, 50.0)) == pytest.approx([0.0, 4.4, 8.8])


def test_values_in_prose_are_never_looked_into():
    assert prose("*F* of {name}", name="*x* {y} _z_") == (
        Span("F", "symbol"),
        Span(" of "),
        Span("*x* {y} _z_"),
    )


def test_a_subscript_may_hold_a_symbol():
    assert prose("*t*_1−*α*/2_") == (
        Span("t", "symbol"),
        Span("1−", "sub"),
        Span("α", "sub symbol"),
        Span("/2", "sub"),
    )


def test_long_words_of_a_user_are_never_hyphenated():
    assert prose("{name}", name="spectrometry") == (Span("spectrometry", "given"),)


def test_joined_prose_keeps_its_styles():
    assert plain(joined([prose("*a*"), prose("b")], "; ")) == "a; b"


def test_figures_have_equal_widths_in_columns():
    assert figures_width("111", 8) == pytest.approx(figures_width("848", 8))
    assert text_width("111", 8) < text_width("848", 8)


@given(st.text(st.characters(codec="ascii", categories=["L", "N"]), min_size=1, max_size=80))
def test_no_line_is_wider_than_asked_and_no_letter_is_lost(word):
    lines = wrapped(word, 7.4, 60)
    assert "".join(lines) == word
    assert all(text_width(line, 7.4) <= 60 for line in lines)


def width_in_mm(length: str) -> float:
    return float(length.removesuffix("mm"))


@pytest.mark.parametrize("digits", [3, 12, 20])
@pytest.mark.parametrize("name", ["a", "a name of " + "eighty " * 10])
def test_no_table_is_wider_than_the_text(digits, name):
    columns = [Column("Level", kind="text"), *(Column("Mean", "mg/L") for _ in range(5))]
    table = lay_out("Table 1", "x", columns, [[name, *["1" * digits] * 5]])
    assert width_in_mm(table.width) <= TEXT_WIDTH_MM + 0.01
    assert sum(width_in_mm(column.width) for column in table.columns) == pytest.approx(
        width_in_mm(table.width), abs=0.05
    )


def test_figures_that_would_have_to_be_set_too_small_do_not_fit():
    columns = [Column("Level", kind="text"), *(Column("Mean") for _ in range(5))]
    assert fits(columns, [["a", *["10.02"] * 5]])
    assert not fits(columns, [["a", *["10000000000000.43"] * 5]])


def test_figures_of_a_column_stand_on_their_decimal_point():
    table = lay_out(
        "Table 1", "x", [Column("Level", kind="text"), Column("SD")], [["a", "0.114"], ["b", "0.0802"]]
    )
    short, long = (row[1].shift for row in table.rows)
    assert long == ""
    assert float(short.removesuffix("pt")) == pytest.approx(figures_width("2", 8.4), abs=0.01)


def test_many_columns_of_text_share_the_width_and_no_more():
    columns = [Column(f"column {number}", kind="text") for number in range(5)] + [Column("Value", "mg/L")] * 4
    row = [*["several words in every cell of the row " * 3] * 2, "a", "b", "c", *["10.02"] * 4]
    table = lay_out("Table 1", "x", columns, [row])
    assert width_in_mm(table.width) <= TEXT_WIDTH_MM + 0.01


def test_a_column_of_text_is_not_narrower_than_its_words():
    columns = [
        Column("Analysis", kind="text"),
        Column("Method", kind="text"),
        Column("Section", kind="words"),
    ]
    table = lay_out("Table 1", "x", columns, [["a long name of an analysis " * 8, "Bonferroni", "5"]])
    assert width_in_mm(table.columns[1].width) > text_width("Bonferroni", 7.6) / 72 * 25.4
    assert width_in_mm(table.width) <= TEXT_WIDTH_MM + 0.01
