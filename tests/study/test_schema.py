"""The published JSON Schema says the same keys and words as the reader's own tables."""

import json
import typing
from collections.abc import Iterator
from importlib import resources
from typing import Any

import pytest

from assayfolio.study import plan, vocabulary
from study.examples import faults_of

SCHEMA: dict[str, Any] = json.loads(
    resources.files("assayfolio.study").joinpath("study-definition.schema.json").read_text("utf-8")
)
DEFINITIONS: dict[str, Any] = SCHEMA["$defs"]

MAPPINGS = {
    "": vocabulary.STUDY_KEYS,
    "data": vocabulary.DATA_KEYS,
    "measurement": vocabulary.MEASUREMENT_KEYS,
    "column": vocabulary.FACT_KEYS,
    "worksheet": vocabulary.WORKSHEET_KEYS,
    "design": vocabulary.DESIGN_KEYS,
    "comparison": vocabulary.COMPARISON_KEYS,
    "contrast": vocabulary.CONTRAST_KEYS,
    "equivalence": vocabulary.EQUIVALENCE_KEYS,
    "spread": vocabulary.SPREAD_KEYS,
    "outliers": vocabulary.OUTLIER_KEYS,
    "checks": vocabulary.CHECK_KEYS,
    "precision": vocabulary.PRECISION_KEYS,
    "power": vocabulary.POWER_KEYS,
    "criterion": vocabulary.CRITERION_KEYS,
    "trend": vocabulary.TREND_KEYS,
    "baseline": vocabulary.BASELINE_KEYS,
    "trend-criterion": vocabulary.TREND_CRITERION_KEYS,
    "sign-off": vocabulary.SIGN_OFF_KEYS,
}
WORDS: dict[tuple[str, str], tuple[str, ...]] = {
    ("data", "encoding"): vocabulary.ENCODINGS,
    ("data", "layout"): vocabulary.LAYOUTS,
    ("data", "missing"): vocabulary.MISSING,
    ("data", "below-limit"): vocabulary.BELOW_LIMIT,
    ("data", "above-limit"): vocabulary.ABOVE_LIMIT,
    ("data", "decimal-mark"): vocabulary.DECIMAL_MARKS,
    ("design", "effects"): vocabulary.EFFECTS,
    ("design", "variances"): vocabulary.VARIANCES,
    ("design", "omnibus"): vocabulary.OMNIBUS_TESTS,
    ("design", "across-responses"): vocabulary.ACROSS_RESPONSES,
    ("comparison", "pairs"): vocabulary.PAIRS,
    ("comparison", "trend"): vocabulary.TRENDS,
    ("comparison", "adjust"): vocabulary.ADJUSTMENTS,
    ("comparison", "alternative"): vocabulary.ALTERNATIVES,
    ("equivalence", "pairs"): vocabulary.PAIRS,
    ("equivalence", "adjust"): vocabulary.EQUIVALENCE_ADJUSTMENTS,
    ("equivalence", "non-inferiority"): vocabulary.NON_INFERIORITY,
    ("spread", "adjust"): vocabulary.EQUIVALENCE_ADJUSTMENTS,
    ("outliers", "test"): vocabulary.OUTLIER_TESTS,
    ("checks", "equal-variances"): vocabulary.VARIANCE_CHECKS,
    ("checks", "normality"): vocabulary.NORMALITY_CHECKS,
    ("precision", "conditions"): vocabulary.PRECISION_CONDITIONS,
    ("power", "allocation"): vocabulary.ALLOCATIONS,
    ("criterion", "quantity"): vocabulary.QUANTITIES,
    ("trend", "quantities"): vocabulary.CHART_QUANTITIES,
    ("trend", "rules"): vocabulary.RUN_RULES,
    ("trend-criterion", "quantity"): vocabulary.CHART_QUANTITIES,
    ("sign-off", "role"): vocabulary.ROLES,
}
TYPED_FIELDS = {
    ("data", "encoding"): (plan.DataPlan, "encoding"),
    ("data", "layout"): (plan.DataPlan, "layout"),
    ("data", "missing"): (plan.DataPlan, "missing"),
    ("data", "below-limit"): (plan.DataPlan, "below_limit"),
    ("data", "above-limit"): (plan.DataPlan, "above_limit"),
    ("data", "decimal-mark"): (plan.DataPlan, "decimal_mark"),
    ("design", "effects"): (plan.DesignPlan, "effects"),
    ("design", "variances"): (plan.DesignPlan, "variances"),
    ("design", "omnibus"): (plan.DesignPlan, "omnibus"),
    ("design", "across-responses"): (plan.DesignPlan, "across_responses"),
    ("comparison", "adjust"): (plan.AllPairs, "adjust"),
    ("comparison", "alternative"): (plan.Contrast, "alternative"),
    ("equivalence", "adjust"): (plan.EquivalencePlan, "adjust"),
    ("spread", "adjust"): (plan.SpreadPlan, "adjust"),
    ("outliers", "test"): (plan.OutlierPlan, "tests"),
    ("checks", "equal-variances"): (plan.ChecksPlan, "equal_variances"),
    ("checks", "normality"): (plan.ChecksPlan, "normality"),
    ("precision", "conditions"): (plan.PrecisionPlan, "conditions"),
    ("power", "allocation"): (plan.PowerPlan, "allocation"),
    ("criterion", "quantity"): (plan.Criterion, "quantity"),
    ("trend", "quantities"): (plan.TrendPlan, "quantities"),
    ("trend", "rules"): (plan.TrendPlan, "rules"),
    ("sign-off", "role"): (plan.SignOff, "role"),
}
LENGTHS = {
    "title": vocabulary.LONGEST_TITLE,
    "sentence": vocabulary.LONGEST_SENTENCE,
    "label": vocabulary.LONGEST_LABEL,
}

