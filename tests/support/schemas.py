"""The published JSON Schemas, and what of them a number of documents makes use of."""

import json
from collections.abc import Iterator, Sequence
from importlib import resources
from typing import Any

from jsonschema import Draft202012Validator

Schema = dict[str, Any]

STUDY_DEFINITION = ("assayfolio.study", "study-definition.schema.json")
FINDINGS = ("assayfolio", "findings.schema.json")
RUN_RECORD = ("assayfolio.evidence", "run-record.schema.json")
TRAIL_ENTRY = ("assayfolio.evidence", "trail-entry.schema.json")
ALL = (STUDY_DEFINITION, FINDINGS, RUN_RECORD, TRAIL_ENTRY)


def load(place: tuple[str, str]) -> Schema:
    """A schema as the package under test ships it."""
    package, name = place
    loaded: Schema = json.loads(resources.files(package).joinpath(name).read_text("utf-8"))
    return loaded


def faults(schema: Schema, document: object) -> list[str]:
    """What a validator says against the document: place and message of each fault."""
    found = Draft202012Validator(schema).iter_errors(document)
    return sorted(f"{'/'.join(map(str, each.absolute_path))}: {each.message}" for each in found)


def objects(schema: object, place: str = "#") -> Iterator[tuple[str, Schema]]:
    """Every part of a schema that describes an object by its keys, with its place."""
    if isinstance(schema, dict):
        if "properties" in schema and schema.get("type") == "object":
            yield place, schema
        for key, part in schema.items():
            yield from objects(part, f"{place}/{key}")
    elif isinstance(schema, list):
        for number, part in enumerate(schema):
            yield from objects(part, f"{place}/{number}")


def keys_used(schema: Schema, documents: Sequence[object]) -> dict[str, list[set[str]]]:
    """For every described object, by its place in the schema: the keys of each instance of it."""
    used: dict[str, list[set[str]]] = {place: [] for place, _ in objects(schema)}
    places = {id(part): place for place, part in objects(schema)}
    for document in documents:
        _walk(schema, schema, document, places, used)
    return used


def _walk(
    root: Schema, part: Any, value: Any, places: dict[int, str], used: dict[str, list[set[str]]]
) -> None:
    if not isinstance(part, dict):
        return
    for also in _also(root, part, value):
        _walk(root, also, value, places, used)
    if isinstance(value, dict):
        if id(part) in places:
            used[places[id(part)]].append(set(value))
        described, others = part.get("properties", {}), part.get("additionalProperties")
        for key, item in value.items():
            _walk(root, described.get(key, others), item, places, used)
    elif isinstance(value, list):
        for item in value:
            _walk(root, part.get("items"), item, places, used)


def _also(root: Schema, part: Schema, value: Any) -> Iterator[Any]:
    """The other parts of the schema that describe the same value."""
    if "$ref" in part:
        target: Any = root
        for step in part["$ref"].removeprefix("#/").split("/"):
            target = target[step]
        yield target
    for choice in part.get("anyOf", ()):
        if Draft202012Validator({**choice, "$defs": root.get("$defs", {})}).is_valid(value):
            yield choice
