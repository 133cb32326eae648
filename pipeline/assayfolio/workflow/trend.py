"""The command `trend`: control charts over the lots of a study, from its sealed runs, sealed in their turn.

Only runs that stand are charted: completed, neither void nor superseded. What is read of a folio is held
against its seal in the audit trail; a folio that was changed is left out, and the command says so.
"""

import json
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from assayfolio.canonical import sha256_hex
from assayfolio.errors import ChangedError, ExitCode, Fault, InputError, StudyError
from assayfolio.evidence.entries import TrailEntry
from assayfolio.evidence.history import run_histories
from assayfolio.evidence.sealed_files import sealed_files
from assayfolio.evidence.states import RunStanding, run_standings, standing_words
from assayfolio.evidence.trail import TrailHead, read_trail
from assayfolio.observations.reading import read_all_observations
from assayfolio.study.plan import Laboratory, StudyDefinition
from assayfolio.study.reading import read_study
from assayfolio.trending.charts import TrendFindings, chart_lots
from assayfolio.trending.series import LotResult
from assayfolio.workflow.intake import SeenFiles, read_plan
from assayfolio.workflow.surroundings import Surroundings, look_around
from assayfolio.workflow.workspace import Workspace

FINDINGS_FILE = "data/findings.json"
RUN_FILE = "data/run.json"
STUDY_FILE = "data/study.yaml"


@dataclass(frozen=True, slots=True)
class LeftOut:
    """A run that is not on the charts, and why; `changed` where its folio is not as it was sealed."""

    run: str
    lot: str
    reason: str
    changed: bool = False


@dataclass(frozen=True, slots=True)
class StudyTrend:
    """The charts of a study, what was left out of them, and under which trail head they were made."""

    workspace: Workspace
    laboratory: Laboratory
    plan_content: bytes
    findings: TrendFindings
    left_out: tuple[LeftOut, ...]
    head: TrailHead
    surroundings: Surroundings

    @property
    def study(self) -> StudyDefinition:
        """The study whose lots are charted."""
        return self.findings.study

    @property
    def exit_code(self) -> ExitCode:
        """FINDING where a folio was changed. A signal on a chart informs; it fails nothing."""
        return ExitCode.FINDING if any(one.changed for one in self.left_out) else ExitCode.DONE


def study_trend(workspace: Workspace, study_path: Path) -> StudyTrend:
    """The charts that the study definition at `study_path` asks for, over its sealed runs.

    Raises InputError where the definition is faulty or has no `trend`, and where there is no run that
    stands; ChangedError where the audit trail is not in order; MachineError where it cannot be read.
    """
    surroundings, seen = look_around(), SeenFiles()
    study, laboratory = read_plan(workspace, study_path, seen)
    content = next(file.content for file in seen.files if file.role == "study definition")
    if study.trend is None:
        advice = "add the section, with `baseline` and `rules`"
        raise StudyError(
            f"The study {study.study} plans no charts.",
            (Fault(study.places[0][1], "the key `trend` is missing", advice),),
        )
    reading = read_trail(workspace.runs)
    if reading.faults:
        raise ChangedError(
            f"The audit trail is not in order ({reading.faults[0]}), so that no run can be vouched for. Run "
            "`assayfolio verify` to see everything that is wrong."
        )
    standings = run_standings(reading.entries)
    own = [run for run in standings.values() if run.study == study.study]
    seals = _seals(reading.entries)
    results, left_out = _results(workspace, own, seals)
    if not results:
        reasons = "\n".join(f"  {one.run}: {one.reason}" for one in left_out)
        raise InputError(f"There is no run of {study.study} to chart.\n{reasons}".rstrip())
    return StudyTrend(
        workspace, laboratory, content, chart_lots(study, results), left_out, reading.last, surroundings
    )


