"""What does not go together is refused by `check` before any data are looked at, with what to use instead.

The file with the values does not exist in any of these workspaces, so nothing can have been analysed.
"""

import pytest

from support.workspaces import Bench

HEAD = """\
study: TST-4
title: What does not go together
data:
  file: data/values.csv
  response: content
  factor: method
  unit: mg/L
  levels: [kit, titration, probe]
alpha: 0.05
"""
TWO = HEAD.replace("response: content", "response: [content, ash]")
NUMBERED = HEAD.replace("[kit, titration, probe]", '["5", "10", "20"]')
SEPARATE = "design: {variances: separate}\n"
RANDOM = "design: {effects: random}\n"
COMPARISON = "comparisons: [{name: x, %s}]\n"
EQUIVALENCE = "equivalence: [{name: x, %s}]\n"
PAIRS = COMPARISON % "pairs: all, adjust: %s"
AGAINST = COMPARISON % "against: titration, adjust: %s"
CONTRASTS = (
    "contrasts: [{name: y, weights: {kit: 1, probe: -1}}, {name: z, weights: {kit: 1, titration: -1}}]"
)
HALVES = "{kit: 1/2, probe: 1/2, titration: -1}"

# Each: the definition, the part of it at which the fault is placed (its last occurrence), what is wrong with
# it, what to use instead.
REFUSED = {
    "tukey-kramer with separate variances": (
        HEAD + SEPARATE + PAIRS % "tukey-kramer",
        "tukey-kramer",
        "`comparisons.adjust` is `tukey-kramer`, which needs one variance for all levels",
        "use `games-howell`, or `variances: pooled`",
    ),
    "games-howell with one variance": (
        HEAD + PAIRS % "games-howell",
        "games-howell",
        "`comparisons.adjust` is `games-howell`, which needs separate variances",
        "use `design.variances: separate` with it, or another method such as `tukey-kramer`",
    ),
    "dunnett with separate variances": (
        HEAD + SEPARATE + AGAINST % "dunnett",
        "dunnett",
        "`comparisons.adjust` is `dunnett`, which needs one variance for all levels",
        "use `holm`, `bonferroni` or `sidak`, or `variances: pooled`",
    ),
    "step-down dunnett with separate variances": (
        HEAD + SEPARATE + AGAINST % "dunnett-step-down",
        "dunnett-step-down",
        "`comparisons.adjust` is `dunnett-step-down`, which needs one variance for all levels",
        "use `holm`, `bonferroni` or `sidak`, or `variances: pooled`",
    ),
    "scheffe with separate variances": (
        HEAD + SEPARATE + PAIRS % "scheffe",
        "scheffe",
        "`comparisons.adjust` is `scheffe`, which needs one variance for all levels",
        "use `holm`, `bonferroni` or `sidak`, or `variances: pooled`",
    ),
    "scheffe for one contrast with separate variances": (
        HEAD + SEPARATE + COMPARISON % f"weights: {HALVES}, adjust: scheffe",
        "scheffe",
        "`comparisons.adjust` is `scheffe`, which needs one variance for all levels",
        "use `none` for a single comparison, or `variances: pooled`",
    ),
    "scheffe on one side": (
        HEAD + AGAINST % "scheffe, alternative: greater",
        "greater",
        "`comparisons.alternative` is `greater`, and scheffe is two-sided by construction",
        "use `two-sided`, or another method such as `holm`",
    ),
    "sidak for contrasts on one side": (
        HEAD + COMPARISON % f"{CONTRASTS}, adjust: sidak, alternative: less",
        "less",
        "`comparisons.alternative` is `less`, and the inequality behind sidak is for two-sided contrasts",
        "use `bonferroni` or `holm`, or `two-sided`",
    ),
    "tukey-kramer against a reference": (
        HEAD + AGAINST % "tukey-kramer",
        "tukey-kramer",
        "`comparisons.adjust` is `tukey-kramer`, which fits only `pairs`",
        "expected another method beside `against`",
    ),
    "dunnett for all pairs": (
        HEAD + PAIRS % "dunnett",
        "dunnett",
        "`comparisons.adjust` is `dunnett`, which fits only `against`",
        "expected another method beside `pairs`",
    ),
    "holm for one contrast": (
        HEAD + COMPARISON % f"weights: {HALVES}, adjust: holm",
        "holm",
        "`comparisons.adjust` is `holm`, but a contrast is one comparison",
        "expected none or scheffe",
    ),
    "a method for false discoveries": (
        HEAD + PAIRS % "benjamini-hochberg",
        "benjamini-hochberg",
        "`comparisons.adjust` is `benjamini-hochberg`",
        "methods that control the rate of false discoveries are not offered",
    ),
    "a direction for all pairs": (
        HEAD + PAIRS % "holm, alternative: greater",
        "alternative",
        "`comparisons.alternative` stands beside `pairs`, where neither level comes first",
        "use it with `against` or `weights`",
    ),
    "weights that do not add up to nought": (
        HEAD + COMPARISON % "weights: {kit: 1, probe: -1/2}",
        "{kit: 1, probe: -1/2}",
        "`comparisons.weights` add up to 1/2",
        "expected weights that add up to exactly 0",
    ),
    "a trend on names without an order": (
        HEAD + COMPARISON % "trend: linear",
        "linear",
        "`comparisons.trend` needs levels that are numbers, unlike `kit`, `titration`, `probe`",
        "names without an order have no trend, compare them by `pairs` or `contrasts`",
    ),
    "a trend with a score for some levels": (
        HEAD + COMPARISON % "trend: linear, scores: {kit: 1, probe: 2}",
        "{kit: 1, probe: 2}",
        "`comparisons.scores` gives no number for `titration`",
        "expected one for each level",
    ),
    "a polynomial of a degree as high as the number of levels": (
        NUMBERED + COMPARISON % "trend: polynomial, degree: 3, adjust: holm",
        "3, adjust",
        "`comparisons.degree` is 3, and there are 3 levels",
        "expected at most one less than the number of levels",
    ),
    "the pooled F test with separate variances": (
        HEAD + "design: {variances: separate, omnibus: f}\n",
        "f}",
        "`design.omnibus` is `f`, which needs one variance for all levels",
        "use `welch` or `brown-forsythe`, or `variances: pooled`",
    ),
    "welch with one variance": (
        HEAD + "design: {omnibus: welch}\n",
        "welch",
        "`design.omnibus` is `welch`, which is for separate variances",
        "use `f`, or `variances: separate`",
    ),
    "brown-forsythe of means with one variance": (
        HEAD + "design: {omnibus: brown-forsythe}\n",
        "brown-forsythe",
        "`design.omnibus` is `brown-forsythe`, which is for separate variances",
        "use `f`, or `variances: separate`",
    ),
    "equivalence without a margin": (
        HEAD + EQUIVALENCE % "against: titration, adjust: holm",
        "{name: x",
        "an entry of `equivalence` has no margin",
        "write `margin`, or `lower` and `upper`, or `margin-percent`, or `lower-percent` and `upper-percent`",
    ),
    "a margin in percent of no reference": (
        HEAD + EQUIVALENCE % "pairs: all, margin-percent: 5, adjust: holm",
        "margin-percent",
        "`equivalence.margin-percent` is of the reference's mean, and `pairs` has no reference",
        "use it with `against`",
    ),
    "non-inferiority of all pairs": (
        HEAD + EQUIVALENCE % "pairs: all, margin: 1, non-inferiority: not-lower, adjust: holm",
        "non-inferiority",
        "`equivalence.non-inferiority` stands beside `pairs`, where neither level comes first",
        "use it with `against`",
    ),
    "non-inferiority with two limits": (
        HEAD
        + EQUIVALENCE % "against: titration, lower: -1, upper: 1, non-inferiority: not-lower, adjust: holm",
        "non-inferiority",
        "`equivalence.non-inferiority` has one limit, and `lower` is one of two",
        "use it with `margin` or `margin-percent`",
    ),
    "equivalence by a method for differences": (
        HEAD + EQUIVALENCE % "pairs: all, margin: 1, adjust: tukey-kramer",
        "tukey-kramer",
        "`equivalence.adjust` is `tukey-kramer`",
        "expected none, bonferroni or holm",
    ),
    "comparisons of random levels": (
        HEAD + RANDOM + PAIRS % "holm",
        "comparisons",
        "`comparisons` compares levels, but with `design.effects: random` they are a mere sample",
        "use `precision` for the spread between levels, or `effects: fixed`",
    ),
    "equivalence of random levels": (
        HEAD + RANDOM + EQUIVALENCE % "pairs: all, margin: 1, adjust: holm",
        "equivalence",
        "`equivalence` compares levels, but with `design.effects: random` they are a mere sample",
        "use `precision` for the spread between levels, or `effects: fixed`",
    ),
    "variances of random levels against one of them": (
        HEAD + RANDOM + "spread: {against: kit, adjust: holm}\n",
        "spread",
        "`spread` compares the variances of levels, but with `design.effects: random` they are a mere sample",
        "use `precision` for the spread between levels, or `effects: fixed`",
    ),
    "power for random levels": (
        HEAD + RANDOM + "power: {difference: 1, sigma: 1, target: 0.9}\n",
        "power",
        "`power` is about comparing levels, but with `design.effects: random` they are a mere sample",
        "use `precision` for the spread between levels, or `effects: fixed`",
    ),
    "random levels with separate variances": (
        HEAD + "design: {effects: random, variances: separate}\n",
        "separate",
        "`design.variances` is `separate`, for which there is no method here with `design.effects: random`",
        "use `variances: pooled`",
    ),
    "power with separate variances": (
        HEAD + SEPARATE + "power: {difference: 1, sigma: 1, target: 0.9}\n",
        "power",
        "`power` needs one standard deviation, and `design.variances` is separate",
        "leave it out: power is computed for a common standard deviation only",
    ),
    "more values at a reference that nothing is compared with": (
        HEAD + "power: {difference: 1, sigma: 1, target: 0.9, allocation: control}\n",
        "control",
        "`power.allocation` is `control`, and nothing is compared with a reference",
        "use `equal`, or plan comparisons with `against`",
    ),
    "power for two responses at once": (
        TWO + "power: {difference: 1, sigma: 1, target: 0.9}\n",
        "{difference",
        "the key `power.response` is missing; the study has several responses",
        "add the one that `difference` and `sigma` are about",
    ),
    "one repeatability of separate variances": (
        HEAD + SEPARATE + "precision: {estimate: true}\n",
        "true",
        "`precision.estimate` is `true`, and with `design.variances: separate` the levels share no",
        "use `spread` or criteria on `level-sd`, or `variances: pooled`",
    ),
    "reproducibility of fixed levels": (
        HEAD + "precision: {estimate: true, conditions: reproducibility}\n",
        "conditions",
        "`precision.conditions` names the total of a sample of levels, and `design.effects` is fixed",
        "leave it out, or use `effects: random` if the levels are a sample",
    ),
    "a limit on the spread between fixed levels": (
        HEAD + "precision: {estimate: true}\ncriteria: [{quantity: between-sd, at-most: 1}]\n",
        "between-sd",
        "`criteria.quantity` is `between-sd`, which only a sample of levels has",
        "use a `repeatability-` quantity or `largest-difference`, or `effects: random`",
    ),
    "a limit on a repeatability that is not estimated": (
        HEAD + "criteria: [{quantity: repeatability-sd, at-most: 1}]\n",
        "repeatability-sd",
        "`criteria.quantity` is `repeatability-sd`, which `precision` has to estimate",
        "add `precision: {estimate: true}`",
    ),
    "an adjustment over the responses of which there is one": (
        HEAD + "design: {across-responses: holm}\n",
        "holm",
        "`design.across-responses` is `holm`, and the study has one response",
        "leave it out, or use `none`",
    ),
    "holm over the responses beside intervals": (
        TWO + "design: {across-responses: holm}\n" + PAIRS % "tukey-kramer",
        "tukey-kramer",
        "`comparisons.adjust` is `tukey-kramer`, and `design.across-responses: holm` adjusts the rows",
        "use `adjust: holm` (`none` for a single row), or `across-responses: bonferroni`",
    ),
}


