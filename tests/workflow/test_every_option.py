"""Studies that together use every option, run as a laboratory runs them.

Every result is in findings.json and in the report, under its standard name and with formula and source, by
tables that were written by hand: what a reader is to find, not what the program says it prints.
"""

import json
import math
import re
import subprocess
from dataclasses import dataclass
from functools import cached_property
from pathlib import Path
from typing import Any

import pytest

from assayfolio.evidence.verification import verify_lone_folios
from assayfolio.workflow.rerun import rerun
from support.option_studies import DEFINITIONS, STUDIES, files_of
from support.shown_beyond import (
    CHECKS,
    EQUIVALENCE,
    EQUIVALENCE_ADJUSTMENTS,
    OUTLIERS,
    SPREAD,
    SPREAD_ADJUSTMENTS,
)
from support.shown_comparisons import ACROSS, ADJUSTMENTS, ALTERNATIVES, EFFECTS, FAMILY_KINDS, OMNIBUS
from support.shown_precision_and_power import ALLOCATIONS, CONDITIONS, CRITERIA, POWER, PRECISION
from support.workspaces import Bench

TABLES = {
    "adjustment": ADJUSTMENTS,
    "family": FAMILY_KINDS,
    "alternative": ALTERNATIVES,
    "overall test": OMNIBUS,
    "effect size": EFFECTS,
    "equivalence": EQUIVALENCE,
    "adjustment of equivalence": EQUIVALENCE_ADJUSTMENTS,
    "spread": SPREAD,
    "adjustment of spread": SPREAD_ADJUSTMENTS,
    "check": CHECKS,
    "outliers": OUTLIERS,
    "conditions": CONDITIONS,
    "precision": PRECISION,
    "power": POWER,
    "allocation": ALLOCATIONS,
    "over the responses": ACROSS,
}
SHOWN = {f"{table}: {name}": shown for table, rows in TABLES.items() for name, shown in rows.items()}


FURNITURE = re.compile(
    r"\f?(draft unless every sign-off .*|the study plans no sign-off: .*|not pre-registered · .* page .*"
    r"|[A-Z]+-\d+ · run-0001|Invented laboratory|Fernhollow Testing Laboratory)\n"
)


@dataclass(frozen=True)
class Ran:
    """A study that was run: its workspace, folio, findings, and the text of its report."""

    bench: Bench
    folio: Path
    findings: dict[str, Any]
    text: str

    @cached_property
    def body(self) -> str:
        """The report up to its section on methods, without white space."""
        return closed(self._parts[0])

    @cached_property
    def method(self) -> str:
        """The formulas and rules, without white space."""
        return closed(self._parts[1])

    @cached_property
    def references(self) -> list[str]:
        """The list of references, entry by entry."""
        return [" ".join(entry.split()) for entry in f"\n{self._parts[2]}".split("\n– ")[1:]]

    @cached_property
    def _parts(self) -> list[str]:
        parts = re.split(r"\n\d+ Method\n|\nReferences\n|\n\d+ Provenance\n", FURNITURE.sub("", self.text))
        assert len(parts) == 4
        return parts


def closed(text: str) -> str:
    """`text` without white space and hyphens, which the text taken from a page keeps at times only."""
    return re.sub(r"[\s‐-]+", "", text)


@pytest.fixture(scope="module")
def ran(tmp_path_factory):
    """The studies, each run once, when it is first asked for."""
    done: dict[str, Ran] = {}

    def run(name: str) -> Ran:
        if name not in done:
            done[name] = run_once(name, tmp_path_factory.mktemp("studies") / "w")
        return done[name]

    return run


def run_once(name: str, root: Path) -> Ran:
    study, data, content = files_of(name)
    bench = Bench(root, study, None)
    (bench.data.parent / data).write_text(content, "utf-8")
    answer = bench("run", bench.study, "--json")
    assert answer.code in (0, 1), answer.err  # 1: a limit that was set in advance is not met
    folio = bench.root / answer.document["folio"]
    text = subprocess.run(
        ["pdftotext", "-enc", "UTF-8", folio / "data/report.pdf", "-"], capture_output=True, check=True
    ).stdout.decode("utf-8")
    return Ran(bench, folio, json.loads((folio / "data/findings.json").read_bytes()), text)


