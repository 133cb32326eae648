"""What a well-formed study definition means."""

from fractions import Fraction

import pytest

from assayfolio.errors import Place
from assayfolio.study import vocabulary
from assayfolio.study.plan import (
    AgainstReference,
    AllPairs,
    ChecksPlan,
    Contrast,
    ContrastFamily,
    Criterion,
    DataPlan,
    DesignPlan,
    EquivalencePlan,
    OutlierPlan,
    PowerPlan,
    PrecisionPlan,
    SignOff,
    SpreadPlan,
    Trend,
    WeightedSum,
)
from study.examples import (
    FULL,
    LEVELS,
    RECEIVED,
    SAMPLE,
    SEPARATE,
    SMALLEST,
    edited,
    faults_of,
    planned,
    study_of,
)

HALF = Fraction(1, 2)


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
    assert study.design == DesignPlan("fixed", "pooled", "f", "none")
    assert study.checks == ChecksPlan((), ())
    assert (study.purpose, study.spread, study.outliers, study.precision, study.power) == (None,) * 5
    assert study.comparisons == study.equivalence == study.criteria == study.sign_off == ()


def test_every_part_of_a_full_definition_arrives_as_a_typed_value() -> None:
    study = study_of(FULL)
    assert study.title == "Halides in process water: four instruments"
    assert study.purpose == "To decide which bench instruments may stand in for the titrator."
    assert study.data == DataPlan(
        file="data/halides.csv",
        response=("chloride", "bromide"),
        factor="instrument",
        unit=None,
        units=(("chloride", "mg/L"), ("bromide", "1")),
        order="position",
        levels=("titrator", "probe-1", "probe-2", "012"),
        replicates=(("titrator", 8), ("probe-1", 6), ("probe-2", 6), ("012", 6)),
        missing="refuse",
        below_limit="refuse",
        decimal_mark="comma",
    )
    assert study.design == DesignPlan("fixed", "pooled", "f", "bonferroni")
    assert study.spread == SpreadPlan("titrator", "bonferroni", at(52, 9))
    assert study.outliers == OutlierPlan(("grubbs", "grubbs-double"), at(53, 11))
    assert study.checks == ChecksPlan(("brown-forsythe", "bartlett"), ("shapiro-wilk",))
    assert study.precision == PrecisionPlan(True, Fraction(9, 10), "instrument", None, at(55, 12))
    assert study.power == PowerPlan(
        HALF, Fraction(3, 10), Fraction(9, 10), Fraction(-1, 10), "control", "chloride", at(57, 3)
    )
    assert study.criteria == (
        Criterion("repeatability-rsd", Fraction(2), None, "%", None, None, at(59, 5)),
        Criterion("level-mean", Fraction(11, 2), Fraction(4), "mg/L", "012", "chloride", at(60, 5)),
    )
    assert study.sign_off == (
        SignOff("author", "I measured as planned"),
        SignOff("reviewer", "I checked plan, data and figures"),
    )


def test_the_five_kinds_of_comparison_are_told_apart_and_know_their_place() -> None:
    one, two = Fraction(1), Fraction(2)
    assert study_of(FULL).comparisons == (
        AgainstReference("each instrument against the titrator", "titrator", "dunnett", "less", at(26, 5)),
        AllPairs("all pairs", "tukey-kramer", at(30, 5)),
        Contrast(
            "probes against the rest",
            (("titrator", -HALF), ("012", -HALF), ("probe-1", HALF), ("probe-2", HALF)),
            "none",
            "two-sided",
            at(33, 5),
        ),
        ContrastFamily(
            "two questions",
            (
                WeightedSum("probe against probe", (("probe-1", one), ("probe-2", -one))),
                WeightedSum("012 against titrator", (("012", one), ("titrator", -one))),
            ),
            "hochberg",
            "greater",
            at(35, 5),
        ),
        Trend(
            "trend with age",
            3,
            (("titrator", HALF), ("probe-1", two), ("probe-2", Fraction(9, 2)), ("012", Fraction(12))),
            "sidak",
            "two-sided",
            at(41, 5),
        ),
    )


def test_every_kind_of_margin_is_a_pair_of_limits_of_which_non_inferiority_has_one() -> None:
    tests = study_of(FULL).equivalence
    assert tests[0] == EquivalencePlan(
        name="probes",
        against="titrator",
        pairs=None,
        lower=-HALF,
        upper=HALF,
        lower_percent=None,
        upper_percent=None,
        margin_source="bench procedure 12",
        adjust="none",
        alpha=None,
        response=None,
        place=at(47, 5),
    )
    limits = [(test.lower, test.upper, test.lower_percent, test.upper_percent) for test in tests]
    assert limits == [
        (-HALF, HALF, None, None),
        (Fraction(-1, 5), Fraction(1, 3), None, None),
        (None, None, Fraction(-5, 2), Fraction(5, 2)),
        (None, None, Fraction(-5), Fraction(3)),
        (Fraction(-1, 10), None, None, None),
    ]
    assert [test.pairs for test in tests] == [None, "all", None, None, None]
    assert [test.adjust for test in tests] == ["none", "holm", "bonferroni", "none", "holm"]
    assert [test.alpha for test in tests] == [None, Fraction(1, 40), None, None, None]
    assert [test.response for test in tests] == [None, None, None, "bromide", None]
    assert [test.percent for test in tests] == [False, False, True, True, False]
    assert [test.non_inferiority for test in tests] == [False, False, False, False, True]


