"""Numbers are printed as finely as they are known, and labels of axes stand clear of one another."""

import re
import xml.etree.ElementTree as ET
from fractions import Fraction
from itertools import pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.report.axes import Lettering, make_axis
from assayfolio.report.basis import Basis
from assayfolio.report.compose import compose
from assayfolio.report.notation import Scale
from assayfolio.report.prose import plain
from assayfolio.report.typeface import figures_width
from report.cases import CASES

SVG = "{http://www.w3.org/2000/svg}"
LARGE = ("large numbers", "large numbers, separate variances")
ENDS = st.integers(-(10**9), 10**9)
SPANS = st.integers(1, 10**8)


def spans_of(axis, size: float) -> list[tuple[float, float]]:
    halves = [figures_width(label, size) / 2 for label in axis.labels]
    return [
        (axis.at(tick) - half, axis.at(tick) + half) for tick, half in zip(axis.ticks, halves, strict=True)
    ]


@given(ENDS, SPANS, st.integers(0, 3), st.booleans())
def test_labels_stand_clear_of_one_another_and_within_their_place(low, span, places, include_zero):
    values = [Fraction(low, 10**places), Fraction(low + span, 10**places)]
    axis = make_axis(values, 6, 147, wanted=4, include_zero=include_zero, lettering=Lettering(6.6, 0, 153))
    spans = spans_of(axis, 6.6)
    assert len(spans) >= 2
    assert all(left >= -0.01 and right <= 153.01 for left, right in spans)
    assert all(left > right for (_, right), (left, _) in pairwise(spans))
    assert all(6 <= axis.at(value) <= 147 for value in values)


@given(ENDS, SPANS, st.integers(0, 3))
def test_a_label_with_its_origin_and_power_of_ten_is_the_tick(low, span, places):
    values = [Fraction(low, 10**places), Fraction(low + span, 10**places)]
    axis = make_axis(values, 0, 400, lettering=Lettering(7.4, 0, 460))
    for tick, label in zip(axis.ticks, axis.labels, strict=True):
        read = Fraction(label.replace("−", "-"))
        assert axis.origin + read * Fraction(10) ** axis.power == tick


def test_a_long_axis_of_short_labels_keeps_all_its_ticks():
    values = [Fraction("9.86"), Fraction("10.39")]
    assert (
        make_axis(values, 0, 400, lettering=Lettering(7.4, 0, 400)).ticks == make_axis(values, 0, 400).ticks
    )


def test_values_of_many_figures_that_share_none_count_a_power_of_ten():
    axis = make_axis([Fraction(-3 * 10**11), Fraction(9 * 10**11)], 0, 400)
    assert axis.power == 11
    assert max(map(len, axis.labels)) <= 8


def rows_of_labels(svg: bytes) -> dict[float, list[tuple[float, float]]]:
    """Where the centred figures of a drawing begin and end, by the height they stand at."""
    rows: dict[float, list[tuple[float, float]]] = {}
    for text in ET.fromstring(svg).iter(SVG + "text"):
        if text.get("text-anchor") == "middle" and "Tabular" in text.get("font-family"):
            half = figures_width(text.text, float(text.get("font-size"))) / 2
            rows.setdefault(float(text.get("y")), []).append(
                (float(text.get("x")) - half, float(text.get("x")) + half)
            )
    return rows


@pytest.mark.parametrize("case", CASES)
def test_no_label_of_any_figure_is_cut_off_or_runs_into_the_next(case):
    seen = 0
    for picture in compose(CASES[case]()).pictures:
        width = float(ET.fromstring(picture.svg).get("viewBox").split()[2])
        for spans in rows_of_labels(picture.svg).values():
            seen += len(spans)
            assert all(left >= -0.02 and right <= width + 0.02 for left, right in spans), picture.name
            assert all(left > right for (_, right), (left, _) in pairwise(sorted(spans))), picture.name
    assert seen


def digits_after_the_point(text: str) -> int:
    return len(text.partition(".")[2])


@pytest.mark.parametrize("case", LARGE)
def test_differences_and_their_intervals_are_as_fine_as_their_standard_error(case):
    content = compose(CASES[case]())
    tables = [block.table for one in content.sections for block in one.blocks if block.kind == "table"]
    found = [table for table in tables if plain(table.caption).startswith("Comparisons, all pairs")]
    (table,) = found
    for row in table.rows:
        assert [digits_after_the_point(plain(cell.words)) for cell in row[1:5]] == [0, 0, 0, 0]


@pytest.mark.parametrize("case", LARGE)
def test_recorded_values_keep_the_decimals_they_were_typed_with(case):
    basis = Basis(CASES[case]())
    assert basis.scale.places == 3
    assert basis.scale.mean_places == 0


def test_means_keep_one_decimal_more_than_the_data_where_the_error_is_finer():
    scale = Scale.of([Fraction(10)], -2, "mg")
    assert scale.no_finer_than(Fraction(1, 1000)).mean_places == 3
    assert scale.no_finer_than(Fraction(2)).mean_places == 2
    assert scale.no_finer_than(Fraction(30)).mean_places == 1
    assert scale.no_finer_than(Fraction(2000)).mean_places == 0
    assert scale.no_finer_than(Fraction(0)) == scale


def test_a_criterion_on_a_mean_is_printed_as_finely_as_the_mean():
    content = compose(CASES["large numbers"]())
    (line,) = [line for line in content.summary if line.what == "Criteria"]
    assert not re.search(r"\d\.\d", plain(line.words))
