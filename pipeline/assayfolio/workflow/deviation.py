"""Deviations that a person enters: what was not done as planned, its effect, and what was decided."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from assayfolio.canonical import Json
from assayfolio.errors import Fault, InputError, Place
from assayfolio.evidence.entries import TrailEntry
from assayfolio.findings_intake import Deviation
from assayfolio.study.faults import shown
from assayfolio.study.reasons import emptiness
from assayfolio.workflow.authority import require
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.intake import SeenFiles, read_plan
from assayfolio.workflow.recovery import found_trail
from assayfolio.workflow.registration import minute_text
from assayfolio.workflow.workspace import Workspace

DEVIATION_RECORDED = "deviation-recorded"
DEVIATIONS_FILE = "data/context/deviations.json"
DEVIATIONS_FORMAT = "assayfolio-deviations/1"
LONGEST = 500


@dataclass(frozen=True, slots=True)
class EnteredDeviation:
    """A deviation as it was entered: for which study, and under which entry of the trail."""

    study: str
    seq: int
    time: str
    what: str
    effect: str
    decision: str
    when: str | None

    def lines(self) -> list[str]:
        """What was entered, for people."""
        return [
            f"Deviation of {self.study} entered as entry {self.seq}, {minute_text(self.time)}",
            f"  what      {self.what}",
            f"  effect    {self.effect}",
            f"  decision  {self.decision}",
            *([f"  when      {self.when}"] if self.when else []),
            "Every later report of the study lists it; it cannot be taken back, another one can add to it.",
        ]

    def document(self) -> Mapping[str, Json]:
        """What was entered, for programs."""
        return {
            "study": self.study,
            "seq": self.seq,
            "time": self.time,
            "what": self.what,
            "effect": self.effect,
            "decision": self.decision,
            "when": self.when,
        }


def enter_deviation(
    workspace: Workspace, study_path: Path, *, what: str, effect: str, decision: str, when: str | None
) -> EnteredDeviation:
    """Enter a deviation of the study in `study_path`.

    `when` is when it happened, in the words of the person. Raises InputError for a text that says nothing or
    is too long, where the plan is faulty and where the account may not; BusyError where another writer holds
    the workspace.
    """
    require(workspace, "deviation")
    study, laboratory = read_plan(workspace, study_path, SeenFiles())
    texts = {"what": what, "effect": effect, "decision": decision, "when": when or ""}
    clean = {name: " ".join(text.split()) for name, text in texts.items()}
    _refuse_empty(clean)
    told = {**clean, "when": clean["when"] or None}
    with trail_book(workspace, laboratory.wait_seconds) as trail:
        found_trail(workspace, trail)
        entry = trail.append(DEVIATION_RECORDED, study.study, clean["what"], told)
    return EnteredDeviation(
        study.study, entry.seq, entry.time, clean["what"], clean["effect"], clean["decision"], told["when"]
    )


def _refuse_empty(texts: Mapping[str, str]) -> None:
    faults = []
    for name, text in texts.items():
        place = Place(f"--{name}")
        if len(text) > LONGEST:
            faults.append(
                Fault(place, f"has {len(text)} characters", f"at most {LONGEST}; refer to a record")
            )
        elif name == "what":
            why = emptiness(text)
            if why is not None:
                faults.append(Fault(place, f"is {shown(text)}, {why}", "say what happened, in whole words"))
        elif name in ("effect", "decision") and len(text) < _SHORTEST:
            advice = "say it in whole words, such as “none: the values are not affected, because ...”"
            faults.append(Fault(place, f"is {shown(text)}, which says nothing", advice))
    if faults:
        raise InputError("The deviation was not entered.", tuple(faults))


_SHORTEST = 4


def deviations_record(entries: Iterable[TrailEntry], study: str) -> dict[str, Json]:
    """Every deviation entered for the study so far, for the folio of a run."""
    return {
        "format": DEVIATIONS_FORMAT,
        "study": study,
        "recorded": [
            {
                "seq": entry.seq,
                "time": entry.time,
                "actor": entry.actor,
                "person": _person(entry),
                **{key: entry.details.get(key) for key in ("what", "effect", "decision", "when")},
            }
            for entry in entries
            if entry.action == DEVIATION_RECORDED and entry.subject == study
        ],
    }


def _person(entry: TrailEntry) -> Json:
    by = entry.details.get("by")
    return by.get("person") if isinstance(by, Mapping) else None


def entered_deviations(record: Mapping[str, Any]) -> tuple[Deviation, ...]:
    """The entered deviations as findings, in the order of their entry."""
    return tuple(Deviation(str(one["what"]), _words(one)) for one in record["recorded"])


def _words(one: Mapping[str, Any]) -> str:
    when = f"; when: {one['when']}" if one["when"] else ""
    who = one["person"] or one["actor"]
    return (
        f"effect: {one['effect']}; decision: {one['decision']}{when}; "
        f"entered by {who}, {minute_text(one['time'])}"
    )
