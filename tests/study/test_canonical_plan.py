"""Two definitions are the same plan where they mean the same, and another one where anything differs."""

import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.study.canonical_plan import plan_bytes, plan_digest, plan_document
from assayfolio.study.change_reasons import change_emptiness
from assayfolio.study.differences import Difference, differences, kept_names
from assayfolio.study.reading import read_study
from support.every_option import PLANS, files_with_every
from support.studies import CONFIGS, DEMO_STUDIES

PLAN = """\
study: TST-1
title: Sulfate by three methods
data:
  file: data/values.csv
  response: sulfate
  factor: method
  unit: mg/L
  levels: [gravimetric, turbidimetric, chromatographic]
  replicates: 3
alpha: 0.05
comparisons:
  - {name: all pairs of methods, pairs: all, adjust: tukey-kramer}
  - {name: against the reference, against: gravimetric, adjust: dunnett}
  - {name: wet against dry, weights: {gravimetric: 1, turbidimetric: -1/2, chromatographic: -1/2}}
equivalence:
  - {name: as good as, against: gravimetric, margin: 0.5, margin-source: method 4.2, adjust: holm}
checks: {normality: shapiro-wilk}
sign-off:
  - {role: author, meaning: I performed this analysis as planned}
"""


def study(text=PLAN):
    return read_study(text.encode(), "configs/study.yaml")


def document(text=PLAN):
    return plan_document(study(text))


SAME = {
    "comments and blank lines": "# a comment\n" + PLAN.replace("alpha:", "\n\n# level\nalpha:"),
    "a number written longer": PLAN.replace("alpha: 0.05", "alpha: 0.0500"),
    "a number as a fraction": PLAN.replace("alpha: 0.05", "alpha: 1/20"),
    "weights in another order": PLAN.replace(
        "gravimetric: 1, turbidimetric: -1/2", "turbidimetric: -0.5, gravimetric: 1"
    ),
    "flow written as block": PLAN.replace(
        "checks: {normality: shapiro-wilk}", "checks:\n  normality:\n    - shapiro-wilk"
    ),
    "keys in another order": PLAN.replace("alpha: 0.05\n", "") + "alpha: 0.05\n",
    "what holds anyway": PLAN + "design: {effects: fixed, variances: pooled}\n",
    "one number for all levels": PLAN.replace(
        "replicates: 3", "replicates: {gravimetric: 3, chromatographic: 3, turbidimetric: 3}"
    ),
    "an exclusions file": PLAN.replace("  unit:", "  exclusions: left-out.yaml\n  unit:"),
    "a margin written as two limits": PLAN.replace("margin: 0.5", "lower: -0.5, upper: 0.5"),
}


@pytest.mark.parametrize("how", SAME)
def test_what_means_the_same_is_the_same_plan(how):
    assert SAME[how] != PLAN
    assert plan_digest(study(SAME[how])) == plan_digest(study())
    assert differences(document(), document(SAME[how])) == ()


MEANING = "I performed this analysis"
CHANGES = {
    "alpha": ("alpha: 0.05", "alpha: 0.01", [("alpha", "0.05", "0.01")]),
    "title": ("three methods", "3 methods", [("title", "Sulfate by three methods", "Sulfate by 3 methods")]),
    "file": ("data/values.csv", "data/others.csv", [("data.file", "data/values.csv", "data/others.csv")]),
    "unit": ("unit: mg/L", "unit: g/L", [("data.units.sulfate", "mg/L", "g/L")]),
    "missing values": ("  unit:", "  missing: omit\n  unit:", [("data.missing", "refuse", "omit")]),
    "method of a family": (
        "against: gravimetric, adjust: dunnett",
        "against: gravimetric, adjust: holm",
        [("comparisons.against the reference.adjust", "dunnett", "holm")],
    ),
    "a weight": (
        "gravimetric: 1, turbidimetric: -1/2, chromatographic: -1/2",
        "gravimetric: 1, turbidimetric: -1/3, chromatographic: -2/3",
        [
            ("comparisons.wet against dry.weights.turbidimetric", "-0.5", "-1/3"),
            ("comparisons.wet against dry.weights.chromatographic", "-0.5", "-2/3"),
        ],
    ),
    "margin": ("margin: 0.5", "margin: 0.6", [
        ("equivalence.as good as.lower", "-0.5", "-0.6"),
        ("equivalence.as good as.upper", "0.5", "0.6"),
    ]),
    "source of the margin": (
        "method 4.2", "method 4.3", [("equivalence.as good as.margin-source", "method 4.2", "method 4.3")]
    ),
    "meaning of a signature": (
        "as planned}", "alone}",
        [("sign-off.author.meaning", f"{MEANING} as planned", f"{MEANING} alone")],
    ),
    "a whole section": (
        "checks: {normality: shapiro-wilk}\n", "", [("checks.normality", "shapiro-wilk", "")]
    ),
}  # fmt: skip


