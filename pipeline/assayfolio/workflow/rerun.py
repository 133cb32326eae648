"""The re-run of an archived run: computed and rendered again from its folio alone, compared part by part.

The parts, in their order: the folio (against its manifests, and the audit trail where there is one), the
findings field by field, the figures, the text of the report, the bytes of the report. Each is identical,
equal within the stated bound, different, or not comparable with a reason. The folio itself is only read.
"""

import json
from collections.abc import Callable, Collection, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Literal

from assayfolio.canonical import Json, sha256_hex
from assayfolio.errors import AssayfolioError, ExitCode
from assayfolio.evidence.environment import environment_record
from assayfolio.evidence.folio import read_seal
from assayfolio.evidence.outcomes import CheckOutcome
from assayfolio.report.loading import load_renderer
from assayfolio.report.pdf_text import UnreadablePdfError, page_texts
from assayfolio.report.render import RenderedReport
from assayfolio.study.plan import Laboratory
from assayfolio.workflow.archived import FINDINGS_FILE, REPORT_FILE, ArchivedRun, archived_run
from assayfolio.workflow.environment_changes import EnvironmentChange, environment_changes
from assayfolio.workflow.rerender import compute_again, render_again
from assayfolio.workflow.rerun_compare import Difference, differences
from assayfolio.workflow.selfcheck import self_check

Outcome = Literal["identical", "equal within the bound", "different", "not comparable"]

EXCLUDED = (
    (
        "data/run.json",
        "times, account, host, trail heads and self-check of the run: facts, taken over as they are",
    ),
    (
        "data/environment.json, data/requirements.lock, data/bom.json",
        "what the run was made with; see environment",
    ),
    ("data/context/", "settings, people, plans and earlier executions as they were: input to the re-run"),
    ("data/trail.jsonl, data/ro-crate-metadata.json", "how the run came about; compared by verification"),
    ("data/study.yaml, data/inputs/", "input to the re-run; compared by their digests"),
    ("sign-off/", "signatures are added after the run; compared by verification"),
)
"""What is not compared with anything that is made again, and why."""

_SHOWN_AROUND = 24


@dataclass(frozen=True, slots=True)
class Part:
    """One part of the comparison: its name, what it came to, what there is to say."""

    name: str
    outcome: Outcome
    notes: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Rerun:
    """A finished re-run. `made` holds what was made again and differs, by file name.

    `laboratory` is that of the archived settings, None where they could not be read.
    """

    subject: str
    folio: Path
    seal: str
    self_check: str
    parts: tuple[Part, ...]
    differences: tuple[Difference, ...]
    changes: tuple[EnvironmentChange, ...]
    made: tuple[tuple[str, bytes], ...]
    laboratory: Laboratory | None = None

    @property
    def outcome(self) -> Outcome:
        """The worst of the parts; what is not comparable for a stated reason does not count."""
        found = {part.outcome for part in self.parts}
        if "different" in found:
            return "different"
        return "equal within the bound" if "equal within the bound" in found else "identical"

    @property
    def exit_code(self) -> ExitCode:
        """DONE where everything is identical or within the bound, FINDING where a part is different."""
        return ExitCode.FINDING if self.outcome == "different" else ExitCode.DONE


@dataclass(frozen=True, slots=True)
class Installation:
    """What computes again: the outcome of its self-check, and the record of its environment."""

    self_check: str
    environment: Mapping[str, Json]


def this_installation(laboratory: Laboratory) -> Installation:
    """The installation that runs, checked; `laboratory` says what the renderer is to be loaded for.

    Raises MachineError where a reference value is not reproduced or a library is missing.
    """
    load_renderer(laboratory)
    return Installation(self_check(), environment_record())


def rerun(
    folio: Path,
    checks: Sequence[CheckOutcome],
    installation: Callable[[Laboratory], Installation] = this_installation,
) -> Rerun:
    """Compute and render the run archived in `folio` again and compare; `checks` are those of the folio.

    Raises InputError where `folio` is not the folio of a completed run that this version reads, MachineError
    where this installation does not reproduce its reference values or cannot render.
    """
    run = archived_run(folio)
    parts = [_folio_part(checks)]
    try:
        computed = compute_again(run)
    except AssayfolioError as error:
        parts.append(Part("findings", "different", (f"they cannot be computed again: {error}",)))
        return Rerun(run.subject, folio, read_seal(folio), self_check(), tuple(parts), (), (), ())
    this = installation(computed.intake.laboratory)
    changes = environment_changes(run.environment, this.environment)
    other_program = any(change.share == "program" for change in changes)
    archived = run.read(FINDINGS_FILE)
    found = differences(json.loads(archived), json.loads(computed.document), other_program)
    parts.append(_findings_part(archived, computed.document, found))
    made: list[tuple[str, bytes]] = []
    if archived != computed.document:
        made.append(("findings.json", computed.document))
    comparable = parts[-1].outcome != "different"
    report = render_again(run, computed, sha256_hex(archived if comparable else computed.document))
    made += _compare_report(run, report, parts, changes)
    return Rerun(
        run.subject,
        folio,
        read_seal(folio),
        this.self_check,
        tuple(parts),
        found,
        changes,
        tuple(made),
        computed.intake.laboratory,
    )


