"""What a well-formed study definition means."""

from fractions import Fraction

import pytest

from assayfolio.errors import Place
from assayfolio.study.plan import (
    AgainstReference,
    AllPairs,
    ChecksPlan,
    Contrast,
    Criterion,
    DataPlan,
    DesignPlan,
    EquivalencePlan,
    OutlierPlan,
    PowerPlan,
    PrecisionPlan,
    SignOff,
)
from study.examples import FULL, LEVELS, SMALLEST, edited, faults_of, study_of


def at(line: int, column: int) -> Place:
    return Place("plan.yaml", line, column)


def test_six_keys_are_enough_for_a_study() -> None:
    study = study_of(SMALLEST)
    assert (study.study, study.title, study.alpha) == (
        "LOT-7",
        "Two balances and a reference",
        Fraction(1, 20),
    )
    assert study.data == DataPlan("values.csv", ("mass",), "balance")
    assert study.design == DesignPlan("fixed", "pooled")
    assert study.checks == ChecksPlan(None, None)
    assert (study.purpose, study.outliers, study.precision, study.power) == (None, None, None, None)
    assert study.comparisons == study.equivalence == study.criteria == study.sign_off == ()


def test_every_part_of_a_full_definition_arrives_as_a_typed_value() -> None:
    study = study_of(FULL)
    assert study.title == "Chloride in process water: four instruments"
    assert study.purpose == "To decide which bench instruments may stand in for the titrator."
    assert study.data == DataPlan(
        file="data/chloride.csv",
        response=("chloride",),
        factor="instrument",
        unit="mg/L",
        levels=("titrator", "probe-1", "probe-2", "012"),
        replicates=(("titrator", 8), ("probe-1", 6), ("probe-2", 6), ("012", 6)),
        missing="refuse",
        below_limit="refuse",
        decimal_mark="comma",
    )
    assert study.outliers == OutlierPlan("grubbs", at(36, 11))
    assert study.checks == ChecksPlan("brown-forsythe", "shapiro-wilk")
    assert study.precision == PrecisionPlan(True, Fraction(9, 10), "day and analyst", at(38, 12))
    assert study.power == PowerPlan(Fraction(1, 2), Fraction(3, 10), Fraction(9, 10), at(39, 8))
    assert study.criteria == (Criterion("repeatability-rsd", Fraction(2), None, "%", at(41, 5)),)
    assert study.sign_off == (
        SignOff("author", "I measured as planned"),
        SignOff("reviewer", "I checked plan, data and figures"),
    )


def test_the_three_kinds_of_comparison_are_told_apart_and_know_their_place() -> None:
    half = Fraction(1, 2)
    assert study_of(FULL).comparisons == (
        AgainstReference("each instrument against the titrator", "titrator", "dunnett", "less", at(23, 5)),
        AllPairs("all pairs", "tukey-kramer", at(27, 5)),
        Contrast(
            "probes against the rest",
            (("titrator", -half), ("012", -half), ("probe-1", half), ("probe-2", half)),
            "none",
            "two-sided",
            at(30, 5),
        ),
    )


def test_a_margin_is_an_interval_that_reaches_as_far_down_as_up() -> None:
    half = Fraction(1, 2)
    assert study_of(FULL).equivalence == (
        EquivalencePlan(
            "probes", "titrator", None, -half, half, None, "bench procedure 12", "none", None, at(33, 5)
        ),
        EquivalencePlan(
            "pairs",
            None,
            "all",
            Fraction(-1, 5),
            Fraction(1, 3),
            None,
            None,
            "holm",
            Fraction(1, 40),
            at(34, 5),
        ),
        EquivalencePlan(
            "relative", "titrator", None, None, None, Fraction(5, 2), None, "none", None, at(35, 5)
        ),
    )


def test_a_definition_knows_where_its_keys_stand() -> None:
    study = study_of(FULL)
    assert study.place_of("alpha") == at(21, 1)
    assert study.place_of("data.levels") == at(13, 3)
    assert study.place_of("checks.normality") == at(37, 43)
    assert study.place_of("data.nothing") is None
    lines = [place.line or 0 for _, place in study.places]
    assert lines == sorted(lines)


