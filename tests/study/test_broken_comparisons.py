"""What is refused among comparisons and equivalence tests: in which words, and at which place."""

import pytest

from study.examples import LEVELS, SMALLEST, edited, faults_of, study_of

FAMILY = "`against`, `pairs` or `weights`"
METHODS = (
    "none, bonferroni, sidak, holm, hochberg, scheffe, tukey-kramer, games-howell, dunnett "
    "or dunnett-step-down"
)
MARGIN = "write `margin`, or `lower` and `upper`, or `margin-percent`"
ADD_ADJUST = "add how p-values are adjusted, such as `adjust: holm`, or `adjust: none`"


def with_levels(section: str) -> str:
    """The smallest definition with three declared levels (line 7) and `section` from line 9 on."""
    return edited(SMALLEST, "alpha", f"{LEVELS}alpha") + section


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
    "Games and Howell with a pooled variance": (
        "{name: x, pairs: all, adjust: games-howell}",
        (
            "9:45: `comparisons.adjust` is `games-howell`, which needs separate variances - "
            "expected `design.variances: separate` with it, or another method"
        ),
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
}


@pytest.mark.parametrize(("entry", "fault"), COMPARISONS.values(), ids=COMPARISONS.keys())
def test_a_comparison_is_refused_with_its_place_and_what_was_expected(entry: str, fault: str) -> None:
    assert faults_of(with_levels(f"comparisons: [{entry}]\n")) == [fault]


EQUIVALENCE = {
    "no margin": (
        "{name: x, pairs: all}",
        f"9:15: an entry of `equivalence` has no margin - {MARGIN}",
    ),
    "two kinds of margin": (
        "{name: x, against: north, margin: 1, margin-percent: 2}",
        f"9:15: an entry of `equivalence` has more than one margin - {MARGIN}",
    ),
    "half an interval": (
        "{name: x, pairs: all, lower: -1}",
        "9:37: `equivalence.lower` stands without `upper` - add `upper: ...`",
    ),
    "an interval beside nought": (
        "{name: x, pairs: all, lower: 1, upper: 2}",
        (
            "9:37: the range from `equivalence.lower` to `equivalence.upper` does not hold 0 inside - "
            "expected `lower` below 0 and `upper` above 0"
        ),
    ),
    "a margin of nought": (
        "{name: x, pairs: all, margin: 0}",
        "9:45: `equivalence.margin` is `0` - expected a number above 0",
    ),
    "percent of no reference": (
        "{name: x, pairs: all, margin-percent: 2}",
        (
            "9:37: `equivalence.margin-percent` is of the reference's mean, and `pairs` has no reference - "
            "use it with `against`"
        ),
    ),
    "neither pairs nor reference": (
        "{name: x, margin: 2}",
        "9:15: an entry of `equivalence` has none of `against` or `pairs` - write exactly one of them",
    ),
    "weights": (
        "{name: x, pairs: all, margin: 2, weights: {north: 1}}",
        (
            "9:48: the key `weights` is not known in `equivalence` - "
            "known here: name, against, pairs, margin, "
            "lower, upper, margin-percent, margin-source, adjust, alpha"
        ),
    ),
    "a misspelt margin": (
        "{name: x, pairs: all, magrin: 2}",
        "9:37: the key `magrin` is not known in `equivalence` - did you mean `margin`?",
    ),
    "an adjustment for differences": (
        "{name: x, pairs: all, margin: 2, adjust: tukey-kramer}",
        "9:56: `equivalence.adjust` is `tukey-kramer` - expected none, bonferroni or holm",
    ),
}


@pytest.mark.parametrize(("entry", "fault"), EQUIVALENCE.values(), ids=EQUIVALENCE.keys())
def test_an_equivalence_test_is_refused_with_its_place_and_what_was_expected(entry: str, fault: str) -> None:
    assert faults_of(with_levels(f"equivalence: [{entry}]\n")) == [fault]


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
        with_levels("comparisons: [{name: x, against: east, adjust: holm}]\n"), "  file: values.csv\n", ""
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
    assert faults_of(with_levels(section)) == [
        "13:11: `comparisons.name` holds `pairs` twice - expected each once; it stands on line 10"
    ]


def test_a_family_of_every_kind_may_stand_together() -> None:
    section = """\
design: {variances: separate}
comparisons:
  - {name: a, pairs: all, adjust: games-howell}
  - {name: b, against: north, adjust: dunnett-step-down, alternative: greater}
  - {name: c, weights: {north: 1, south: -1}, adjust: scheffe, alternative: less}
"""
    assert [comparison.adjust for comparison in study_of(with_levels(section)).comparisons] == [
        "games-howell",
        "dunnett-step-down",
        "scheffe",
    ]
