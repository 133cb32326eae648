"""What the terminal says of a plan that was checked and of a run that is done."""

from assayfolio.workflow.plan_words import plan_words
from support.studies import study_of
from support.workspaces import Bench

HEAD = """\
study: TST-1
title: A test of the words
data: {file: data/values.csv, response: content, factor: lot, unit: mg/kg, levels: [a, b, c]}
alpha: 0.05
"""


def words(parts: str) -> list[str]:
    return list(plan_words(study_of(parts, HEAD)))


def test_everything_that_is_planned_is_named():
    listed = words(
        "comparisons: [{name: to a, against: a, adjust: dunnett, alternative: less}]\n"
        "equivalence: [{name: alike, against: a, margin: 1, adjust: holm}]\n"
        "spread: {against: a, adjust: holm}\n"
        "precision: {estimate: true, confidence: 0.9}\n"
        "outliers: {test: [grubbs, cochran]}\n"
        "checks: {equal-variances: levene}\n"
        "criteria:\n"
        "  - {quantity: repeatability-sd, at-most: 2}\n"
        "  - {quantity: level-mean, level: b, at-least: 1}\n"
        "power: {difference: 1, sigma: 1, target: 0.9}\n"
    )
    assert listed == [
        "to a: against a, dunnett, less",
        "alike: equivalence, against a, holm",
        "variances against a, holm",
        "precision: repeatability, intervals at 0.9",
        "outlier proposals: grubbs, cochran",
        "checks: levene",
        "criterion: repeatability-sd at most 2",
        "criterion: level-mean of b at least 1",
        "power: target 0.9; `power` shows what the plan reaches",
    ]


def test_a_sample_of_levels_says_what_its_total_is_called():
    listed = words(
        "design: {effects: random}\n"
        "precision: {estimate: true, varied: laboratory, conditions: reproducibility}\n"
    )
    assert listed == [
        "levels are a sample (random effects)",
        "precision: repeatability, between levels, reproducibility, intervals at 0.95",
    ]


RANDOM = """\
study: TST-9
title: Random levels with a value to look into
data: {file: data/values.csv, response: content, factor: day, unit: mg/kg}
design: {effects: random}
alpha: 0.05
precision: {estimate: true}
outliers: {test: grubbs}
checks: {equal-variances: levene}
"""
VALUES = "day,content\n" + "".join(
    f"d{day},{base + step / 10:.1f}\n"
    for day, base in enumerate((10, 10.4, 9.9, 10.2))
    for step in ((0, 1, 2, 1, 0, 40) if day == 2 else (0, 1, 2, 1, 0, 2))
)


def test_a_run_on_a_sample_of_levels_speaks_of_spread_and_of_what_to_look_into(tmp_path):
    bench = Bench(tmp_path / "w", RANDOM, VALUES)
    answer = bench("run", bench.study)
    assert answer.code == 0, answer.err
    assert "spread added by 4 levels" in answer.out
    assert "proposed for investigation, not removed: outlier at d2 (grubbs)" in answer.out
    assert "setting the pages" in answer.err
