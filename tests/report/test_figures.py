"""Figures hold every value, say in words what they show, and are the same bytes each time."""

import re
import xml.etree.ElementTree as ET
from dataclasses import replace
from fractions import Fraction

import pytest

from assayfolio.report.basis import Basis
from assayfolio.report.diagnostics import blom_position, envelope, normal_plot, residual_plots
from assayfolio.report.equivalence import estimates_of, margins_of
from assayfolio.report.figures import FULL_WIDTH, MOST_HEIGHT, dot_plots
from assayfolio.report.interval_plots import (
    MOST_ROWS,
    Estimate,
    Measure,
    band_colour,
    interval_plot,
    most_rows,
)
from assayfolio.report.miniatures import (
    WIDTH,
    Sketch,
    comparison_scale,
    equivalence_picture,
    equivalence_scale,
    family_picture,
    means_picture,
)
from assayfolio.report.typeface import text_width
from report.cases import CASES

SVG = "{http://www.w3.org/2000/svg}"
ACCENT = "#0f5b66"


def elements(svg: bytes, tag: str) -> list[ET.Element]:
    return list(ET.fromstring(svg).iter(SVG + tag))


def rings(svg: bytes) -> list[ET.Element]:
    return [circle for circle in elements(svg, "circle") if circle.get("fill") == "none"]


DRAWN = [case for case in CASES if case != "large file"]


@pytest.mark.requirement("REPORT-4")
@pytest.mark.parametrize("case", DRAWN)
def test_every_value_is_one_circle_in_the_plot_of_values(case):
    basis = Basis(CASES[case]())
    assert sum(len(rings(picture.svg)) for picture in dot_plots(basis, ACCENT)) == basis.total


WITHOUT_SCATTER = ("without scatter", "nothing to compare")


@pytest.mark.parametrize("case", [case for case in DRAWN if case not in WITHOUT_SCATTER])
def test_every_residual_is_one_circle_in_each_plot_of_residuals(case):
    basis = Basis(CASES[case]())
    pictures = [*residual_plots(basis), normal_plot(basis, ACCENT)]
    assert [len(rings(picture.svg)) for picture in pictures if picture] == [basis.total] * 3


def test_many_thousand_values_are_counted_in_classes():
    basis = Basis(CASES["large file"]())
    (picture,) = dot_plots(basis, ACCENT)
    assert not rings(picture.svg)
    assert len(elements(picture.svg, "rect")) > 100


@pytest.mark.requirement("REPORT-4")
def test_every_comparison_has_its_estimate_and_interval():
    basis = Basis(CASES["unequal"]())
    family = basis.response.comparisons[0]
    rows = [Estimate(basis.label(row), row.estimate, row.ci) for row in family.rows]
    measure = Measure("difference", basis.difference_scale, "95 % interval")
    picture = interval_plot(rows, measure, ACCENT, "x.svg")
    filled = [circle for circle in elements(picture.svg, "circle") if circle.get("fill") == ACCENT]
    assert len(filled) == len(family.rows) == 15
    intervals = [path for path in elements(picture.svg, "path") if path.get("stroke") == ACCENT]
    assert len(intervals) == 3 * 15  # a line and two flat ends each


@pytest.mark.requirement("REPORT-11")
@pytest.mark.parametrize("case", CASES)
def test_figures_say_in_words_what_they_show_and_stay_within_their_width(case):
    basis = Basis(CASES[case]())
    for picture in dot_plots(basis, ACCENT):
        root = ET.fromstring(picture.svg)
        assert root.find(SVG + "title").text == picture.title
        assert all(
            level.level in "".join(p.title for p in dot_plots(basis, ACCENT)) for level in basis.levels
        )
        for text in root.iter(SVG + "text"):
            assert -0.01 <= float(text.get("x")) <= FULL_WIDTH + 0.01
            assert 0 <= float(text.get("y")) <= float(root.get("viewBox").split()[3])


def test_names_are_shown_and_never_become_markup():
    basis = Basis(CASES["long names"]())
    (picture,) = dot_plots(basis, ACCENT)
    root = ET.fromstring(picture.svg)
    assert not list(root.iter("script"))
    assert not list(root.iter(SVG + "script"))
    assert "<script>alert('x')</script>" in " ".join(text.text for text in root.iter(SVG + "text"))


def test_text_is_live_and_in_the_typeface_of_the_report():
    (picture,) = dot_plots(Basis(CASES["balanced"]()), ACCENT)
    families = {text.get("font-family") for text in elements(picture.svg, "text")}
    assert families == {"Inter", "Inter Tabular, Inter"}


def test_the_same_input_gives_the_same_figures():
    first = [picture.svg for picture in dot_plots(Basis(CASES["unequal"]()), ACCENT)]
    again = [picture.svg for picture in dot_plots(Basis(CASES["unequal"]()), ACCENT)]
    assert first == again


def test_more_comparisons_than_a_page_holds_are_limited_to_those_with_the_smallest_p(rendered):
    figures = dict(rendered("many levels").figures)
    filled = [
        circle for circle in elements(figures["comparisons-1.svg"], "circle") if circle.get("fill") == ACCENT
    ]
    assert len(filled) == MOST_ROWS


def test_plotting_positions_are_those_of_blom():
    assert [blom_position(rank, 3) for rank in (1, 2, 3)] == [
        Fraction(5, 26),
        Fraction(1, 2),
        Fraction(21, 26),
    ]


