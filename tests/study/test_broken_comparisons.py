"""What is refused among comparisons: in which words, and at which place."""

import pytest

from study.examples import SMALLEST, edited, faults_of, planned

FAMILY = "`against`, `pairs`, `weights`, `contrasts` or `trend`"
METHODS = (
    "none, bonferroni, sidak, holm, hochberg, scheffe, tukey-kramer, games-howell, dunnett "
    "or dunnett-step-down"
)
NUMBER = "expected a number, such as -0.25 or 1/3"
NOT_OFFERED = (
    "methods that control the rate of false discoveries are not offered, because planned comparisons and "
    "tests are confirmatory"
)
NO_ORDER = (
    "expected the numbers under `scores`, such as {low: 20, high: 40}; names without an order have no trend, "
    "compare them by `pairs` or `contrasts`"
)
PAIR = "weights: {north: 1, south: -1}"
ADD_ADJUST = "add how p-values are adjusted, such as `adjust: holm`, or `adjust: none`"


COMPARISONS = {
    "no name": (
        "{pairs: all, adjust: holm}",
        "9:15: the key `comparisons.name` is missing - add `name: ...`",
    ),
    "neither pairs nor reference nor weights": (
        "{name: x, adjust: holm}",
        f"9:15: an entry of `comparisons` has none of {FAMILY} - write exactly one of them",
    ),
    "pairs beside a reference": (
        "{name: x, pairs: all, against: north, adjust: holm}",
        "9:15: an entry of `comparisons` has `against` and `pairs` together - write exactly one of them",
    ),
    "pairs of something": (
        "{name: x, pairs: some, adjust: holm}",
        "9:32: `comparisons.pairs` is `some` - expected all",
    ),
    "no adjustment of pairs": (
        "{name: x, pairs: all}",
        f"9:15: the key `comparisons.adjust` is missing; the family has more than one row - {ADD_ADJUST}",
    ),
    "no adjustment against a reference": (
        "{name: x, against: north}",
        f"9:15: the key `comparisons.adjust` is missing; the family has more than one row - {ADD_ADJUST}",
    ),
    "a misspelt adjustment": (
        "{name: x, pairs: all, adjust: tukey}",
        f"9:45: `comparisons.adjust` is `tukey` - expected {METHODS}; did you mean `tukey-kramer`?",
    ),
    "a misspelt key for the adjustment": (
        "{name: x, pairs: all, adjsut: holm}",
        "9:37: the key `adjsut` is not known in `comparisons` - did you mean `adjust`?",
    ),
    "a misspelt key for the reference": (
        "{name: x, agianst: north, adjust: holm}",
        "9:25: the key `agianst` is not known in `comparisons` - did you mean `against`?",
    ),
    "Tukey and Kramer against a reference": (
        "{name: x, against: north, adjust: tukey-kramer}",
        (
            "9:49: `comparisons.adjust` is `tukey-kramer`, which fits only `pairs` - "
            "expected another method beside `against`"
        ),
    ),
    "Dunnett for pairs": (
        "{name: x, pairs: all, adjust: dunnett}",
        (
            "9:45: `comparisons.adjust` is `dunnett`, which fits only `against` - "
            "expected another method beside `pairs`"
        ),
    ),
    "Dunnett in steps for a contrast": (
        "{name: x, weights: {north: 1, south: -1}, adjust: dunnett-step-down}",
        (
            "9:65: `comparisons.adjust` is `dunnett-step-down`, which fits only `against` - "
            "expected another method beside `weights`"
        ),
    ),
    "Holm for a single contrast": (
        "{name: x, weights: {north: 1, south: -1}, adjust: holm}",
        "9:65: `comparisons.adjust` is `holm`, but a contrast is one comparison - expected none or scheffe",
    ),
    "a direction for pairs": (
        "{name: x, pairs: all, adjust: holm, alternative: less}",
        (
            "9:51: `comparisons.alternative` stands beside `pairs`, where neither level comes first - "
            "use it with `against` or `weights`"
        ),
    ),
    "a sign for a direction": (
        "{name: x, against: north, adjust: holm, alternative: '>'}",
        "9:68: `comparisons.alternative` is `>` - expected two-sided, greater or less",
    ),
    "an undeclared reference": (
        "{name: x, against: nroth, adjust: holm}",
        (
            "9:34: `comparisons.against` names the level `nroth`, which is not declared - "
            "expected one of `data.levels`; did you mean `north`?"
        ),
    ),
    "the weight of an undeclared level": (
        "{name: x, weights: {north: 1, east: -1}}",
        (
            "9:45: `comparisons.weights` names the level `east`, which is not declared - "
            "expected one of `data.levels`"
        ),
    ),
    "weights that add up to a tenth": (
        "{name: x, weights: {north: 1, south: -0.9}}",
        "9:34: `comparisons.weights` add up to 1/10 - expected weights that add up to exactly 0",
    ),
    "rounded thirds": (
        "{name: x, weights: {north: 1, south: -0.3333, reference: -0.6666}}",
        "9:34: `comparisons.weights` add up to 1/10000 - expected weights that add up to exactly 0",
    ),
    "weights of nought": (
        "{name: x, weights: {north: 0, south: 0}}",
        (
            "9:34: `comparisons.weights` hold no weight but 0 - "
            "expected weights above and below 0 that add up to 0"
        ),
    ),
    "a weight in words": (
        "{name: x, weights: {north: one, south: -1}}",
        "9:42: `comparisons.weights` is `one`, not a number - expected a number, such as -0.25 or 1/3",
    ),
    "a fraction of many digits": (
        "{name: x, weights: {north: 1/3000000000000001, south: -1}}",
        (
            "9:42: `comparisons.weights` is `1/3000000000000001`, more than 15 digits above or below "
            "the line - expected a number, such as -0.25 or 1/3"
        ),
    ),
    "weights whose sum is long": (
        (
            "{name: x, weights: {north: 1/999999999999989, south: -1/999999999999937, "
            "reference: 1/899999999999957}}"
        ),
        (
            "9:34: `comparisons.weights` add up to about 1.11111e-15 - "
            "expected weights that add up to exactly 0"
        ),
    ),
    "weights as a list": (
        "{name: x, weights: [1, -1]}",
        "9:34: `comparisons.weights` is a list - expected weights by level, such as {lot-a: 1, lot-b: -1}",
    ),
    "no adjustment of contrasts": (
        f"{{name: x, contrasts: [{{name: y, {PAIR}}}]}}",
        f"9:15: the key `comparisons.adjust` is missing; the family has more than one row - {ADD_ADJUST}",
    ),
    "no adjustment of a polynomial": (
        "{name: x, trend: polynomial, degree: 2, scores: {reference: 0, north: 1, south: 2}}",
        f"9:15: the key `comparisons.adjust` is missing; the family has more than one row - {ADD_ADJUST}",
    ),
    "Holm for a linear trend": (
        "{name: x, trend: linear, scores: {reference: 0, north: 1, south: 2}, adjust: holm}",
        (
            "9:92: `comparisons.adjust` is `holm`, but a linear trend is one comparison - "
            "expected none or scheffe"
        ),
    ),
    "Dunnett for a family of contrasts": (
        f"{{name: x, contrasts: [{{name: y, {PAIR}}}], adjust: dunnett}}",
        (
            "9:89: `comparisons.adjust` is `dunnett`, which fits only `against` - "
            "expected another method beside `contrasts`"
        ),
    ),
    "Tukey and Kramer for a trend": (
        (
            "{name: x, trend: polynomial, degree: 2, scores: {reference: 0, north: 1, south: 2}, "
            "adjust: tukey-kramer}"
        ),
        (
            "9:107: `comparisons.adjust` is `tukey-kramer`, which fits only `pairs` - "
            "expected another method beside `trend`"
        ),
    ),
    "a method for false discoveries": (
        "{name: x, pairs: all, adjust: benjamini-hochberg}",
        f"9:45: `comparisons.adjust` is `benjamini-hochberg` - expected {METHODS}; {NOT_OFFERED}",
    ),
    "a method for false discoveries by its other name": (
        "{name: x, pairs: all, adjust: FDR_BH}",
        f"9:45: `comparisons.adjust` is `FDR_BH` - expected {METHODS}; {NOT_OFFERED}",
    ),
    "contrasts as a mapping": (
        f"{{name: x, contrasts: {{{PAIR}}}, adjust: holm}}",
        (
            "9:36: `comparisons.contrasts` is a mapping - "
            "expected a list of contrasts, each with `name` and `weights`"
        ),
    ),
    "a contrast without a name": (
        f"{{name: x, contrasts: [{{{PAIR}}}], adjust: holm}}",
        "9:37: the key `comparisons.contrasts.name` is missing - add `name: ...`",
    ),
    "a contrast without weights": (
        "{name: x, contrasts: [{name: y}], adjust: holm}",
        "9:37: the key `comparisons.contrasts.weights` is missing - add `weights: ...`",
    ),
    "a misspelt key of a contrast": (
        f"{{name: x, contrasts: [{{nmae: y, {PAIR}}}], adjust: holm}}",
        "9:38: the key `nmae` is not known in `comparisons.contrasts` - did you mean `name`?",
    ),
    "two contrasts of one name": (
        f"{{name: x, contrasts: [{{name: y, {PAIR}}}, {{name: y, {PAIR}}}], adjust: holm}}",
        "9:87: `comparisons.contrasts.name` holds `y` twice - expected each once; it stands on line 9",
    ),
    "a contrast whose weights do not add up": (
        "{name: x, contrasts: [{name: y, weights: {north: 1, south: 1}}], adjust: holm}",
        "9:56: `comparisons.contrasts.weights` add up to 2 - expected weights that add up to exactly 0",
    ),
    "a trend of another kind": (
        "{name: x, trend: liner, scores: {reference: 0, north: 1, south: 2}}",
        "9:32: `comparisons.trend` is `liner` - expected linear or polynomial; did you mean `linear`?",
    ),
    "a trend over names": (
        "{name: x, trend: linear}",
        (
            "9:32: `comparisons.trend` needs levels that are numbers, unlike `reference`, `north`, `south` - "
            f"{NO_ORDER}"
        ),
    ),
    "a level without a score": (
        "{name: x, trend: linear, scores: {reference: 0, north: 1}}",
        "9:48: `comparisons.scores` gives no number for `south` - expected one for each level",
    ),
    "two levels with one score": (
        "{name: x, trend: linear, scores: {reference: 0, north: 1, south: 1.0}}",
        (
            "9:48: `comparisons.scores` gives the levels `north` and `south` the same number - "
            "expected another number for each level, for they stand in an order"
        ),
    ),
    "a score for an undeclared level": (
        "{name: x, trend: linear, scores: {reference: 0, north: 1, sout: 2}}",
        (
            "9:73: `comparisons.scores` names the level `sout`, which is not declared - "
            "expected one of `data.levels`; did you mean `south`?"
        ),
    ),
    "a score in words": (
        "{name: x, trend: linear, scores: {reference: low, north: 1, south: 2}}",
        f"9:60: `comparisons.scores` is `low`, not a number - {NUMBER}",
    ),
    "scores as a list": (
        "{name: x, trend: linear, scores: [1, 2, 3]}",
        "9:48: `comparisons.scores` is a list - expected numbers by level, such as {low: 20, high: 40}",
    ),
    "no scores within the braces": (
        "{name: x, trend: linear, scores: {}}",
        (
            "9:48: `comparisons.scores` is an empty mapping - "
            "expected a number for each level, or leave the key out"
        ),
    ),
    "a polynomial without a degree": (
        "{name: x, trend: polynomial, scores: {reference: 0, north: 1, south: 2}, adjust: holm}",
        "9:15: the key `comparisons.degree` is missing - add `degree: ...`",
    ),
    "a polynomial of degree 1": (
        "{name: x, trend: polynomial, degree: 1, scores: {reference: 0, north: 1, south: 2}, adjust: holm}",
        "9:52: `comparisons.degree` is `1` - expected a whole number from 2 to 199",
    ),
    "a degree as high as the number of levels": (
        "{name: x, trend: polynomial, degree: 3, scores: {reference: 0, north: 1, south: 2}, adjust: holm}",
        (
            "9:52: `comparisons.degree` is 3, and there are 3 levels - "
            "expected at most one less than the number of levels"
        ),
    ),
    "a degree of a linear trend": (
        "{name: x, trend: linear, degree: 2, scores: {reference: 0, north: 1, south: 2}}",
        (
            "9:40: `comparisons.degree` stands beside `trend: linear`, which has degree 1 - "
            "use `trend: polynomial`, or leave it out"
        ),
    ),
    "scores without a trend": (
        "{name: x, pairs: all, adjust: holm, scores: {reference: 0, north: 1, south: 2}}",
        "9:51: `comparisons.scores` stands without `trend` - add `trend: ...`, or leave it out",
    ),
    "a degree without a trend": (
        "{name: x, pairs: all, adjust: holm, degree: 2}",
        "9:51: `comparisons.degree` stands without `trend` - add `trend: ...`, or leave it out",
    ),
}


