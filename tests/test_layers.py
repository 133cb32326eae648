"""The package is built in layers: imports point downwards, and only the edges touch the world."""

import ast
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from graphlib import CycleError, TopologicalSorter
from pathlib import Path

import pytest

ROOT = "assayfolio"
SOURCE = Path(__file__).resolve().parents[1] / "pipeline" / ROOT

# From the ground up. What stands in one line does not know its neighbours.
LAYERS = (
    {"version", "errors"},
    {"exact", "canonical", "characters"},
    {"statistics", "study"},
    {"observations"},
    {"worksheet"},
    {"findings_intake", "fit", "method_names"},
    {"findings"},
    {"findings_parts"},
    {"findings_document", "planning"},
    {"evaluation", "trending"},
    {"report", "evidence", "pages"},
    {"workflow"},
    {"cli"},
    {"__main__"},
)
RANK = {unit: rank for rank, units in enumerate(LAYERS) for unit in units}

# These take a noticeable part of a second to import, so they are imported where they are used.
HEAVY = (
    "weasyprint",
    "pandas",
    "scipy.stats",
    "pyarrow",
    "openpyxl",
    "pydyf",
    "fontTools",
    "pyhanko",
    "pyhanko_certvalidator",
    "cryptography",
    "asn1crypto",
    "pkcs11",
    "urllib.request",
    "asyncio",
)

# Clock, user, environment, disk and chance: what is the same for the same input reads none of them.
EDGE_UNITS = {"evidence", "workflow", "cli", "__main__"}
# The workbook's archive is opened in memory: nothing of the disk is read.
EDGE_MODULES = {"report.assets", "report.fetching", "report.pdf", "observations.workbook_package"}
WORLD_MODULES = {
    "time",
    "os",
    "io",
    "getpass",
    "pwd",
    "socket",
    "platform",
    "locale",
    "random",
    "secrets",
    "uuid",
    "shutil",
    "tempfile",
    "subprocess",
    "importlib.resources",
}
WORLD_CALLS = {"open", "input"}
WORLD_ATTRIBUTES = {
    "now",
    "utcnow",
    "today",
    "environ",
    "getenv",
    "open",
    "read_text",
    "read_bytes",
    "write_text",
    "write_bytes",
    "iterdir",
    "glob",
    "exists",
}


@dataclass(frozen=True)
class Module:
    """One module: its name below the root (`study.plan`; empty for the root itself), its file, its tree."""

    name: str
    path: str
    tree: ast.Module

    @property
    def unit(self) -> str:
        """The part of the package that it belongs to."""
        return self.name.partition(".")[0]

    def offence(self, node: ast.stmt | ast.expr, why: str) -> str:
        """One line: place, the offending source, the rule."""
        return f"{self.path}:{node.lineno}: {ast.unparse(node).splitlines()[0]} - {why}"


def parsed(path: str, source: str) -> Module:
    """The module in the file `path`, given below the package's folder."""
    parts = path.removesuffix(".py").split("/")
    name = ".".join(parts[:-1] if parts[-1] == "__init__" else parts)
    return Module(name, f"pipeline/{ROOT}/{path}", ast.parse(source))


def imports_of(node: ast.AST) -> list[str]:
    """The full names that an import statement may load; nothing for another node."""
    if isinstance(node, ast.Import):
        return [alias.name for alias in node.names]
    if isinstance(node, ast.ImportFrom):
        return [f"{'.' * node.level}{node.module or ''}.{alias.name}" for alias in node.names]
    return []


def all_imports(module: Module) -> Iterator[tuple[ast.stmt, str]]:
    """Every import statement of `module`, wherever it stands, with each name that it loads."""
    for node in ast.walk(module.tree):
        if isinstance(node, ast.Import | ast.ImportFrom):
            yield from ((node, name) for name in imports_of(node))


def at_import_time(body: list[ast.stmt]) -> Iterator[ast.stmt]:
    """The statements that run when a module is imported: those outside functions and type checking."""
    for node in body:
        if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef):
            continue
        if isinstance(node, ast.If) and "TYPE_CHECKING" in ast.unparse(node.test):
            yield from at_import_time(node.orelse)
            continue
        yield node
        for part in ("body", "orelse", "finalbody"):
            yield from at_import_time(getattr(node, part, []))
        for handler in getattr(node, "handlers", []):
            yield from at_import_time(handler.body)


def is_within(name: str, packages: tuple[str, ...] | set[str]) -> bool:
    """Whether `name` is one of `packages` or lies in one."""
    return any(name == package or name.startswith(f"{package}.") for package in packages)