def place_of(part, content):
    """The line and column of the last occurrence of `part`, as a message gives them."""
    before = content[: content.rindex(part)]
    return f"configs/study.yaml:{before.count(chr(10)) + 1}:{len(before) - before.rfind(chr(10))}:"


@pytest.mark.parametrize("name", REFUSED)
def test_it_is_refused_before_any_data_with_what_to_use_instead(name, tmp_path):
    content, part, what, instead = REFUSED[name]
    bench = Bench(tmp_path / "w", content, None)
    before = set(bench.root.rglob("*"))
    answer = bench("check", bench.study)
    assert answer.code == 2
    assert set(bench.root.rglob("*")) == before, "a check writes nothing"
    (fault,) = [line for line in answer.err.splitlines() if line.startswith("  configs/study.yaml:")]
    assert place_of(part, content) in fault
    assert what in fault
    assert instead in fault
    assert "Traceback" not in answer.err + answer.out


@pytest.mark.parametrize("name", ["tukey-kramer with separate variances", "equivalence without a margin"])
def test_a_run_refuses_the_same_before_it_looks_for_the_data(name, tmp_path):
    content, part, what, instead = REFUSED[name]
    bench = Bench(tmp_path / "w", content, None)
    answer = bench("run", bench.study)
    assert answer.code == 2
    assert all(words in answer.err for words in (place_of(part, content), what, instead))
    assert "values.csv" not in answer.err
    assert bench.files_in_runs() == {"audit-trail.jsonl", "audit-trail.head"}


def test_every_refusal_of_a_plan_shows_in_one_pass(tmp_path):
    content = HEAD + SEPARATE + PAIRS % "tukey-kramer" + EQUIVALENCE % "against: kit, adjust: holm"
    content += "power: {difference: 1, sigma: 1, target: 0.9}\n"
    bench = Bench(tmp_path / "w", content, None)
    answer = bench("check", bench.study)
    assert answer.code == 2
    for part in ("tukey-kramer", "{name: x, against", "power"):
        assert place_of(part, content) in answer.err