@pytest.mark.parametrize(("entry", "fault"), COMPARISONS.values(), ids=COMPARISONS.keys())
def test_a_comparison_is_refused_with_its_place_and_what_was_expected(entry: str, fault: str) -> None:
    assert faults_of(planned(f"comparisons: [{entry}]\n")) == [fault]


def test_undeclared_levels_make_the_adjustment_compulsory() -> None:
    assert faults_of(SMALLEST + "comparisons: [{name: x, pairs: all}]\n") == [
        f"8:15: the key `comparisons.adjust` is missing; `data.levels` are not declared - {ADD_ADJUST}"
    ]


def test_any_level_may_be_named_where_none_are_declared() -> None:
    assert faults_of(SMALLEST + "comparisons: [{name: x, against: anything, adjust: holm}]\n") == []


def test_levels_that_cannot_be_read_are_not_held_against_the_comparisons() -> None:
    text = edited(SMALLEST, "alpha", "  levels: [north, north]\nalpha")
    faults = faults_of(text + "comparisons: [{name: x, against: south}]\n")
    assert [fault.partition(":")[0] for fault in faults] == ["7"]


def test_levels_count_for_comparisons_though_the_file_is_missing() -> None:
    text = edited(
        planned("comparisons: [{name: x, against: east, adjust: holm}]\n"), "  file: values.csv\n", ""
    )
    assert [fault.partition(": ")[0] for fault in faults_of(text)] == ["4:3", "8:34"]


