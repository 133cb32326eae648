"""The studies that are run end to end use every key and word of a study definition.

A new word without such a study fails here.
"""

from collections.abc import Iterator
from typing import Any

import pytest

from assayfolio.errors import StudyError
from assayfolio.study import vocabulary
from support.data_studies import DEFINITIONS as DATA_DEFINITIONS
from support.data_studies import LEFT_OUT_AS_TYPED, STUDIES
from support.option_studies import DEFINITIONS
from support.shown_beyond import (
    CHECKS,
    EQUIVALENCE,
    EQUIVALENCE_ADJUSTMENTS,
    OUTLIERS,
    SPREAD_ADJUSTMENTS,
)
from support.shown_comparisons import ACROSS, ADJUSTMENTS, ALTERNATIVES, FAMILY_KINDS, OMNIBUS
from support.shown_precision_and_power import ALLOCATIONS, CONDITIONS, CRITERIA
from support.studies import study_of
from support.workspaces import Bench

# Where the words of each tuple of the vocabulary stand in a study definition.
PLACES_OF_WORDS = {
    "ENCODINGS": ("data.encoding",),
    "LAYOUTS": ("data.layout",),
    "MISSING": ("data.missing",),
    "BELOW_LIMIT": ("data.below-limit",),
    "ABOVE_LIMIT": ("data.above-limit",),
    "CHART_QUANTITIES": ("trend.quantities",),
    "RUN_RULES": ("trend.rules",),
    "DECIMAL_MARKS": ("data.decimal-mark",),
    "EFFECTS": ("design.effects",),
    "VARIANCES": ("design.variances",),
    "OMNIBUS_TESTS": ("design.omnibus",),
    "ACROSS_RESPONSES": ("design.across-responses",),
    "PAIRS": ("comparisons.pairs", "equivalence.pairs"),
    "TRENDS": ("comparisons.trend",),
    "ADJUSTMENTS": ("comparisons.adjust",),
    "ALTERNATIVES": ("comparisons.alternative",),
    "EQUIVALENCE_ADJUSTMENTS": ("equivalence.adjust", "spread.adjust"),
    "NON_INFERIORITY": ("equivalence.non-inferiority",),
    "OUTLIER_TESTS": ("outliers.test",),
    "VARIANCE_CHECKS": ("checks.equal-variances",),
    "NORMALITY_CHECKS": ("checks.normality",),
    "PRECISION_CONDITIONS": ("precision.conditions",),
    "ALLOCATIONS": ("power.allocation",),
    "QUANTITIES": ("criteria.quantity",),
    "ROLES": ("sign-off.role",),
}
SECTIONS_OF_KEYS = {
    "STUDY_KEYS": "",
    "DATA_KEYS": "data",
    "MEASUREMENT_KEYS": "measurement",
    "FACT_KEYS": "measurement.item",
    "WORKSHEET_KEYS": "worksheet",
    "EXCLUSION_FILE_KEYS": "left out",
    "EXCLUSION_KEYS": "left out.exclusions",
    "TREND_KEYS": "trend",
    "BASELINE_KEYS": "trend.baseline",
    "TREND_CRITERION_KEYS": "trend.criteria",
    "DESIGN_KEYS": "design",
    "COMPARISON_KEYS": "comparisons",
    "CONTRAST_KEYS": "comparisons.contrasts",
    "EQUIVALENCE_KEYS": "equivalence",
    "SPREAD_KEYS": "spread",
    "OUTLIER_KEYS": "outliers",
    "CHECK_KEYS": "checks",
    "PRECISION_KEYS": "precision",
    "POWER_KEYS": "power",
    "CRITERION_KEYS": "criteria",
    "SIGN_OFF_KEYS": "sign-off",
}
NOT_OF_A_STUDY = {
    "LABORATORY_KEYS",
    "PAPERS",
    "REQUIREMENTS",
    "FALSE_DISCOVERY_WORDS",
}
LISTS_OF_WORDS = {
    name: words for name, words in vars(vocabulary).items() if name.isupper() and isinstance(words, tuple)
}


def typed(part: Any, place: str = "") -> Iterator[tuple[str, str, str]]:
    """Every key of a definition with the section that it stands in, and the word typed there."""
    if isinstance(part, list):
        for item in part:
            yield from typed(item, place)
    elif isinstance(part, dict):
        for key, value in part.items():
            words = value if isinstance(value, list) else [value]
            for word in words:
                yield place, key, word if isinstance(word, str) else ""
            yield from typed(value, f"{place}.{key}".lstrip("."))


TYPED = {
    *(
        entry
        for definition in (*DEFINITIONS.values(), *DATA_DEFINITIONS.values())
        for entry in typed(definition)
    ),
    *typed(LEFT_OUT_AS_TYPED, "left out"),
}


def words_at(place: str) -> set[str]:
    section, _, key = place.rpartition(".")
    return {word for where, name, word in TYPED if (where, name) == (section, key)}


