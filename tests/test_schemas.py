"""The published JSON Schemas describe exactly what the program writes, and refuse everything else."""

import ast
import copy
import json
import typing
from pathlib import Path
from typing import Any

import pytest
from jsonschema import Draft202012Validator

from assayfolio import findings
from assayfolio.canonical import canonical_bytes, sha256_hex
from assayfolio.evaluation.apply import evaluate
from assayfolio.findings_document import findings_document
from assayfolio.observations.reading import read_all_observations
from assayfolio.study import plan
from support import schemas
from support.every_option import PLANS, findings_with_every
from support.studies import DEMO_STUDIES, HEAD, demo_study, study_of
from support.workspaces import STUDY, Bench

FINDINGS = schemas.load(schemas.FINDINGS)
RUN_RECORD = schemas.load(schemas.RUN_RECORD)
TRAIL_ENTRY = schemas.load(schemas.TRAIL_ENTRY)
NEW = ["findings", "run record", "trail entry"]
BY_NAME = dict(zip(NEW, (FINDINGS, RUN_RECORD, TRAIL_ENTRY), strict=True))


def of_two_files() -> findings.Findings:
    """The findings of a study whose data lie in two files, with a value that stands out."""
    head = HEAD.replace("data/values.csv", "[data/a.csv, data/b.csv]")
    study = study_of("outliers: {test: grubbs}\n", head)
    rows = [("a", "1.1"), ("a", "1.2"), ("a", "1.0"), ("a", "9.9"), ("b", "1.3"), ("b", "1.2"), ("b", "1.1")]
    content = "".join(f"{level},{value}\n" for level, value in [("lot", "content"), *rows]).encode()
    other = content.replace(b"9.9", b"1.4")
    sources = [("data/a.csv", content), ("data/b.csv", other)]
    return evaluate(study, read_all_observations(sources, study.data, study.measurement))


@pytest.fixture(scope="module")
def documents() -> list[Any]:
    """findings.json of every demonstration study, and of studies that ask for everything."""
    found = [evaluate(*demo_study(name)) for name in DEMO_STUDIES]
    found += [findings_with_every(name) for name in PLANS]
    found.append(of_two_files())
    return [json.loads(json.dumps(findings_document(each))) for each in found]


def leave_as_a_killed_writer_does(runs: Path) -> None:
    """Put the head one entry back, and begin a line that has no end."""
    path = runs / "audit-trail.jsonl"
    lines = path.read_bytes().splitlines()
    before = {"seq": len(lines) - 1, "sha256": sha256_hex(lines[-2])}
    (runs / "audit-trail.head").write_bytes(canonical_bytes(before) + b"\n")
    with path.open("ab") as trail:
        trail.write(b'{"torn')


