"""What a person is shown before he signs: what it is, what it says, and what a reviewer should know."""

import json
from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from assayfolio.canonical import sha256_hex
from assayfolio.errors import InputError
from assayfolio.evidence.entries import TrailEntry
from assayfolio.evidence.moves import Rules
from assayfolio.evidence.outcomes import Verification
from assayfolio.evidence.sign_offs import signatures_of
from assayfolio.evidence.states import TRAIL_REVIEWED
from assayfolio.evidence.trail_exceptions import trail_exceptions
from assayfolio.evidence.trail_filters import studies_of
from assayfolio.workflow.signable import Signable

SIGN_REFUSED = "sign-refused"
_FINDINGS_FILE = "data/findings.json"
_MOST_EXCEPTIONS = 20


def summary_lines(
    target: Signable, entries: Sequence[TrailEntry], verification: Verification, rules: Rules
) -> list[str]:
    """Study, verdicts, exclusions, deviations, exceptions of the trail, earlier signatures, digests."""
    definition, report = target.definition, target.unsigned
    lines = [f"{target.subject}: {definition.title}"]
    if target.kind == "run":
        lines.extend(_result_lines(_findings(target)))
    else:
        lines.append(
            f"  plan          of {len(definition.comparisons)} planned comparison(s), to be registered"
        )
    lines.extend(_earlier(target, entries, rules))
    lines.extend(_exceptions(target, entries))
    unchecked = verification.with_outcome("not checkable")
    lines.append(f"  verified      {len(verification.with_outcome('passed'))} checks passed")
    lines.extend(
        f"  not checkable {each.number} {each.subject}: {'; '.join(each.notes)}" for each in unchecked
    )
    lines.append(f"  report        SHA-256 {sha256_hex(report)}")
    lines.append(f"  seal          {target.seal}")
    return lines


def _findings(target: Signable) -> Mapping[str, Any]:
    try:
        found = json.loads(target.read(_FINDINGS_FILE))
    except ValueError as error:
        raise InputError(f"{target.subject}/{_FINDINGS_FILE} cannot be read: {error}.") from error
    assert isinstance(found, dict), "a folio that verifies holds findings"
    return found


def _result_lines(findings: Mapping[str, Any]) -> Iterator[str]:
    for response, found in findings["responses"].items():
        for words in _verdicts(found):
            yield f"  {response}: {words}"
    for item in findings["not_reported"]:
        yield f"  not reported  {item['what']}: {item['reason']}"
    for label in ("exclusions", "deviations"):
        items = findings[label]
        yield f"  {label:<13} {len(items) or 'none'}"
        yield from (f"    {_sentence(item)}" for item in items)


def _verdicts(found: Mapping[str, Any]) -> Iterator[str]:
    overall = found.get("anova") or found.get("welch") or {}
    if "verdict" in overall:
        yield f"means of {len(found['levels'])} levels: {overall['verdict']}"
    for family in (*found.get("comparisons", ()), *found.get("equivalence", ())):
        for row in family["rows"]:
            yield f"{family['name']}, {row['label']}: {row['verdict']}"
    for criterion in found.get("criteria", ()):
        yield f"criterion {criterion['quantity']}: {criterion['verdict']}"


def _sentence(item: Mapping[str, Any]) -> str:
    """An exclusion or deviation in a line: whatever texts it has."""
    texts = (str(value) for value in item.values() if isinstance(value, str | int | float) and value != "")
    return "; ".join(texts)


def _earlier(target: Signable, entries: Sequence[TrailEntry], rules: Rules) -> Iterator[str]:
    for signature in signatures_of(entries, target.subject):
        time = signature.entry.details.get("time")
        yield f"  signed        {signature.role}: {signature.person}, {time}"
    for entry in entries:
        if entry.action == SIGN_REFUSED and entry.subject == target.subject:
            role, person = entry.details.get("role"), entry.details.get("person")
            yield f"  refused       {role}: {person or entry.actor}, {entry.time[:10]}: {entry.reason}"
        elif entry.action == TRAIL_REVIEWED and entry.details.get("run") == target.subject:
            through, outcome = entry.details.get("through_seq"), entry.details.get("outcome")
            yield f"  trail review  {entry.actor}, up to entry {through}: {outcome}"
    if target.kind == "run" and rules.one_person:
        yield "  one person    the laboratory has one person: nothing was checked by a second one"


def _exceptions(target: Signable, entries: Sequence[TrailEntry]) -> Iterator[str]:
    found = [each for each in trail_exceptions(entries) if target.study in studies_of(each.entry)]
    yield f"  exceptions    {len(found) or 'none'} in the audit trail of {target.study}"
    for each in found[:_MOST_EXCEPTIONS]:
        yield f"    {each.kind}: entry {each.entry.seq}, {each.words}"
    if len(found) > _MOST_EXCEPTIONS:
        yield f"    and {len(found) - _MOST_EXCEPTIONS} more: assayfolio trail --exceptions"
