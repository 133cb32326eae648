"""What is refused among equivalence tests and ratios of spread: in which words, and at which place."""

import pytest

from study.examples import SMALLEST, edited, faults_of, planned

MARGIN = "write `margin`, or `lower` and `upper`, or `margin-percent`, or `lower-percent` and `upper-percent`"
ADD_ADJUST = "add how p-values are adjusted, such as `adjust: holm`, or `adjust: none`"
BELOW_HALF = "expected a number above 0 and below 0.5, such as 0.05"

EQUIVALENCE = {
    "no margin": (
        "{name: x, pairs: all, adjust: holm}",
        f"9:15: an entry of `equivalence` has no margin - {MARGIN}",
    ),
    "two kinds of margin": (
        "{name: x, against: north, adjust: holm, margin: 1, margin-percent: 2}",
        f"9:15: an entry of `equivalence` has more than one margin - {MARGIN}",
    ),
    "a range in units and in percent": (
        "{name: x, against: north, adjust: holm, lower: -1, upper-percent: 2}",
        f"9:15: an entry of `equivalence` has more than one margin - {MARGIN}",
    ),
    "half an interval": (
        "{name: x, pairs: all, adjust: holm, lower: -1}",
        "9:51: `equivalence.lower` stands without `upper` - add `upper: ...`",
    ),
    "half an interval in percent": (
        "{name: x, against: north, adjust: holm, upper-percent: 5}",
        "9:55: `equivalence.upper-percent` stands without `lower-percent` - add `lower-percent: ...`",
    ),
    "an interval beside nought": (
        "{name: x, pairs: all, adjust: holm, lower: 1, upper: 2}",
        (
            "9:51: the range from `equivalence.lower` to `equivalence.upper` does not hold 0 inside - "
            "expected `lower` below 0 and `upper` above 0"
        ),
    ),
    "an interval in percent beside nought": (
        "{name: x, against: north, adjust: holm, lower-percent: -5, upper-percent: -2}",
        (
            "9:55: the range from `equivalence.lower-percent` to `equivalence.upper-percent` does not hold "
            "0 inside - expected `lower-percent` below 0 and `upper-percent` above 0"
        ),
    ),
    "a margin of nought": (
        "{name: x, pairs: all, adjust: holm, margin: 0}",
        "9:59: `equivalence.margin` is `0` - expected a number above 0",
    ),
    "percent of no reference": (
        "{name: x, pairs: all, adjust: holm, margin-percent: 2}",
        (
            "9:51: `equivalence.margin-percent` is of the reference's mean, and `pairs` has no reference - "
            "use it with `against`"
        ),
    ),
    "limits in percent of no reference": (
        "{name: x, pairs: all, adjust: holm, lower-percent: -2, upper-percent: 2}",
        (
            "9:51: `equivalence.lower-percent` is of the reference's mean, and `pairs` has no reference - "
            "use it with `against`"
        ),
    ),
    "a lower limit of nothing": (
        "{name: x, against: north, adjust: holm, lower-percent: -100, upper-percent: 2}",
        (
            "9:70: `equivalence.lower-percent` is `-100` - "
            "expected a number above -100, since a mean of 0 or below would otherwise do"
        ),
    ),
    "a margin as large as the mean": (
        "{name: x, against: north, adjust: holm, margin-percent: 100}",
        (
            "9:71: `equivalence.margin-percent` reaches down to a mean of 0 or below - "
            "expected a number above 0 and below 100"
        ),
    ),
    "non-inferiority with two limits": (
        "{name: x, against: north, adjust: holm, non-inferiority: not-lower, lower: -1, upper: 1}",
        (
            "9:55: `equivalence.non-inferiority` has one limit, and `lower` is one of two - "
            "use it with `margin` or `margin-percent`"
        ),
    ),
    "non-inferiority with two limits in percent": (
        (
            "{name: x, against: north, adjust: holm, non-inferiority: not-higher, lower-percent: -1, "
            "upper-percent: 1}"
        ),
        (
            "9:55: `equivalence.non-inferiority` has one limit, and `lower-percent` is one of two - "
            "use it with `margin` or `margin-percent`"
        ),
    ),
    "non-inferiority of pairs": (
        "{name: x, pairs: all, adjust: holm, non-inferiority: not-lower, margin: 1}",
        (
            "9:51: `equivalence.non-inferiority` stands beside `pairs`, where neither level comes first - "
            "use it with `against`"
        ),
    ),
    "non-inferiority in other words": (
        "{name: x, against: north, adjust: holm, non-inferiority: lower, margin: 1}",
        ("9:72: `equivalence.non-inferiority` is `lower` - expected not-lower or not-higher"),
    ),
    "neither pairs nor reference": (
        "{name: x, margin: 2}",
        "9:15: an entry of `equivalence` has none of `against` or `pairs` - write exactly one of them",
    ),
    "weights": (
        "{name: x, pairs: all, adjust: holm, margin: 2, weights: {north: 1}}",
        (
            "9:62: the key `weights` is not known in `equivalence` - known here: name, against, pairs, "
            "margin, lower, upper, margin-percent, lower-percent, upper-percent, non-inferiority, "
            "margin-source, adjust, alpha, response"
        ),
    ),
    "a misspelt margin": (
        "{name: x, pairs: all, adjust: holm, magrin: 2}",
        "9:51: the key `magrin` is not known in `equivalence` - did you mean `margin`?",
    ),
    "an adjustment for differences": (
        "{name: x, pairs: all, margin: 2, adjust: tukey-kramer}",
        "9:56: `equivalence.adjust` is `tukey-kramer` - expected none, bonferroni or holm",
    ),
    "a method for false discoveries": (
        "{name: x, pairs: all, margin: 2, adjust: fdr}",
        (
            "9:56: `equivalence.adjust` is `fdr` - expected none, bonferroni or holm; methods that control "
            "the rate of false discoveries are not offered, because planned comparisons and tests are "
            "confirmatory"
        ),
    ),
    "no adjustment of several rows": (
        "{name: x, against: north, margin: 2}",
        f"9:15: the key `equivalence.adjust` is missing; the family has more than one row - {ADD_ADJUST}",
    ),
    "an alpha with which anything is equivalent": (
        "{name: x, against: north, margin: 2, adjust: none, alpha: 0.5}",
        f"9:73: `equivalence.alpha` is `0.5` - {BELOW_HALF}",
    ),
    "a response that the study does not have": (
        "{name: x, against: north, margin: 2, adjust: none, response: mas}",
        (
            "9:76: `equivalence.response` names `mas`, which is no response of the study - "
            "expected one of `data.response`; did you mean `mass`?"
        ),
    ),
    "an undeclared reference": (
        "{name: x, against: est, margin: 2, adjust: none}",
        (
            "9:34: `equivalence.against` names the level `est`, which is not declared - "
            "expected one of `data.levels`"
        ),
    ),
}