def test_it_is_known_where_in_a_study_every_list_of_words_belongs():
    assert set(LISTS_OF_WORDS) == {*PLACES_OF_WORDS, *SECTIONS_OF_KEYS, *NOT_OF_A_STUDY}


@pytest.mark.parametrize("name", PLACES_OF_WORDS)
def test_every_word_is_used_in_a_study(name):
    for place in PLACES_OF_WORDS[name]:
        assert words_at(place) == set(LISTS_OF_WORDS[name]), place


@pytest.mark.parametrize("name", SECTIONS_OF_KEYS)
def test_every_key_is_used_in_a_study(name):
    used = {key for section, key, _ in TYPED if section == SECTIONS_OF_KEYS[name]}
    assert used == set(LISTS_OF_WORDS[name])


@pytest.mark.parametrize("name", STUDIES)
def test_a_study_of_every_word_about_data_is_run_and_charted(name, tmp_path):
    study, files = STUDIES[name]
    bench = Bench(tmp_path / "w", study, None)
    for path, content in files.items():
        target = bench.study.parent / path
        target.parent.mkdir(parents=True, exist_ok=True)
        target.write_bytes(content)
    answer = bench("run", bench.study)
    assert answer.code == 0, answer.err
    if "trend" in DATA_DEFINITIONS[name]:
        charted = bench("trend", bench.study)
        assert charted.code == 0, charted.err


FAMILIES = {
    "pairs": "pairs: all",
    "against": 'against: "1"',
    "weights": 'weights: {"1": 1, "2": -1}',
    "contrasts": 'contrasts: [{name: y, weights: {"1": 1, "2": -1}}, {name: z, weights: {"1": 1, "3": -1}}]',
    "linear trend": "trend: linear",
    "polynomial trend": "trend: polynomial, degree: 2",
}
FAMILY_HEAD = """\
study: TST-1
title: One family
data: {file: data/values.csv, response: content, factor: lot, levels: ["1", "2", "3"]}
alpha: 0.05
"""


def kind_of(entry: dict[str, Any]) -> str:
    return f"{entry['trend']} trend" if "trend" in entry else next(key for key in FAMILIES if key in entry)


def fits(kind: str, adjust: str, alternative: str, variances: str) -> bool:
    """Whether a study with such a family is accepted."""
    direction = "" if alternative == "two-sided" else f", alternative: {alternative}"
    family = f"comparisons: [{{name: x, {FAMILIES[kind]}, adjust: {adjust}{direction}}}]\n"
    try:
        study_of(f"design: {{variances: {variances}}}\n{family}", FAMILY_HEAD)
    except StudyError:
        return False
    return True


def families_used(variances: str) -> list[dict[str, Any]]:
    return [
        entry
        for definition in DEFINITIONS.values()
        if definition.get("design", {}).get("variances", "pooled") == variances
        for entry in definition.get("comparisons", [])
    ]


@pytest.mark.parametrize("variances", vocabulary.VARIANCES)
def test_every_adjustment_is_used_with_every_kind_of_family_that_it_fits(variances):
    used = {(kind_of(entry), entry.get("adjust", "none")) for entry in families_used(variances)}
    possible = {
        (kind, adjust)
        for kind in FAMILIES
        for adjust in vocabulary.ADJUSTMENTS
        if fits(kind, adjust, "two-sided", variances)
    }
    assert len(possible) > 20
    assert possible <= used


def test_every_alternative_is_used_with_every_kind_of_family_that_it_fits():
    used = {(kind_of(entry), entry.get("alternative", "two-sided")) for entry in families_used("pooled")}
    possible = {
        (kind, alternative)
        for kind in FAMILIES
        for alternative in vocabulary.ALTERNATIVES
        if fits(kind, "none", alternative, "pooled")
    }
    assert possible == used


def test_every_word_for_a_method_has_its_line_in_the_tables():
    for words, table in (
        (vocabulary.ADJUSTMENTS, ADJUSTMENTS),
        (vocabulary.ALTERNATIVES, ALTERNATIVES),
        (vocabulary.OMNIBUS_TESTS, OMNIBUS),
        (vocabulary.EQUIVALENCE_ADJUSTMENTS, EQUIVALENCE_ADJUSTMENTS),
        (vocabulary.EQUIVALENCE_ADJUSTMENTS, SPREAD_ADJUSTMENTS),
        (vocabulary.NON_INFERIORITY, EQUIVALENCE),
        (vocabulary.VARIANCE_CHECKS, CHECKS),
        (vocabulary.NORMALITY_CHECKS, CHECKS),
        (vocabulary.OUTLIER_TESTS, OUTLIERS),
        (vocabulary.PRECISION_CONDITIONS, CONDITIONS),
        (vocabulary.ALLOCATIONS, ALLOCATIONS),
        (vocabulary.ACROSS_RESPONSES, ACROSS),
        (vocabulary.QUANTITIES, CRITERIA),
        (FAMILIES, FAMILY_KINDS),
    ):
        assert set(words) <= set(table)