runs = [pytest.mark.slow, pytest.mark.needs("pdftotext")]


def marked(*cases: Any) -> pytest.MarkDecorator:
    return pytest.mark.parametrize("case", [pytest.param(case, marks=runs, id=str(case)) for case in cases])


@marked(*STUDIES)
def test_its_folio_is_verified(case, ran):
    study = ran(case)
    answer = study.bench("verify", study.folio)
    assert answer.code == 0, answer.out


@pytest.mark.requirement("PLAN-6")
@marked(*STUDIES)
def test_every_planned_question_is_in_the_findings_and_has_a_table_in_the_report(case, ran):
    study, definition = ran(case), DEFINITIONS[case]
    responses = study.findings["responses"]
    for part, heading in (("comparisons", "Comparisons"), ("equivalence", "Equivalence")):
        for planned in definition.get(part, []):
            asked = [planned["response"]] if "response" in planned else list(responses)
            assert asked
            for response in asked:
                family = found(responses[response][part], planned["name"])
                assert family["adjust"] == planned.get("adjust", "none")
                assert family["rows"]
                assert all(row["verdict"] for row in family["rows"])
            title = "Non-inferiority" if "non-inferiority" in planned else heading
            pattern = rf"Table\d+\.{closed(title)},{re.escape(closed(planned['name']))}[.,]"
            assert len(re.findall(pattern, study.body)) == len(asked), planned["name"]


@marked("pooled", "bonferroni over the responses", "separate variances", "random levels")
def test_nothing_that_was_asked_for_is_left_out(case, ran):
    assert ran(case).findings["not_reported"] == []


@pytest.mark.slow
@pytest.mark.needs("pdftotext")
def test_the_report_on_several_responses_is_rendered_again_to_the_same_bytes(ran):
    folio = ran("holm over the responses").folio
    again = rerun(folio, verify_lone_folios([folio]).outcomes)
    assert {part.outcome for part in again.parts} == {"identical"}


def found(part: Any, *keys: str) -> Any:
    """What stands in a part of the findings: under a key, at a place, or in the entry that bears the name."""
    for key in keys:
        part = inside(part, key)
    return part


def inside(part: Any, key: str) -> Any:
    if isinstance(part, dict):
        return part[key]
    if isinstance(part[0], dict):
        return next(item for item in part if is_named(item, key))
    return part[int(key)]


def is_named(entry: dict[str, Any], name: str) -> bool:
    """Whether an entry bears the name, or is one of those whose words begin with it."""
    words = [word for word in entry.values() if isinstance(word, str)]
    return name in words or any(word.startswith(f"{name} ") for word in words)


def in_findings(study: Ran, path: str) -> Any:
    """What stands at a path in the findings on the first response, or in the planned power."""
    first = next(iter(study.findings["responses"].values()))
    part = study.findings if path.startswith("planned_power") else first
    return found(part, *path.split(" > "))


@marked(*SHOWN)
def test_an_option_is_in_the_findings_and_in_the_report_with_name_formula_and_source(case, ran):
    shown = SHOWN[case]
    study = ran(shown.study)
    result = in_findings(study, shown.result)
    assert isinstance(result, int | float)
    assert math.isfinite(result)
    if shown.name:
        path, _, name = shown.name.partition(" = ")
        assert in_findings(study, path) == name
    assert closed(shown.printed) in study.body
    assert closed(shown.formula) in study.method
    for source in shown.sources:
        assert any(all(word in entry for word in source.split()) for entry in study.references), source


@marked(*CRITERIA)
def test_a_criterion_is_in_the_findings_and_in_the_report_with_its_verdict(case, ran):
    name, quantity, unit, limit = CRITERIA[case]
    study = ran(name)
    pattern = rf"{closed(quantity)}([\d.]+){closed(unit)}{closed(limit)}{closed(unit)}(criterion(?:not)?met)"
    printed = re.findall(pattern, study.body)
    criteria = [
        one
        for response in study.findings["responses"].values()
        for one in response["criteria"]
        if one["quantity"] == case and one["relation"] in limit
    ]
    assert len(printed) == len(criteria) > 0
    for (value, verdict), one in zip(printed, criteria, strict=True):
        assert float(value) == pytest.approx(one["value"], rel=5e-3)
        assert verdict == closed(one["verdict"])
