"""The project's requirements, and which test is marked as showing which of them."""

import ast
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import yaml

TESTS = Path(__file__).resolve().parents[1]
LIST = TESTS / "requirements.yaml"
MET, PLANNED, ORGANISATIONAL, NOT_APPLICABLE = "met", "planned", "organisational", "not-applicable"
# What each status has to come with.
WITH = {MET: "where", PLANNED: "part", ORGANISATIONAL: "reason", NOT_APPLICABLE: "reason"}
CHECKED = ("text", "partly", "memory")
KEYS = {"id", "demands", "source", "checked", "status", "where", "part", "reason"}


@dataclass(frozen=True)
class Requirement:
    """One requirement; `where`, `part` and `reason` are empty where its status has none."""

    id: str
    demands: str
    source: tuple[str, ...]
    checked: str
    status: str
    where: tuple[str, ...] = ()
    part: str = ""
    reason: str = ""


def read_requirements(text: str) -> list[Requirement]:
    """The requirements of a list, in its order. Raises ValueError for an unknown key."""
    found = []
    for entry in yaml.safe_load(text)["requirements"]:
        strange = set(entry) - KEYS
        if strange:
            raise ValueError(f"{entry.get('id')}: unknown {', '.join(sorted(strange))}")
        lists: dict[str, Any] = {key: tuple(entry[key]) for key in ("source", "where") if key in entry}
        found.append(Requirement(**{**entry, **lists}))
    return found


def requirements() -> list[Requirement]:
    """The project's requirements."""
    return read_requirements(LIST.read_text("utf-8"))


def marked_tests() -> dict[str, list[str]]:
    """By requirement, the tests that are marked with it."""
    sources = {
        path.relative_to(TESTS).as_posix(): path.read_text("utf-8")
        for path in sorted(TESTS.rglob("test_*.py"))
    }
    return marks_of(sources)


def marks_of(sources: Mapping[str, str]) -> dict[str, list[str]]:
    """The same of the files of a tree, given as texts: file::test or file::Class::test."""
    found: dict[str, list[str]] = {}
    for path, text in sources.items():
        for name, function in _tests(ast.parse(text)):
            for requirement in _marks(function):
                found.setdefault(requirement, []).append(f"{path}::{name}")
    return found


def _tests(tree: ast.Module) -> Iterator[tuple[str, ast.FunctionDef]]:
    for node in tree.body:
        if isinstance(node, ast.FunctionDef) and node.name.startswith("test_"):
            yield node.name, node
        if isinstance(node, ast.ClassDef):
            for inner in node.body:
                if isinstance(inner, ast.FunctionDef) and inner.name.startswith("test_"):
                    yield f"{node.name}::{inner.name}", inner


def _marks(function: ast.FunctionDef) -> Iterator[str]:
    for decorator in function.decorator_list:
        if isinstance(decorator, ast.Call) and ast.unparse(decorator.func) == "pytest.mark.requirement":
            yield from (str(ast.literal_eval(argument)) for argument in decorator.args)


def faults(listed: Iterable[Requirement], marked: Mapping[str, list[str]]) -> list[str]:
    """Everything that is wrong between the list and the tests, in words."""
    found, known = [], set()
    for each in listed:
        if each.id in known:
            found.append(f"{each.id} stands there twice")
        known.add(each.id)
        found.extend(_own_faults(each))
        if each.status == MET and not marked.get(each.id):
            found.append(f"{each.id} is said to be met, and no test is marked with it")
        if each.status not in (MET, PLANNED) and marked.get(each.id):
            found.append(f"{each.id} is {each.status}, and yet {marked[each.id][0]} is marked with it")
    unknown = sorted(set(marked) - known)
    return found + [f"{marked[each][0]} is marked with {each}, which is no requirement" for each in unknown]


def _own_faults(each: Requirement) -> Iterator[str]:
    needed = WITH.get(each.status)
    if needed is None:
        yield f"{each.id} has the status {each.status!r}"
    elif not getattr(each, needed):
        yield f"{each.id} is {each.status} without {needed!r}"
    if each.checked not in CHECKED:
        yield f"{each.id} has 'checked: {each.checked}'"
    if not each.source or not each.demands:
        yield f"{each.id} lacks what it demands, or its source"
