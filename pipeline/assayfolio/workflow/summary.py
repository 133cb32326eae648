"""How a finished run ends on the terminal: verdicts, folio, seal, what to do next."""

import shlex
from collections.abc import Iterator, Mapping, Sequence
from pathlib import Path

from assayfolio.canonical import Json
from assayfolio.errors import ExitCode
from assayfolio.exact import Exact, to_double
from assayfolio.findings import (
    DIFFERENCE_SHOWN,
    EQUIVALENCE_SHOWN,
    NON_INFERIORITY_SHOWN,
    OUTLIER,
    STRAGGLER,
    ComparisonFamily,
    ComparisonRow,
    CriterionFindings,
    EquivalenceFamily,
    EquivalenceRow,
    OutlierFindings,
    PrecisionFindings,
    ResponseFindings,
)
from assayfolio.report.facts import RegistrationFacts
from assayfolio.report.registration import minute
from assayfolio.workflow.run import RunOutcome
from assayfolio.workflow.workspace import Workspace, shown_path

_MOST_NAMED = 4


def outcome_lines(outcome: RunOutcome, here: Path, command: str) -> list[str]:
    """For people who work in the folder `here` and call the program by `command`."""
    lines = [""]
    for response in outcome.findings.responses:
        lines.extend(f"{response.response}: {line}" for line in _verdicts(response, outcome.registration))
    for item in outcome.findings.not_reported:
        of_response = f"{item.response}: " if item.response and len(outcome.findings.responses) > 1 else ""
        lines.append(f"Not reported: {of_response}{item.what} - {item.reason}")
    near = outcome.folio.relative_to(here) if outcome.folio.is_relative_to(here) else outcome.folio
    folio = shown_path(near)
    return [
        *lines,
        "",
        f"Folio   {folio}",
        f"Report  {folio}/data/report.pdf",
        f"Seal    {outcome.seal}",
        "",
        *_judgement(outcome),
        registration_line(outcome.registration),
        _standing(outcome),
        f"Verify with: {command} verify {shlex.quote(folio)}",
    ]


def registration_line(facts: RegistrationFacts) -> str:
    """How the plan stands to what was registered, and to the data."""
    if not facts.is_registered:
        return "The plan was not pre-registered; every result is exploratory."
    first = minute(facts.protocols[0].time)
    if not facts.before_data:
        seen = minute(facts.study_data_first_seen)
        return f"The plan was registered {first}, after the data were first seen, {seen}: exploratory."
    late = "; amended after the data" if facts.amended_after_data else ""
    return f"Pre-registered {first}, data first seen {minute(facts.data_first_seen)}{late}."


def _judgement(outcome: RunOutcome) -> list[str]:
    if outcome.exit_code == ExitCode.DONE:
        return []
    ends = f"this command ends with code {int(outcome.exit_code)} to say so"
    return [f"A criterion that was set in advance is not met. The run is complete and sealed; {ends}."]


def _standing(outcome: RunOutcome) -> str:
    if not outcome.sign_off:
        return "No signatures are planned for this report."
    return "The report is a draft until every sign-off field on its first page carries a valid signature."


def _verdicts(response: ResponseFindings, registration: RegistrationFacts) -> Iterator[str]:
    marked = registration.is_registered  # otherwise one line says it of all
    yield _overall(response)
    for comparison in response.comparisons:
        yield _family_verdict(comparison, DIFFERENCE_SHOWN, marked=marked)
    for family in response.equivalence:
        shown = EQUIVALENCE_SHOWN if family.claim == "equivalence" else NON_INFERIORITY_SHOWN
        yield _family_verdict(family, shown, marked=marked)
    if response.precision is not None:
        yield _precision_line(response.precision, response.unit)
    yield from (_criterion_line(criterion) for criterion in response.criteria)
    yield from _informs(response)


def _overall(response: ResponseFindings) -> str:
    if response.precision is not None and response.precision.between_sd is not None:
        return f"spread added by {len(response.levels)} levels: {response.overall_verdict}"
    return f"means of {len(response.levels)} levels: {response.overall_verdict}"