@pytest.fixture(scope="module")
def workspace(tmp_path_factory: pytest.TempPathFactory) -> Bench:
    """A workspace with a run, one that failed, one that was refused, and what a killed writer leaves."""
    bench = Bench(tmp_path_factory.mktemp("schemas") / "w")
    bench.run()
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr("assayfolio.workflow.run.evaluate", lambda *_: 1 // 0)
        assert bench("run", bench.study).code == 3
    bench.write(bench.study, STUDY.replace("alpha: 0.05", "alpha: 5"))
    assert bench("run", bench.study).code == 2
    leave_as_a_killed_writer_does(bench.runs)
    bench.write(bench.study, STUDY.replace("alpha:", "  replicates: 3\nworksheet: {seed: 4}\nalpha:"))
    answer = bench("worksheet", bench.study)
    assert answer.code == 0, answer.err
    return bench


@pytest.fixture(scope="module")
def records(workspace: Bench) -> list[Any]:
    """run.json of a run that was completed and of one that failed."""
    paths = sorted(workspace.runs.glob("*/run-*/data/run.json"))
    loaded = [json.loads(path.read_bytes()) for path in paths]
    assert [record["outcome"] for record in loaded] == ["completed", "failed"]
    return loaded


@pytest.fixture(scope="module")
def life(tmp_path_factory: pytest.TempPathFactory) -> Bench:
    """A workspace with a registered plan, a late amendment, a deviation, a void run and a corrected one."""
    bench = Bench(tmp_path_factory.mktemp("life") / "w")

    def succeed(*arguments: str | Path) -> None:
        answer = bench(*arguments)
        assert answer.code == 0, answer.err

    succeed("preregister", bench.study)
    succeed("run", bench.study)
    bench.write(bench.study, STUDY.replace("alpha: 0.05", "alpha: 0.01"))
    succeed("amend", bench.study, "--reason", "the client asked for the stricter level, letter 14")
    texts = ("--what", "the balance was moved", "--effect", "none was seen", "--decision", "values are kept")
    succeed("deviation", bench.study, *texts)
    succeed("run", bench.study)
    why = ("--reason", "balance out of tolerance on that day", "--investigation", "INV-14")
    succeed("void", bench.runs / "TST-1/run-0002", *why)
    succeed("run", bench.study, "--replaces", "run-0002", "--reason", "weighed again after the repair")
    assert bench("void", bench.runs / "TST-1/run-0002", *why).code == 2
    settings = bench.root / "configs/lab.yaml"
    bench.write(settings, settings.read_text("utf-8") + "paper: Letter\nlog-reading: true\n")
    succeed("settings", "--reason", "paper of the new printer")
    succeed("trail")
    return bench


def test_records_and_trail_of_a_whole_life_are_as_described(life: Bench) -> None:
    for entry in life.entries():
        assert schemas.faults(TRAIL_ENTRY, entry) == [], entry["action"]
    told = {entry["action"] for entry in life.entries()}
    assert {"registered", "voided", "replaces", "deviation-recorded", "attempt-refused", "settings"} <= told
    assert "read" in told
    records = [json.loads(path.read_bytes()) for path in sorted(life.runs.glob("TST-1/run-*/data/run.json"))]
    for record in records:
        assert schemas.faults(RUN_RECORD, record) == [], record["run"]
    assert records[0]["pre_registration"] is not None
    assert records[-1]["replaces"]["void"] is not None
    for path in life.runs.glob("TST-1/run-*/data/findings.json"):
        assert schemas.faults(FINDINGS, json.loads(path.read_bytes())) == []


@pytest.mark.requirement("SCHEMA-1")
@pytest.mark.parametrize("place", schemas.ALL, ids=lambda place: place[1])
def test_a_schema_is_one_of_the_draft_that_it_names(place: tuple[str, str]) -> None:
    schema = schemas.load(place)
    assert schema["$schema"] == "https://json-schema.org/draft/2020-12/schema"
    Draft202012Validator.check_schema(schema)


@pytest.mark.requirement("SCHEMA-1")
@pytest.mark.parametrize("name", NEW)
def test_unknown_keys_are_forbidden_everywhere(name: str) -> None:
    loose = {
        place
        for place, part in schemas.objects(BY_NAME[name])
        if part.get("additionalProperties") is not False
    }
    assert loose == set()


@pytest.mark.requirement("SCHEMA-1")
def test_findings_of_every_study_are_as_described(documents: list[Any]) -> None:
    assert len(documents) > 10
    for document in documents:
        assert schemas.faults(FINDINGS, document) == []


@pytest.mark.requirement("SCHEMA-1")
def test_the_records_of_runs_are_as_described(records: list[Any]) -> None:
    for record in records:
        assert schemas.faults(RUN_RECORD, record) == []


@pytest.mark.requirement("SCHEMA-1", "TRAIL-7")
def test_every_entry_of_a_trail_is_as_described(workspace: Bench) -> None:
    entries = workspace.entries()
    for entry in entries:
        assert schemas.faults(TRAIL_ENTRY, entry) == [], entry["action"]
    told = {entry["action"] for entry in entries}
    assert {"received", "sealed", "failed", "refused", "worksheet", "torn-line-set-aside"} <= told


def test_a_key_is_compulsory_just_where_every_findings_document_has_it(documents: list[Any]) -> None:
    used = schemas.keys_used(FINDINGS, documents)
    for place, part in schemas.objects(FINDINGS):
        instances = used[place]
        assert instances, f"nothing shows {place}"
        assert set.intersection(*instances) >= set(part["required"])
        never = set(part["properties"]) - set.union(*instances)
        assert not never, f"no study shows {sorted(never)} of {place}"


@pytest.mark.parametrize("name", NEW)
def test_a_document_with_one_key_more_or_one_less_is_refused(
    name: str, documents: list[Any], records: list[Any], workspace: Bench
) -> None:
    document = {"findings": documents[0], "run record": records[0], "trail entry": workspace.entries()[-1]}[
        name
    ]
    more, less = copy.deepcopy(document), copy.deepcopy(document)
    more["colour"] = "blue"
    del less[min(less)]
    assert schemas.faults(BY_NAME[name], more)
    assert schemas.faults(BY_NAME[name], less)


@pytest.mark.requirement("TRAIL-7")
@pytest.mark.parametrize("missing", ["by", "at"])
def test_an_entry_without_person_or_local_time_is_not_an_entry_of_a_trail(
    missing: str, workspace: Bench
) -> None:
    for entry in workspace.entries():
        del entry["details"][missing]
        assert schemas.faults(TRAIL_ENTRY, entry)


def test_a_failed_run_has_a_reason_and_no_report(records: list[Any]) -> None:
    completed, failed = records
    assert schemas.faults(RUN_RECORD, {**failed, "reason": None})
    assert schemas.faults(RUN_RECORD, {**failed, "report_sha256": "0" * 64})
    assert schemas.faults(RUN_RECORD, {**completed, "reason": "none"})


def words(place: str, key: str) -> tuple[str, ...]:
    part = FINDINGS["$defs"][place]["properties"][key]
    return tuple(part.get("enum") or FINDINGS["$defs"][part["$ref"].rpartition("/")[2]]["enum"])


@pytest.mark.parametrize(
    ("place", "key", "hint"),
    [
        ("response", "omnibus", plan.Omnibus),
        ("comparison-family", "adjust", plan.Adjustment),
        ("comparison-family", "alternative", plan.Alternative),
        ("comparison-family", "across_responses", plan.AcrossResponses),
        ("outlier", "test", plan.OutlierTest),
    ],
)
def test_words_from_the_plan_are_those_of_the_plan(place: str, key: str, hint: Any) -> None:
    assert set(words(place, key)) == set(typing.get_args(hint))


def test_verdicts_are_those_of_the_findings() -> None:
    assert words("anova", "verdict") == (
        findings.DIFFERENCE_SHOWN,
        findings.DIFFERENCE_NOT_SHOWN,
        findings.NOT_ASSESSABLE,
    )
    assert words("criterion", "verdict") == (
        findings.CRITERION_MET,
        findings.CRITERION_NOT_MET,
        findings.NOT_ASSESSABLE,
    )
    assert words("outlier", "verdict") == (
        findings.OUTLIER,
        findings.STRAGGLER,
        findings.NEITHER,
        findings.NOT_ASSESSABLE,
    )


SOURCE = Path(__file__).resolve().parents[1] / "pipeline/assayfolio"
WRITERS = {"trail", "writer", "run", "protocol", "book"}


def texts_of(tree: ast.Module) -> dict[str, str]:
    """The constants of a module that are texts."""
    return {
        target.id: node.value.value
        for node in tree.body
        if isinstance(node, ast.Assign) and isinstance(node.value, ast.Constant)
        for target in node.targets
        if isinstance(target, ast.Name) and isinstance(node.value.value, str)
    }


def actions_entered() -> set[str]:
    """The first argument of every call that enters something in the trail: a text, or a constant."""
    trees = {
        ".".join(("assayfolio", *path.relative_to(SOURCE).with_suffix("").parts)): ast.parse(
            path.read_text("utf-8")
        )
        for path in SOURCE.rglob("*.py")
    }
    found = set()
    for tree in trees.values():
        known = texts_of(tree)
        for node in ast.walk(tree):
            if isinstance(node, ast.ImportFrom) and node.module in trees:
                there = texts_of(trees[node.module])
                known |= {
                    each.asname or each.name: there[each.name] for each in node.names if each.name in there
                }
        for node in ast.walk(tree):
            if not enters(node):
                continue
            first = node.args[3] if seals_a_record(node) else node.args[0]
            if isinstance(first, ast.Constant):
                found.add(first.value)
            elif isinstance(first, ast.Name) and first.id in known:
                found.add(known[first.id])
    return found


def seals_a_record(node: ast.Call) -> bool:
    """Whether this is seal_in_trail(workspace, trail, record, action, ...)."""
    return isinstance(node.func, ast.Name) and node.func.id == "seal_in_trail"


def enters(node: ast.AST) -> typing.TypeGuard[ast.Call]:
    """Whether this is a call such as trail.append(action, subject, ...), or a notice to be entered."""
    if not isinstance(node, ast.Call) or len(node.args) < 2:
        return False
    if isinstance(node.func, ast.Name):
        return node.func.id == "Notice" or seals_a_record(node)
    return (
        isinstance(node.func, ast.Attribute)
        and node.func.attr in {"append", "enter"}
        and ast.unparse(node.func.value).rpartition(".")[2] in WRITERS
    )


@pytest.mark.requirement("SCHEMA-1")
def test_every_action_that_the_program_enters_is_described_and_no_other() -> None:
    assert actions_entered() == set(TRAIL_ENTRY["properties"]["action"]["enum"])
