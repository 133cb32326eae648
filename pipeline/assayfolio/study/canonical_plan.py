"""The meaning of a study definition as one canonical JSON document, and the digest of that.

Two definitions that mean the same have the same document: layout, comments, the order of keys, `0.050` for
`0.05` make no difference, and what is left out stands there with what it then means. The exclusions file is
not part of it: what is excluded is decided when the values are known, and every report shows it with the
result as if nothing had been.
"""

from collections.abc import Mapping
from dataclasses import fields, is_dataclass
from fractions import Fraction
from typing import Any

from assayfolio.canonical import Json, canonical_bytes, sha256_hex
from assayfolio.exact import decimal_of, exact_text
from assayfolio.study.plan import AgainstReference, AllPairs, Contrast, ContrastFamily, StudyDefinition, Trend

PLAN_FORMAT = "assayfolio-plan/1"

_KINDS: Mapping[type, str] = {
    AllPairs: "all pairs",
    AgainstReference: "against a reference",
    Contrast: "contrast",
    ContrastFamily: "contrasts",
    Trend: "trend",
}
_NO_MEANING = frozenset({"place", "places"})
# Sections that came later: a plan without one has the digest that it always had.
_LATER_SECTIONS = ("trend",)
_MAPPINGS = frozenset({"units", "convert", "limit_codes", "weights", "scores"})


def plan_document(study: StudyDefinition) -> Mapping[str, Json]:
    """The plan as JSON values: exact numbers as texts, keys as in the study definition."""
    document = _mapping(study)
    data: dict[str, Json] = {"file": list(study.data.sources), **_mapping(study.data, "file")}
    for key in ("exclusions", "files", "unit"):
        del data[key]
    data["replicates"] = _replicates(study)
    data["units"] = {name: study.data.unit_of(name) for name in study.data.response}
    for key in _LATER_SECTIONS:
        if document.get(key) is None:
            document.pop(key, None)
    return {"format": PLAN_FORMAT, **document, "data": data}


def plan_bytes(study: StudyDefinition) -> bytes:
    """`plan.json`: the document in canonical JSON (RFC 8785)."""
    return canonical_bytes(plan_document(study))


def plan_digest(study: StudyDefinition) -> str:
    """The SHA-256 of `plan_bytes`."""
    return sha256_hex(plan_bytes(study))


def _mapping(part: Any, without: str = "") -> dict[str, Json]:
    """A part of the plan, key by key, one of them left out."""
    found: dict[str, Json] = {}
    if type(part) in _KINDS:
        found["kind"] = _KINDS[type(part)]
    for field in fields(part):
        if field.name in _NO_MEANING or field.name == without:
            continue
        value = getattr(part, field.name)
        found[field.name.replace("_", "-")] = (
            {name: _value(entry) for name, entry in value} if field.name in _MAPPINGS else _value(value)
        )
    return found


def _value(value: Any) -> Json:
    if isinstance(value, Fraction):
        return exact_text(decimal_of(value))
    if isinstance(value, tuple):
        return [_value(item) for item in value]
    if is_dataclass(value):
        return _mapping(value)
    assert value is None or isinstance(value, bool | int | str), f"a plan holds no {type(value)}"
    return value


def _replicates(study: StudyDefinition) -> Json:
    """One number where it holds for every declared level, however it was written."""
    planned = study.data.replicates
    if planned is None or isinstance(planned, int):
        return planned
    counts = {count for _, count in planned}
    everywhere = study.data.levels is not None and {level for level, _ in planned} == set(study.data.levels)
    return counts.pop() if everywhere and len(counts) == 1 else dict(planned)