def test_two_comparisons_cannot_share_a_name() -> None:
    section = """\
comparisons:
  - name: pairs
    pairs: all
    adjust: holm
  - name: pairs
    against: north
    adjust: holm
"""
    assert faults_of(planned(section)) == [
        "13:11: `comparisons.name` holds `pairs` twice - expected each once; it stands on line 10"
    ]


def test_a_comparison_and_an_equivalence_test_cannot_share_a_name() -> None:
    section = """\
equivalence:
  - {name: probes, against: north, margin: 1, adjust: holm}
comparisons:
  - {name: probes, pairs: all, adjust: holm}
"""
    assert faults_of(planned(section)) == [
        "12:12: `comparisons.name` holds `probes` twice - expected each once; it stands on line 10"
    ]


def test_a_trend_is_held_against_its_own_scores_where_no_levels_are_declared() -> None:
    trend = "{name: x, trend: polynomial, degree: 2, scores: {low: 1, high: 2}, adjust: holm}"
    assert faults_of(SMALLEST + f"comparisons: [{trend}]\n") == [
        (
            "8:52: `comparisons.degree` is 2, and there are 2 levels - "
            "expected at most one less than the number of levels"
        )
    ]
    assert faults_of(SMALLEST + "comparisons: [{name: x, trend: linear}]\n") == []