@pytest.mark.parametrize("what", CHANGES)
def test_every_change_is_named_with_its_old_and_new_value(what):
    old, new, expected = CHANGES[what]
    changed = PLAN.replace(old, new)
    assert changed != PLAN
    found = differences(document(), document(changed))
    assert [(one.key, one.old, one.new) for one in found] == expected
    assert plan_digest(study(changed)) != plan_digest(study())


def test_a_family_that_is_added_or_taken_away_is_named_whole():
    less = re.sub(r"  - \{name: against the reference.*\n", "", PLAN)
    (added,) = differences(document(less), document())
    assert added.key == "comparisons.against the reference"
    assert added.old is None
    assert "adjust: dunnett" in added.new
    (removed,) = differences(document(), document(less))
    assert (removed.old, removed.new) == (added.new, None)


def test_another_order_of_the_families_is_a_difference():
    lines = PLAN.splitlines(keepends=True)
    at = next(place for place, line in enumerate(lines) if "all pairs" in line)
    lines[at], lines[at + 1] = lines[at + 1], lines[at]
    (found,) = differences(document(), document("".join(lines)))
    assert found.key == "comparisons (order)"
    assert found.new.startswith("against the reference, all pairs of methods")


def test_a_family_stands_as_registered_only_where_level_design_and_data_do():
    other_title = document(PLAN.replace("Sulfate by", "Sulphate by"))
    assert kept_names("comparisons", document(), other_title) == {
        "all pairs of methods",
        "against the reference",
        "wet against dry",
    }
    other_method = document(PLAN.replace("adjust: dunnett", "adjust: holm"))
    kept = kept_names("comparisons", document(), other_method)
    assert kept == {"all pairs of methods", "wet against dry"}
    for old, new in (("alpha: 0.05", "alpha: 0.01"), ("  unit:", "  missing: omit\n  unit:")):
        assert not kept_names("comparisons", document(), document(PLAN.replace(old, new)))
        assert not kept_names("equivalence", document(), document(PLAN.replace(old, new)))


@pytest.mark.parametrize("name", DEMO_STUDIES)
def test_a_plan_is_canonical_for_every_demonstration_study(name):
    content = (CONFIGS / f"{name}.yaml").read_bytes()
    first, second = (read_study(content, file) for file in ("a.yaml", "elsewhere/b.yaml"))
    assert plan_bytes(first) == plan_bytes(second)


@pytest.mark.parametrize("name", PLANS)
def test_a_plan_with_every_option_differs_from_itself_in_nothing(name):
    text, _ = files_with_every(name)
    assert differences(document(text), document(text)) == ()


_leaves = st.none() | st.booleans() | st.integers(-9, 9) | st.text("ab ", max_size=3)
_names = st.sampled_from(["name", "adjust", "alpha", "comparisons", "weights", "role", "sign-off"])
_documents = st.recursive(
    _leaves,
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(_names, inner, max_size=3),
    max_leaves=12,
)
_plans = st.dictionaries(_names, _documents, max_size=4)


@given(_plans, _plans)
def test_two_documents_differ_in_something_exactly_where_they_are_not_equal(old, new):
    def without_nothing(value):
        """A key with nothing under it and a key that is not there mean the same."""
        if isinstance(value, dict):
            return {key: without_nothing(part) for key, part in value.items() if part is not None}
        if isinstance(value, list):
            return [without_nothing(part) for part in value]
        return repr(value)

    found = differences(old, new)
    assert bool(found) == (without_nothing(old) != without_nothing(new))
    assert all(isinstance(one, Difference) and one.key for one in found)


EMPTY_REASONS = [
    "",
    "   ",
    "changed",
    "updated the plan",
    "updated the plan again",
    "Minor correction of the study definition.",
    "because it was necessary to amend",
    "xxxxxxxxxxxxxxx",
    "amendment no. 2 of 2031",
]


@pytest.mark.parametrize("reason", EMPTY_REASONS)
def test_a_reason_that_fits_any_change_is_none(reason):
    assert change_emptiness(reason) is not None


def test_a_reason_that_says_what_happened_may_be_one_but_not_twice():
    reason = "kit B is no longer sold, see letter of 4 March"
    assert change_emptiness(reason) is None
    copied = f"  {reason.upper()} "
    assert change_emptiness(copied, [reason]) == "the very text of an earlier reason"