def _informs(response: ResponseFindings) -> Iterator[str]:
    """What asks to be looked at: proposals, and checks that show a departure at alpha."""
    proposals = [one for one in response.outliers if one.verdict in (OUTLIER, STRAGGLER)]
    if proposals:
        named = ", ".join(f"{one.verdict} {_proposed(one)} ({one.test})" for one in proposals)
        yield f"proposed for investigation, not removed: {named}"
    shown = [check.name for check in response.checks if check.p is not None and check.p <= response.alpha]
    if shown:
        yield f"a departure is shown by: {', '.join(shown)}"


def _proposed(found: OutlierFindings) -> str:
    if found.about == "level means":
        return f"among the level means: {', '.join(found.levels)}"
    return f"at {found.level}"


def _family_verdict(family: ComparisonFamily | EquivalenceFamily, shown: str, *, marked: bool) -> str:
    told = _family_words(family, shown)
    return f"{told}; exploratory" if marked and not family.registered else told


def _family_words(family: ComparisonFamily | EquivalenceFamily, shown: str) -> str:
    rows: Sequence[ComparisonRow | EquivalenceRow] = family.rows
    named = [row.label for row in rows if row.verdict == shown]
    if len(rows) == 1:
        return f"{family.name}: {rows[0].verdict}"
    what = shown.removesuffix(" shown")
    if not named:
        return f"{family.name}: {what} not shown in any of {len(rows)}"
    listed = ", ".join(named[:_MOST_NAMED])
    more = f" and {len(named) - _MOST_NAMED} more" if len(named) > _MOST_NAMED else ""
    return f"{family.name}: {what} shown in {len(named)} of {len(rows)} ({listed}{more})"


def _precision_line(found: PrecisionFindings, unit: str | None) -> str:
    parts = [f"repeatability {_sd(found.repeatability_sd, found.repeatability_rsd, unit)}"]
    if found.between_sd is not None:
        parts.append(f"between levels {_sd(found.between_sd, found.between_rsd, unit)}")
    if found.total_sd is not None:
        parts.append(f"{found.total_name} {_sd(found.total_sd, found.total_rsd, unit)}")
    return f"precision, standard deviations: {', '.join(parts)}"


def _sd(sd: Exact, relative: Exact | None, unit: str | None) -> str:
    percent = "" if relative is None else f" ({to_double(relative):.3g} %)"
    return f"{_quantity(sd, unit)}{percent}"


def _criterion_line(criterion: CriterionFindings) -> str:
    of_level = f" of {criterion.level}" if criterion.level else ""
    value = "" if criterion.value is None else f" {_quantity(criterion.value, criterion.unit)}"
    limit = _quantity(criterion.limit, criterion.unit)
    words = f"{criterion.quantity}{of_level}{value}, planned {criterion.relation} {limit}"
    return f"{words}: {criterion.verdict}"


def _quantity(value: Exact, unit: str | None) -> str:
    number = f"{to_double(value):.6g}"
    return number if unit is None else f"{number} {unit}"


def outcome_document(workspace: Workspace, outcome: RunOutcome) -> Mapping[str, Json]:
    """For programs."""
    folio = shown_path(outcome.folio.relative_to(workspace.root))
    return {
        "run": outcome.subject,
        "outcome": "completed",
        "exit_code": int(outcome.exit_code),
        "folio": folio,
        "report": f"{folio}/data/report.pdf",
        "findings": f"{folio}/data/findings.json",
        "seal": outcome.seal,
        "verdicts": {
            response.response: {
                "means": response.overall_verdict,
                "comparisons": [_family_document(family) for family in response.comparisons],
                "equivalence": [_family_document(family) for family in response.equivalence],
                "criteria": [_criterion_document(criterion) for criterion in response.criteria],
            }
            for response in outcome.findings.responses
        },
        "not_reported": [
            {"what": item.what, "reason": item.reason, "response": item.response}
            for item in outcome.findings.not_reported
        ],
    }


def _family_document(family: ComparisonFamily | EquivalenceFamily) -> Mapping[str, Json]:
    rows: Sequence[ComparisonRow | EquivalenceRow] = family.rows
    return {"name": family.name, "rows": [{"label": row.label, "verdict": row.verdict} for row in rows]}


def _criterion_document(criterion: CriterionFindings) -> Mapping[str, Json]:
    return {
        "quantity": criterion.quantity,
        "level": criterion.level,
        "value": None if criterion.value is None else to_double(criterion.value),
        "relation": criterion.relation,
        "limit": to_double(criterion.limit),
        "unit": criterion.unit,
        "verdict": criterion.verdict,
    }