@pytest.mark.parametrize(
    ("margin", "limits"),
    [
        ("non-inferiority: not-lower, margin: 0.5", (-HALF, None, None, None)),
        ("non-inferiority: not-higher, margin: 0.5", (None, HALF, None, None)),
        ("non-inferiority: not-lower, margin-percent: 0.5", (None, None, -HALF, None)),
        ("non-inferiority: not-higher, margin-percent: 250", (None, None, None, Fraction(250))),
    ],
)
def test_non_inferiority_leaves_the_other_side_open(margin: str, limits: tuple[Fraction | None, ...]) -> None:
    text = planned(f"equivalence: [{{name: x, against: north, adjust: holm, {margin}}}]\n")
    (test,) = study_of(text).equivalence
    assert (test.lower, test.upper, test.lower_percent, test.upper_percent) == limits
    assert test.non_inferiority


def test_precision_of_a_sample_of_levels_is_planned_with_its_conditions() -> None:
    study = study_of(SAMPLE)
    assert study.design == DesignPlan("random", "pooled", "f", "none")
    assert study.precision == PrecisionPlan(
        True, Fraction(95, 100), "day and analyst", "intermediate-precision", at(7, 12)
    )
    assert [criterion.quantity for criterion in study.criteria] == ["total-rsd", "between-sd"]
    assert study.criteria[1].at_most == Fraction(1, 10)


def test_separate_variances_are_planned_with_methods_that_have_them() -> None:
    study = study_of(SEPARATE)
    assert study.design == DesignPlan("fixed", "separate", "brown-forsythe", "none")
    assert [comparison.adjust for comparison in study.comparisons] == ["games-howell", "holm", "none"]


def test_the_omnibus_test_goes_with_the_variances_where_the_plan_does_not_name_it() -> None:
    assert study_of(planned("design: {variances: separate}\n")).design.omnibus == "welch"
    assert study_of(planned("design: {variances: pooled}\n")).design.omnibus == "f"


def test_one_unit_holds_for_every_response_and_a_mapping_for_each_its_own() -> None:
    text = edited(SMALLEST, "response: mass", "response: [mass, density]\n  unit: g")
    assert [study_of(text).data.unit_of(name) for name in ("mass", "density")] == ["g", "g"]
    text = edited(text, "unit: g", "unit: {density: g/mL, mass: g}")
    assert [study_of(text).data.unit_of(name) for name in ("mass", "density")] == ["g", "g/mL"]
    assert study_of(SMALLEST).data.unit_of("mass") is None


def test_one_word_is_a_list_of_one() -> None:
    study = study_of(planned("checks: {normality: anderson-darling}\noutliers: {test: cochran}\n"))
    assert study.checks == ChecksPlan((), ("anderson-darling",))
    assert study.outliers == OutlierPlan(("cochran",), at(10, 11))


def test_levels_that_are_numbers_are_their_own_scores() -> None:
    text = edited(SMALLEST, "alpha", '  levels: ["80", 1.05e2, "140"]\nalpha')
    (trend,) = study_of(text + "comparisons: [{name: x, trend: linear, alternative: greater}]\n").comparisons
    assert trend == Trend("x", 1, (), "none", "greater", at(9, 15))
    assert [trend.score_of(level) for level in ("80", "1.05e2", "140")] == [80, 105, 140]
    with pytest.raises(KeyError):
        trend.score_of("hot")


def test_scores_take_the_place_of_the_names() -> None:
    (*_, trend) = study_of(FULL).comparisons
    assert isinstance(trend, Trend)
    assert [trend.score_of(level) for level in ("titrator", "012")] == [HALF, 12]
    with pytest.raises(KeyError):
        trend.score_of("13")


def test_power_is_planned_for_equal_sizes_and_no_true_difference_unless_it_says_otherwise() -> None:
    power = study_of(planned("power: {difference: 1, sigma: 2, target: 0.8}\n")).power
    assert power == PowerPlan(Fraction(1), Fraction(2), Fraction(4, 5), Fraction(0), "equal", None, at(9, 8))


def keys_in(text: str) -> set[str]:
    """Every key of every mapping in a study definition."""
    from assayfolio.study.document import compose
    from assayfolio.study.faults import Faults
    from assayfolio.study.nodes import MappingNode, Node, SequenceNode

    def walk(node: Node | None) -> set[str]:
        if isinstance(node, SequenceNode):
            return set().union(*(walk(item) for item in node.items))
        if isinstance(node, MappingNode):
            return {entry.key.text for entry in node.entries}.union(*(walk(e.value) for e in node.entries))
        return set()

    return walk(compose(text.encode(), Faults("plan.yaml")))


def test_the_examples_together_use_every_key() -> None:
    other_files = {"LABORATORY_KEYS", "EXCLUSION_FILE_KEYS", "EXCLUSION_KEYS"}
    tables = [
        table
        for name, table in vars(vocabulary).items()
        if name.endswith("_KEYS") and name not in other_files
    ]
    assert len(tables) == 19
    known = {key for table in tables for key in table}
    assert known <= keys_in(FULL) | keys_in(SAMPLE) | keys_in(SEPARATE) | keys_in(RECEIVED)


def test_a_definition_knows_where_its_keys_stand() -> None:
    study = study_of(FULL)
    assert study.place_of("alpha") == at(24, 1)
    assert study.place_of("data.levels") == at(14, 3)
    assert study.place_of("checks.normality") == at(54, 55)
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