@pytest.mark.parametrize(
    "level", ["1.50", "no", "012", "1e3", "0x1F", "2024-05-01", "true", "12:30:45", "~x"]
)
def test_a_level_is_the_text_that_was_typed(level: str) -> None:
    study = study_of(edited(SMALLEST, "alpha", f"  levels: [{level}, other]\nalpha"))
    assert study.data.levels == (level, "other")


@pytest.mark.parametrize(
    ("typed", "exact"),
    [
        ("0.05", Fraction(1, 20)),
        ("5e-2", Fraction(1, 20)),
        ("1/20", Fraction(1, 20)),
        (".05", Fraction(1, 20)),
        ('"0.05"', Fraction(1, 20)),
        ("0.1", Fraction(1, 10)),
        ("0.30000000000000004", Fraction(30000000000000004, 10**17)),
    ],
)
def test_alpha_is_exactly_the_number_that_was_typed(typed: str, exact: Fraction) -> None:
    assert study_of(edited(SMALLEST, "0.05", typed)).alpha == exact


def test_thirds_add_up_to_one_exactly() -> None:
    weights = "  - {name: c, weights: {reference: 1, north: -1/3, south: -2/3}}"
    text = edited(SMALLEST, "alpha: 0.05", f"{LEVELS}alpha: 0.05\ncomparisons:\n{weights}")
    (contrast,) = study_of(text).comparisons
    assert isinstance(contrast, Contrast)
    assert contrast.weights[1] == ("north", Fraction(-1, 3))


def test_several_responses_may_be_planned() -> None:
    study = study_of(edited(SMALLEST, "response: mass", "response: [mass, density]"))
    assert study.data.response == ("mass", "density")


def test_two_declared_levels_leave_one_row_and_nothing_to_adjust() -> None:
    text = edited(
        SMALLEST,
        "alpha: 0.05\n",
        "  levels: [a, b]\nalpha: 0.05\ncomparisons: [{name: x, pairs: all}, {name: y, against: a}]\n",
    )
    assert [comparison.adjust for comparison in study_of(text).comparisons] == ["none", "none"]


@pytest.mark.parametrize(
    "same",
    [
        SMALLEST.encode("utf-8-sig"),
        SMALLEST.replace("\n", "\r\n").encode(),
        SMALLEST.replace("\n", "\r").encode(),
        SMALLEST.removesuffix("\n").encode(),
        f"---\n{SMALLEST}...\n".encode(),
        (
            b'{"study": "LOT-7", "title": "Two balances and a reference", "data": {"file": "values.csv", '
            b'"response": "mass", "factor": "balance"}, "alpha": "0.05"}'
        ),
    ],
    ids=["byte order mark", "CR LF", "CR", "no last line break", "document marks", "JSON"],
)
def test_the_same_plan_may_be_written_in_other_ways(same: bytes) -> None:
    plain, other = study_of(SMALLEST), study_of(same)
    assert (other.study, other.title, other.data, other.alpha) == (
        plain.study,
        plain.title,
        plain.data,
        plain.alpha,
    )


def test_a_byte_order_mark_moves_no_column() -> None:
    assert study_of(SMALLEST.encode("utf-8-sig")).places == study_of(SMALLEST).places


def test_purpose_may_have_paragraphs() -> None:
    study = study_of(SMALLEST + "purpose: |\n  First.\n\n  Second, with µ and Ω.\n")
    assert study.purpose == "First.\n\nSecond, with µ and Ω."


def test_reading_does_not_depend_on_the_parser_at_hand(monkeypatch: pytest.MonkeyPatch) -> None:
    import yaml

    from assayfolio.study import document

    first = study_of(FULL)
    for parser in (yaml.CSafeLoader, yaml.SafeLoader):
        monkeypatch.setattr(document, "_PARSER", parser)
        assert study_of(FULL) == first


def test_equal_bytes_give_equal_plans() -> None:
    assert study_of(FULL) == study_of(FULL)
    assert faults_of(FULL) == []