def test_levels_that_spell_one_number_in_two_ways_have_no_trend() -> None:
    text = edited(SMALLEST, "alpha", '  levels: ["1", "1.0", "2"]\nalpha')
    assert faults_of(text + "comparisons: [{name: x, trend: linear}]\n") == [
        (
            "9:32: `comparisons.trend` gives the levels `1` and `1.0` the same number - "
            "expected another number for each level, for they stand in an order"
        )
    ]


def test_all_faults_of_a_family_show_in_one_pass() -> None:
    section = """\
comparisons:
  - contrasts:
      - {name: a, weights: {north: 1, south: 1}}
      - {name: a, weights: {north: 1, est: -1}}
    alternative: up
"""
    assert [fault.partition(": ")[0] for fault in faults_of(planned(section))] == [
        "10:5",
        "10:5",
        "11:28",
        "12:16",
        "12:39",
        "13:18",
    ]


TWO_PAIRS = "  levels: [a, b - c, a - b, c]\nalpha"


@pytest.mark.parametrize(
    "section",
    [
        "comparisons: [{name: x, pairs: all, adjust: holm}]\n",
        "equivalence: [{name: x, pairs: all, margin: 1, adjust: holm}]\n",
    ],
)
def test_two_pairs_of_levels_cannot_bear_one_label(section: str) -> None:
    assert faults_of(edited(SMALLEST, "alpha", TWO_PAIRS) + section) == [
        (
            "7:11: `data.levels` let two pairs of levels bear the same label `a - b - c` - "
            "expected level names without ` - ` in them"
        )
    ]


def test_such_levels_may_be_compared_with_a_reference() -> None:
    section = "comparisons: [{name: x, against: c, adjust: holm}]\n"
    assert faults_of(edited(SMALLEST, "alpha", TWO_PAIRS) + section) == []
