"""How a finished run ends on the terminal: verdicts, folio, seal, what to do next."""

import shlex
from collections.abc import Mapping
from pathlib import Path

from assayfolio.canonical import Json
from assayfolio.errors import ExitCode
from assayfolio.findings import DIFFERENCE_SHOWN, ComparisonFamily, ResponseFindings
from assayfolio.workflow.run import RunOutcome
from assayfolio.workflow.workspace import Workspace, shown_path


def outcome_lines(outcome: RunOutcome, here: Path, command: str) -> list[str]:
    """For people who work in the folder `here` and call the program by `command`."""
    lines = [""]
    for response in outcome.findings.responses:
        lines.extend(_verdicts(response))
    lines.extend(f"Not reported: {item.what} - {item.reason}" for item in outcome.findings.not_reported)
    near = outcome.folio.relative_to(here) if outcome.folio.is_relative_to(here) else outcome.folio
    folio = shown_path(near)
    return [
        *lines,
        "",
        f"Folio   {folio}",
        f"Report  {folio}/data/report.pdf",
        f"Seal    {outcome.seal}",
        "",
        "The plan was not pre-registered; every result is exploratory.",
        _standing(outcome),
        f"Verify with: {command} verify {shlex.quote(folio)}",
    ]


def _standing(outcome: RunOutcome) -> str:
    if not outcome.sign_off:
        return "No signatures are planned for this report."
    return "The report is a draft until every sign-off field on its first page carries a valid signature."


def _verdicts(response: ResponseFindings) -> list[str]:
    anova = response.anova
    lines = [f"{response.response}: means of {len(response.levels)} levels: {anova.verdict}"]
    lines.extend(f"{response.response}: {_family_verdict(family)}" for family in response.comparisons)
    return lines


def _family_verdict(family: ComparisonFamily) -> str:
    shown = [row.label for row in family.rows if row.verdict == DIFFERENCE_SHOWN]
    if family.family_size == 1:
        return f"{family.name}: {family.rows[0].verdict}"
    if not shown:
        return f"{family.name}: difference not shown in any of {family.family_size}"
    named = ", ".join(shown) if len(shown) <= 4 else f"{', '.join(shown[:4])} and {len(shown) - 4} more"
    return f"{family.name}: difference shown in {len(shown)} of {family.family_size} ({named})"


def outcome_document(workspace: Workspace, outcome: RunOutcome) -> Mapping[str, Json]:
    """For programs."""
    folio = shown_path(outcome.folio.relative_to(workspace.root))
    return {
        "run": outcome.subject,
        "outcome": "completed",
        "exit_code": int(ExitCode.DONE),
        "folio": folio,
        "report": f"{folio}/data/report.pdf",
        "findings": f"{folio}/data/findings.json",
        "seal": outcome.seal,
        "verdicts": {
            response.response: {
                "means": response.anova.verdict,
                "comparisons": [
                    {
                        "name": family.name,
                        "rows": [{"label": row.label, "verdict": row.verdict} for row in family.rows],
                    }
                    for family in response.comparisons
                ],
            }
            for response in outcome.findings.responses
        },
        "not_reported": [
            {"what": item.what, "reason": item.reason} for item in outcome.findings.not_reported
        ],
    }