def _seals(entries: Sequence[TrailEntry]) -> Mapping[str, str]:
    """The seal of every run, by its subject."""
    found = {}
    for run in run_histories(entries):
        seal = None if run.sealed is None else run.sealed.details.get("seal")
        if isinstance(seal, str):
            found[run.subject] = seal
    return found


def _results(
    workspace: Workspace, runs: Sequence[RunStanding], seals: Mapping[str, str]
) -> tuple[list[LotResult], tuple[LeftOut, ...]]:
    """A result for each lot in the order in which the lots first came, and the runs that are left out.

    A run that replaces another takes its place; of several runs of one lot that stand the newest counts.
    """
    by_subject = {run.subject: run for run in runs}
    found: dict[str, tuple[int, LotResult]] = {}
    left: list[LeftOut] = []
    for run in runs:
        if not run.stands:
            left.append(LeftOut(run.subject, "", "; ".join(standing_words(run)) or _state_words(run)))
            continue
        try:
            result = _result(workspace, run, seals[run.subject])
        except ChangedError as error:
            left.append(LeftOut(run.subject, "", str(error), changed=True))
            continue
        place = _first_number(run, by_subject)
        if result.lot in found:
            place, earlier = min(place, found[result.lot][0]), found[result.lot][1]
            left.append(LeftOut(earlier.run, earlier.lot, f"{run.subject} is a later run of the same lot"))
        found[result.lot] = (place, result)
    ordered = sorted(found.values(), key=lambda one: one[0])
    return [result for _, result in ordered], tuple(left)


def _state_words(run: RunStanding) -> str:
    return "it failed" if run.ended else "it has not ended"


def _first_number(run: RunStanding, runs: Mapping[str, RunStanding]) -> int:
    """The number of the first run of the chain of replacements that ends in `run`."""
    seen = {run.subject}
    while run.replaces is not None and run.replaces in runs and run.replaces not in seen:
        run = runs[run.replaces]
        seen.add(run.subject)
    return run.number


def _result(workspace: Workspace, run: RunStanding, seal: str) -> LotResult:
    """The result of a run, from its folio. Raises ChangedError where that is not as it was sealed."""
    folder = workspace.runs / run.subject
    held = sealed_files(folder, seal, (FINDINGS_FILE, RUN_FILE, STUDY_FILE))
    record = json.loads(held[RUN_FILE])
    return LotResult(
        lot=_lot(folder, seal, record, held[STUDY_FILE]),
        run=run.subject,
        started=record["started"],
        seal=seal,
        study_sha256=sha256_hex(held[STUDY_FILE]),
        findings=json.loads(held[FINDINGS_FILE]),
    )


def _lot(folder: Path, seal: str, record: Mapping[str, Any], study_content: bytes) -> str:
    """The lot of a run: as its record names it, else as its study does, else the run's own number."""
    named = record.get("lot")
    if isinstance(named, Mapping):
        named = named.get("lot")
    if isinstance(named, str):
        return named
    study = read_study(study_content, f"{folder.name}/study.yaml")
    fact = next((one for one in study.measurement if one.key == "lot"), None)
    if fact is not None and fact.text is not None:
        return fact.text
    if fact is not None and fact.column is not None:
        lots = _lots_of_rows(folder, seal, record, study, fact.column)
        if len(lots) == 1:
            return lots.pop()
    return str(record["run"])


def _lots_of_rows(
    folder: Path, seal: str, record: Mapping[str, Any], study: StudyDefinition, column: str
) -> set[str]:
    """What stands in a column of the archived raw data, beside the values that were analysed."""
    inputs = [(one["path"], one["folio_path"]) for one in record["inputs"] if one["role"] == "raw data"]
    held = sealed_files(folder, seal, [path for _, path in inputs])
    raw = [(path, held[inside]) for path, inside in inputs]
    observed = read_all_observations(raw, study.data, study.measurement)[0]
    if column not in observed.extra_columns:
        return set()
    place = observed.extra_columns.index(column)
    return {row.extras[place] for row in observed.rows}