@pytest.mark.parametrize(("entry", "fault"), EQUIVALENCE.values(), ids=EQUIVALENCE.keys())
def test_an_equivalence_test_is_refused_with_its_place_and_what_was_expected(entry: str, fault: str) -> None:
    assert faults_of(planned(f"equivalence: [{entry}]\n")) == [fault]


SPREAD = {
    "no reference": (
        "{adjust: holm}",
        "9:9: the key `spread.against` is missing - add `against: ...`",
    ),
    "an undeclared reference": (
        "{against: nort, adjust: holm}",
        (
            "9:19: `spread.against` names the level `nort`, which is not declared - "
            "expected one of `data.levels`; did you mean `north`?"
        ),
    ),
    "no adjustment of several rows": (
        "{against: north}",
        f"9:9: the key `spread.adjust` is missing; the family has more than one row - {ADD_ADJUST}",
    ),
    "a method for means": (
        "{against: north, adjust: dunnett}",
        "9:34: `spread.adjust` is `dunnett` - expected none, bonferroni or holm",
    ),
    "a reference as a word": (
        "north",
        "9:9: `spread` is `north` - expected a mapping with the keys against and adjust",
    ),
}


@pytest.mark.parametrize(("spread", "fault"), SPREAD.values(), ids=SPREAD.keys())
def test_ratios_of_spread_are_refused_with_their_place_and_what_was_expected(spread: str, fault: str) -> None:
    assert faults_of(planned(f"spread: {spread}\n")) == [fault]


def test_two_declared_levels_leave_one_row_and_nothing_to_adjust() -> None:
    text = edited(SMALLEST, "alpha", "  levels: [a, b]\nalpha")
    section = "equivalence: [{name: x, against: a, margin: 1}]\nspread: {against: b}\n"
    assert faults_of(text + section) == []


def test_undeclared_levels_make_the_adjustment_compulsory() -> None:
    section = "equivalence: [{name: x, against: a, margin: 1}]\nspread: {against: b}\n"
    assert faults_of(SMALLEST + section) == [
        f"8:15: the key `equivalence.adjust` is missing; `data.levels` are not declared - {ADD_ADJUST}",
        f"9:9: the key `spread.adjust` is missing; `data.levels` are not declared - {ADD_ADJUST}",
    ]


def test_all_faults_of_a_test_show_in_one_pass() -> None:
    section = "equivalence:\n  - {against: nort, lower: 1, upper: 0, alpha: 2, response: m, adjust: hlm}\n"
    assert [fault.partition(": ")[0] for fault in faults_of(planned(section))] == [
        "10:5",
        "10:15",
        "10:21",
        "10:48",
        "10:61",
        "10:72",
    ]