def layer_offences(module: Module) -> Iterator[str]:
    """Imports that point upwards, sideways or to the root, and modules that no layer holds."""
    if module.name == "":
        for node, _ in all_imports(module):
            yield module.offence(node, "the root of the package imports nothing")
        return
    if module.unit not in RANK:
        yield f"{module.path}:1: {module.unit} - it has no place in the layers of this test"
        return
    for node, name in all_imports(module):
        if name.startswith("."):
            yield module.offence(node, "imports name the whole path")
        elif is_within(name, {ROOT}):
            target = name.split(".")[1] if "." in name else ""
            if target not in RANK:
                yield module.offence(node, "nothing is imported from the root of the package")
            elif target != module.unit and RANK[target] > RANK[module.unit]:
                yield module.offence(node, f"{module.unit} lies below {target}")
            elif target != module.unit and RANK[target] == RANK[module.unit]:
                yield module.offence(node, f"{module.unit} and {target} lie side by side")


def heavy_offences(module: Module) -> Iterator[str]:
    """Imports at the top of a module that slow down every command."""
    for node in at_import_time(module.tree.body):
        if any(is_within(name, HEAVY) for name in imports_of(node)):
            yield module.offence(node, "import it in the function that needs it")


def world_offences(module: Module) -> Iterator[str]:
    """What reads clock, user, environment, disk or chance in a part that has to be pure."""
    if module.unit in EDGE_UNITS or module.name in EDGE_MODULES:
        return
    why = f"{module.name} is pure; hand the value in"
    for statement, name in all_imports(module):
        if is_within(name, WORLD_MODULES):
            yield module.offence(statement, why)
    for node in ast.walk(module.tree):
        called = (
            isinstance(node, ast.Call) and isinstance(node.func, ast.Name) and node.func.id in WORLD_CALLS
        )
        read = isinstance(node, ast.Attribute) and node.attr in WORLD_ATTRIBUTES
        if (called or read) and isinstance(node, ast.expr):
            yield module.offence(node, why)


def speech_offences(module: Module) -> Iterator[str]:
    """What prints or ends the process elsewhere than in the command line."""
    if module.unit in {"cli", "__main__"}:
        return
    for node in ast.walk(module.tree):
        if isinstance(node, ast.Call) and ast.unparse(node.func) in {"print", "exit", "quit", "breakpoint"}:
            yield module.offence(node, "only the command line prints and exits")
        if isinstance(node, ast.Attribute) and ast.unparse(node) in {"sys.stdout", "sys.stderr", "sys.exit"}:
            yield module.offence(node, "only the command line prints and exits")


def rings(modules: list[Module]) -> Iterator[str]:
    """Modules that import each other in a ring, also from within functions."""
    names = {module.name for module in modules}
    graph: dict[str, set[str]] = {}
    for module in modules:
        loaded = [name.removeprefix(f"{ROOT}.") for _, name in all_imports(module) if is_within(name, {ROOT})]
        targets = {name if name in names else name.rpartition(".")[0] for name in loaded}
        graph[module.name] = targets & names - {""}
    try:
        TopologicalSorter(graph).prepare()
    except CycleError as error:
        yield f"a ring of imports: {' -> '.join(reversed(error.args[1]))}"


def offences(modules: list[Module]) -> list[str]:
    """All offences in the order of the modules."""
    rules = (layer_offences, heavy_offences, world_offences, speech_offences)
    found = [offence for module in modules for rule in rules for offence in rule(module)]
    return [*found, *rings(modules)]


def package(sources: Mapping[str, str]) -> list[Module]:
    """A made-up package, by file."""
    return [parsed(path, source) for path, source in sources.items()]


def test_the_package_keeps_its_layers() -> None:
    paths = sorted(SOURCE.rglob("*.py"))
    modules = [parsed(path.relative_to(SOURCE).as_posix(), path.read_text("utf-8")) for path in paths]
    found = offences(modules)
    assert not found, "\n".join(found)
    assert {module.unit for module in modules} - {""} <= set(RANK)
    assert len(modules) > len(RANK)


def test_every_module_that_is_excused_from_a_rule_exists() -> None:
    missing = [name for name in EDGE_MODULES if not (SOURCE / f"{name.replace('.', '/')}.py").is_file()]
    assert not missing


ROOT_RULE = "nothing is imported from the root"
PURE_RULE = "is pure"