def _folio_part(checks: Sequence[CheckOutcome]) -> Part:
    failed = [
        f"{check.number} {check.title}: {'; '.join(check.notes)}"
        for check in checks
        if check.outcome == "failed"
    ]
    if failed:
        return Part("folio", "different", tuple(failed))
    without_trail = [check for check in checks if check.outcome == "not checkable"]
    if without_trail:
        note = "agrees with its own manifests and records; not checked: " + "; ".join(
            dict.fromkeys(note for check in without_trail for note in check.notes)
        )
        return Part("folio", "identical", (note,))
    return Part("folio", "identical", ("agrees with its manifests, its records and the audit trail",))


def _findings_part(archived: bytes, document: bytes, found: Sequence[Difference]) -> Part:
    if archived == document:
        return Part("findings", "identical", ("the same bytes",))
    if any(not one.within for one in found):
        count = sum(not one.within for one in found)
        notes = [f"{count} {'field differs' if count == 1 else 'fields differ'}"]
    elif found:
        notes = []
    else:
        return Part(
            "findings", "different", ("every field is the same, but the file is written differently",)
        )
    within = [one for one in found if one.within and one.kind == "approximate"]
    if within:
        worst = max(one.digits_lost or 0.0 for one in within)
        notes.append(
            f"{len(within)} approximate numbers within their stated bounds, at most {worst} of 12 digits lost"
        )
    added = [one for one in found if one.within and one.kind == "only now"]
    if added:
        notes.append(f"{len(added)} fields that the version of the archive did not have, not compared")
    outcome: Outcome = "different" if any(not one.within for one in found) else "equal within the bound"
    return Part("findings", outcome, tuple(notes))


def _compare_report(
    run: ArchivedRun,
    report: RenderedReport,
    parts: list[Part],
    changes: Sequence[EnvironmentChange],
) -> list[tuple[str, bytes]]:
    """Compare figures, text and bytes, adding a part for each; return what differs."""
    archived = run.read(REPORT_FILE)
    figures = _figures_part(run, report)
    same = archived == report.pdf
    text = Part("report text", "identical") if same else _text_part(archived, report.pdf)
    parts += [figures, text]
    if same:
        parts.append(Part("report bytes", "identical", (f"{len(archived):,} bytes",)))
        return []
    parts.append(_bytes_part(parts, changes))
    made = [("report.pdf", report.pdf)]
    if figures.outcome == "different":
        made += [(f"figures/{name}", content) for name, content in report.figures]
    return made


def _figures_part(run: ArchivedRun, report: RenderedReport) -> Part:
    old, new = run.figures, dict(report.figures)
    notes = [
        f"{name}: {_how(name, old, new)}" for name in sorted({*old, *new}) if old.get(name) != new.get(name)
    ]
    if notes:
        return Part("figures", "different", tuple(notes))
    return Part("figures", "identical", (f"{len(old)} drawings, the same bytes",))


def _how(name: str, old: Collection[str], new: Collection[str]) -> str:
    if name not in new:
        return "only in the archive"
    return "differs" if name in old else "only now"


def _text_part(old: bytes, new: bytes) -> Part:
    try:
        before, after = page_texts(old), page_texts(new)
    except UnreadablePdfError as error:
        return Part("report text", "different", (f"the archived report cannot be read: {error}",))
    if before == after:
        return Part("report text", "identical", (f"{len(before)} pages",))
    if "".join(before) == "".join(after):
        return Part("report text", "identical", ("pages break elsewhere",))
    notes = [
        _first_difference(number, one, other)
        for number, (one, other) in enumerate(zip(before, after, strict=False), start=1)
        if one != other
    ]
    if len(before) != len(after):
        notes.append(f"{len(before)} pages then, {len(after)} now")
    return Part("report text", "different", tuple(notes))


def _first_difference(number: int, old: str, new: str) -> str:
    at = next(
        (at for at, (one, other) in enumerate(zip(old, new, strict=False)) if one != other),
        min(len(old), len(new)),
    )
    start = max(0, at - _SHOWN_AROUND)
    before, after = (text[start : at + _SHOWN_AROUND] for text in (old, new))
    return f"page {number}, without blanks: “{before}” then, “{after}” now"


def _bytes_part(parts: Sequence[Part], changes: Sequence[EnvironmentChange]) -> Part:
    """Why the bytes differ: another renderer, or findings within the bound, or no such reason."""
    by_name = {part.name: part.outcome for part in parts}
    renderer = [change for change in changes if change.share == "renderer"]
    if by_name["figures"] == by_name["report text"] == "identical":
        if by_name["findings"] == "equal within the bound":
            note = "the findings inside differ within the bound; figures and text are compared instead"
            return Part("report bytes", "not comparable", (note,))
        if renderer:
            note = "another renderer may give other bytes; figures and text are compared instead, exactly"
            return Part("report bytes", "not comparable", (note, *(str(change) for change in renderer)))
    if by_name["findings"] == "different":
        return Part("report bytes", "different", ("the findings inside differ",))
    if any(change.share == "program" for change in changes):
        note = (
            "another version of this program set it; `--environment archived` takes the one that made the run"
        )
        return Part("report bytes", "different", (note,))
    reason = "" if renderer else "the program and its renderer are the same"
    return Part("report bytes", "different", (reason,) if reason else ())