# A definition with every section, in which each key that can be left out can be left out on its own.
EVERYTHING: dict[str, Any] = {
    "study": "A-1",
    "title": "t",
    "purpose": "p",
    "data": {
        "file": ["v.csv", "w.xlsx"],
        "encoding": "utf-16",
        "sheet": "Results",
        "header-row": 4,
        "layout": "long",
        "response": "mass",
        "factor": "lot",
        "unit": "g",
        "unit-column": "unit",
        "convert": {"mg": "1/1000"},
        "order": "position",
        "levels": ["a", "b"],
        "replicates": 4,
        "replicate-unit": "sample",
        "missing": "omit",
        "missing-codes": "nil",
        "below-limit": "limit",
        "limit-codes": {"ND": 1},
        "above-limit": "omit",
        "decimal-mark": "point",
        "exclusions": "x.yaml",
    },
    "measurement": {**dict.fromkeys(vocabulary.MEASUREMENT_KEYS, "m"), "item": {"column": "sample"}},
    "worksheet": {"seed": 1, "block": "day", "blocks": ["x", "y"], "item": "i"},
    "design": {
        "effects": "fixed",
        "variances": "pooled",
        "omnibus": "f",
        "across-responses": "none",
    },
    "alpha": "0.05",
    "comparisons": [
        {"name": "c", "against": "a", "adjust": "holm", "alternative": "less"},
        {"name": "f", "contrasts": [{"name": "g", "weights": {"a": 1, "b": -1}}], "adjust": "none"},
    ],
    "equivalence": [
        {
            "name": "e",
            "pairs": "all",
            "margin": "1",
            "margin-source": "s",
            "adjust": "holm",
            "alpha": "0.05",
            "response": "mass",
        }
    ],
    "spread": {"against": "a", "adjust": "holm"},
    "outliers": {"test": "grubbs"},
    "checks": {"equal-variances": "levene", "normality": "shapiro-wilk"},
    "precision": {"estimate": "true", "confidence": "0.95", "varied": "v"},
    "power": {
        "difference": "1",
        "sigma": "1",
        "target": "0.9",
        "true-difference": "0.1",
        "allocation": "control",
        "response": "mass",
    },
    "criteria": [{"quantity": "largest-difference", "at-most": "1", "unit": "g", "response": "mass"}],
    "trend": {
        "baseline": {"first": 20},
        "quantities": "lot-mean",
        "rules": ["beyond-limits", "nine-one-side"],
        "criteria": [{"quantity": "lot-mean", "at-most": "1", "response": "mass"}],
    },
    "sign-off": [{"role": "author", "meaning": "m"}],
}
SECTIONS = {
    "": None,
    "data": "data",
    "measurement": "measurement",
    "column": "measurement.item",
    "worksheet": "worksheet",
    "design": "design",
    "comparison": "comparisons",
    "equivalence": "equivalence",
    "spread": "spread",
    "outliers": "outliers",
    "checks": "checks",
    "precision": "precision",
    "power": "power",
    "contrast": "comparisons.contrasts",
    "criterion": "criteria",
    "trend": "trend",
    "baseline": "trend.baseline",
    "trend-criterion": "trend.criteria",
    "sign-off": "sign-off",
}