def test_the_envelope_in_the_middle_is_that_of_a_median():
    # sqrt(1/4 / N) / density(0) = sqrt(2 pi) / (2 sqrt(N))
    assert envelope(Fraction(1, 2), 0.0, 100, 1.0) == pytest.approx(0.12533141373155002)


@pytest.mark.parametrize("case", [case for case in CASES if case not in WITHOUT_SCATTER])
def test_every_small_picture_has_its_dots_above_its_axis_and_its_words_within_its_width(case):
    basis = Basis(CASES[case]())
    scale = comparison_scale(basis)
    pictures = [
        means_picture(basis, Sketch(ACCENT, "m.svg", "Table 2")),
        *(
            family_picture(basis, family, scale, Sketch(ACCENT, "f.svg", "Table 12"))
            for family in basis.response.comparisons
            if family.kind != "trend"
        ),
        *(
            equivalence_picture(
                basis,
                family,
                equivalence_scale(basis, percent=family.scale == "percent"),
                Sketch(ACCENT, "e.svg", "Table 13"),
            )
            for family in basis.response.equivalence
        ),
    ]
    for picture in pictures:
        level = [
            [float(place) for place in re.findall(r"[\d.]+", path.get("d"))]
            for path in elements(picture.svg, "path")
            if path.get("stroke-width") == "0.5"
        ]
        (line,) = [places for places in level if places[1] == places[3]]
        dots = [float(circle.get("cx")) for circle in elements(picture.svg, "circle")]
        assert dots
        assert all(line[0] <= x <= line[2] for x in dots)
        for text in elements(picture.svg, "text"):
            assert text_width(text.text, 6.6) <= WIDTH


def test_dots_without_names_say_where_the_names_are():
    basis = Basis(CASES["many levels"]())
    few = basis.response.comparisons[1].rows[:3]
    family = replace(basis.response.comparisons[1], rows=few)
    scale = comparison_scale(basis)
    crowd = family_picture(basis, basis.response.comparisons[0], scale, Sketch(ACCENT, "f.svg", "Table 5"))
    rows = family_picture(basis, family, scale, Sketch(ACCENT, "f.svg", "Table 6"))
    assert b"231 differences without intervals: see Table 5" in crowd.svg
    assert b"difference, mg; in the order of Table 6" in rows.svg


def test_shaded_squares_lie_between_the_first_and_the_last_value():
    basis = Basis(CASES["large file"]())
    by_order, _ = residual_plots(basis)
    squares = elements(by_order.svg, "rect")
    columns: dict[str, int] = {}
    for square in squares:
        columns[square.get("x")] = columns.get(square.get("x"), 0) + 1
    assert min(columns.values()) > 5  # no value of a file in even order stands in a column of its own


def test_the_band_between_margins_is_the_accent_at_eight_per_cent():
    assert band_colour("#000000") == "#ebebeb"
    assert band_colour("#ffffff") == "#ffffff"
    assert band_colour(ACCENT) == "#ecf2f3"


def plotted(case: str, number: int) -> tuple[ET.Element, list[ET.Element]]:
    """The drawing of an equivalence family, and the lines at its margins."""
    basis = Basis(CASES[case]())
    family = basis.response.equivalence[number]
    measure = Measure("difference", basis.difference_scale, "90 % interval", margins_of(family))
    svg = interval_plot(estimates_of(basis, family), measure, ACCENT, "x.svg").svg
    edges = [path for path in elements(svg, "path") if path.get("stroke-width") == "0.45"]
    return ET.fromstring(svg), [path for path in edges if path.get("stroke") == ACCENT]


def test_the_margin_is_a_band_with_a_line_at_each_limit():
    drawing, edges = plotted("separate variances", 0)
    (band,) = [box for box in drawing.iter(SVG + "rect") if box.get("fill") == band_colour(ACCENT)]
    places = sorted(float(re.search(r"M([\d.]+) ", edge.get("d"))[1]) for edge in edges)
    left, width = float(band.get("x")), float(band.get("width"))
    assert places == pytest.approx([left, left + width], abs=0.02)


def test_non_inferiority_has_one_line_and_a_band_to_the_end_of_the_axis():
    _, edges = plotted("separate variances", 2)
    assert len(edges) == 1


def test_percent_margins_stand_on_a_percent_axis():
    basis = Basis(CASES["two responses"](), 1)
    family = basis.response.equivalence[0]
    scale = equivalence_scale(basis, percent=True)
    picture = equivalence_picture(basis, family, scale, Sketch(ACCENT, "e.svg", "Table 1"))
    assert family.scale == "percent"
    assert "difference, %" in picture.svg.decode()
    assert scale.axis.low < family.lower < family.upper < scale.axis.high


@pytest.mark.parametrize("case", ["sixty levels", "many levels", "long names"])
def test_no_figure_is_too_tall_for_its_page(case, rendered):
    room = MOST_HEIGHT + 60
    for name, svg in rendered(case).figures:
        assert float(ET.fromstring(svg).get("height").removesuffix("pt")) <= room, name


def test_long_labels_leave_room_for_fewer_rows():
    assert most_rows(["a - b"]) == MOST_ROWS
    assert most_rows(["a label of many words that takes several lines " * 4]) < MOST_ROWS


def test_each_response_has_figures_of_its_own_names(rendered):
    names = [name for name, _ in rendered("two responses").figures]
    assert len(names) == len(set(names))
    assert {"response-1-values-1.svg", "response-2-values-1.svg", "response-1-equivalence-1.svg"} <= set(
        names
    )
