"""How a finished run ends on the terminal: verdicts, folio, seal, what to do next."""

from collections.abc import Mapping

from assayfolio.canonical import Json
from assayfolio.errors import ExitCode
from assayfolio.findings import DIFFERENCE_SHOWN, ComparisonFamily, ResponseFindings
from assayfolio.workflow.run import RunOutcome
from assayfolio.workflow.workspace import Workspace, shown_path


def outcome_lines(workspace: Workspace, outcome: RunOutcome) -> list[str]:
    """For people."""
    lines = [""]
    for response in outcome.findings.responses:
        lines.extend(_verdicts(response))
    lines.extend(f"Not reported: {item.what} - {item.reason}" for item in outcome.findings.not_reported)
    folio = shown_path(outcome.folio.relative_to(workspace.root))
    return [
        *lines,
        "",
        f"Folio   {folio}",
        f"Report  {folio}/data/report.pdf",
        f"Seal    {outcome.seal}",
        "",
        "The plan was not pre-registered, and nothing is signed yet. The report is a draft until every",
        f"sign-off field on its first page carries a valid signature. Verify with: assayfolio verify {folio}",
    ]


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