def mapping_schema(name: str) -> dict[str, Any]:
    schema: dict[str, Any] = DEFINITIONS[name] if name else SCHEMA
    return schema


def objects(schema: object) -> Iterator[dict[str, Any]]:
    if isinstance(schema, dict):
        if "properties" in schema and schema.get("type") == "object":
            yield schema
        for part in schema.values():
            yield from objects(part)


@pytest.mark.requirement("SCHEMA-1")
@pytest.mark.parametrize("name", MAPPINGS)
def test_a_mapping_has_the_keys_that_the_reader_knows_and_no_others(name: str) -> None:
    schema = mapping_schema(name)
    assert tuple(schema["properties"]) == MAPPINGS[name]
    assert schema["additionalProperties"] is False


def test_no_mapping_of_the_schema_escapes_the_comparison() -> None:
    assert len(list(objects(SCHEMA))) == len(MAPPINGS)


def word_lists(schema: dict[str, Any]) -> list[tuple[str, ...]]:
    """The words that a value may be; twice where it may also be a list of them."""
    if "enum" in schema:
        return [tuple(schema["enum"])]
    choices = schema.get("anyOf", [])
    return [
        words for part in (*choices, schema.get("items", {})) for words in (word_lists(part) if part else [])
    ]


@pytest.mark.parametrize(("name", "key"), WORDS)
def test_a_fixed_word_is_one_that_the_reader_knows(name: str, key: str) -> None:
    listed = word_lists(DEFINITIONS[name]["properties"][key])
    assert listed
    assert set(listed) == {WORDS[name, key]}


def test_no_list_of_words_in_the_schema_escapes_the_comparison() -> None:
    found = {
        (name, key)
        for name in MAPPINGS
        for key, value in mapping_schema(name)["properties"].items()
        if word_lists(value)
    }
    assert found == set(WORDS)


@pytest.mark.parametrize(("name", "key"), TYPED_FIELDS)
def test_the_words_are_those_of_the_typed_plan(name: str, key: str) -> None:
    owner, field = TYPED_FIELDS[name, key]
    words = words_of(typing.get_type_hints(owner)[field])
    assert tuple(dict.fromkeys(words)) == WORDS[name, key]


def words_of(hint: Any) -> Iterator[str]:
    """The words that a type allows, alone or in tuples."""
    for part in typing.get_args(hint):
        if isinstance(part, str):
            yield part
        else:
            yield from words_of(part)


@pytest.mark.parametrize("name", LENGTHS)
def test_texts_have_the_same_greatest_lengths(name: str) -> None:
    assert DEFINITIONS[name]["maxLength"] == LENGTHS[name]


def test_everything_together_can_be_read() -> None:
    assert faults_of(json.dumps(EVERYTHING)) == []


@pytest.mark.parametrize("name", MAPPINGS)
def test_a_key_is_compulsory_in_the_schema_just_where_the_reader_misses_it(name: str) -> None:
    section = SECTIONS[name]
    missed = []
    for key in MAPPINGS[name]:
        definition = json.loads(json.dumps(EVERYTHING))
        if name == "contrast":
            holder = definition["comparisons"][1]["contrasts"]
        elif name == "column":
            holder = definition["measurement"]["item"]
        elif name == "baseline":
            holder = definition["trend"]["baseline"]
        elif name == "trend-criterion":
            holder = definition["trend"]["criteria"]
        else:
            holder = definition if section is None else definition[section]
        holder = holder[0] if isinstance(holder, list) else holder
        holder.pop(key, None)
        path = f"{section}.{key}" if section else key
        if any(f"the key `{path}` is missing - " in fault for fault in faults_of(json.dumps(definition))):
            missed.append(key)
    assert missed == mapping_schema(name).get("required", [])