OFFENDERS = [
    ("upwards", "exact.py", "from assayfolio.study.plan import DataPlan", "exact lies below study"),
    (
        "upwards in one layer",
        "findings.py",
        "import assayfolio.evaluation.apply",
        "findings lies below evaluation",
    ),
    (
        "upwards in a function",
        "study/a.py",
        "def f():\n    import assayfolio.cli.root",
        "study lies below cli",
    ),
    ("to the top", "cli/a.py", "import assayfolio.__main__", "cli lies below __main__"),
    (
        "sideways",
        "study/a.py",
        "from assayfolio.statistics import oneway",
        "study and statistics lie side by side",
    ),
    ("sideways on the ground", "exact.py", "from assayfolio.canonical import Json", "lie side by side"),
    ("from the root", "cli/a.py", "from assayfolio import VERSION", ROOT_RULE),
    ("the root", "cli/a.py", "import assayfolio", ROOT_RULE),
    ("relative", "study/b.py", "from .plan import DataPlan", "imports name the whole path"),
    ("relative to the parent", "study/b.py", "from .. import errors", "imports name the whole path"),
    ("in the root", "__init__.py", "from assayfolio.version import VERSION", "imports nothing"),
    ("a part of no layer", "helpers.py", "X = 1", "it has no place in the layers"),
    ("heavy", "report/a.py", "import weasyprint", "in the function that needs it"),
    ("heavy below", "statistics/a.py", "from scipy import stats", "in the function that needs it"),
    ("heavy submodule", "statistics/a.py", "from scipy.stats import f", "in the function that needs it"),
    (
        "heavy when tried",
        "report/a.py",
        "try:\n    import pandas\nexcept ImportError:\n    pass",
        "in the function",
    ),
    (
        "heavy in a class",
        "report/a.py",
        "class A:\n    import fontTools.ttLib",
        "in the function that needs it",
    ),
    ("the clock", "evaluation/apply.py", "import datetime\nx = datetime.datetime.now()", PURE_RULE),
    ("a clock", "findings.py", "import time", PURE_RULE),
    ("the environment", "study/a.py", "from os import environ", PURE_RULE),
    ("a file", "observations/a.py", "def f(p):\n    return open(p)", PURE_RULE),
    ("a path", "statistics/a.py", "def f(p):\n    return p.read_bytes()", PURE_RULE),
    ("the disk in a report", "report/content.py", "def f(p):\n    return p.read_text()", PURE_RULE),
    ("chance", "statistics/a.py", "import random", PURE_RULE),
    ("printing", "workflow/a.py", "print(1)", "only the command line prints"),
    ("writing out", "evidence/a.py", "import sys\nsys.stderr.write('x')", "only the command line prints"),
    ("exiting", "workflow/a.py", "import sys\ndef f():\n    sys.exit(2)", "only the command line prints"),
]


@pytest.mark.parametrize(
    ("path", "source", "why"), [row[1:] for row in OFFENDERS], ids=[row[0] for row in OFFENDERS]
)
def test_an_offender_is_caught_at_its_line(path: str, source: str, why: str) -> None:
    (found,) = offences(package({path: source}))
    place, _, told = found.partition(": ")
    assert place in {f"pipeline/assayfolio/{path}:{line}" for line in range(1, source.count("\n") + 2)}
    assert why in told


def test_the_line_and_the_import_are_named() -> None:
    source = '"""Text."""\n\nfrom assayfolio.errors import Place\nfrom assayfolio.report.pdf import render\n'
    assert offences(package({"study/a.py": source})) == [
        "pipeline/assayfolio/study/a.py:4: from assayfolio.report.pdf import render - study lies below report"
    ]


@pytest.mark.parametrize("inside", ["", "def f() -> None:\n    "], ids=["at the top", "in a function"])
def test_a_ring_within_one_package_is_caught(inside: str) -> None:
    ring = package(
        {
            "study/a.py": "from assayfolio.study.b import x",
            "study/b.py": "from assayfolio.study import c",
            "study/c.py": f"{inside}import assayfolio.study.a",
        }
    )
    (found,) = offences(ring)
    assert found.startswith("a ring of imports: ")
    assert {"study.a", "study.b", "study.c"} <= set(found.removeprefix("a ring of imports: ").split(" -> "))


ALLOWED = [
    ("downwards", "evaluation/apply.py", "from assayfolio.findings import Findings"),
    ("far downwards", "cli/a.py", "from assayfolio.errors import ExitCode"),
    ("within one part", "study/a.py", "from assayfolio.study.plan import DataPlan"),
    ("heavy in a function", "report/a.py", "def f():\n    import weasyprint"),
    (
        "heavy for types",
        "report/a.py",
        "from typing import TYPE_CHECKING\nif TYPE_CHECKING:\n    import pandas",
    ),
    ("light relative of a heavy one", "statistics/a.py", "from scipy import special"),
    ("the clock at the edge", "workflow/a.py", "import time\nx = time.time()"),
    ("printing on the command line", "cli/a.py", "print(1)"),
    ("the disk where a report needs it", "report/assets.py", "def f(p):\n    return p.read_text()"),
]


@pytest.mark.parametrize(("path", "source"), [row[1:] for row in ALLOWED], ids=[row[0] for row in ALLOWED])
def test_what_the_rules_allow_passes(path: str, source: str) -> None:
    assert offences(package({path: source})) == []
