"""How often these data were analysed before: the words for page 1 and for the provenance section."""

from collections import Counter

from assayfolio.report.facts import ElsewhereFacts, ExecutionFacts, PlanVersion
from assayfolio.report.wording import counted, first_of

_MOST_ON_PAGE_1 = 3
_MOST_LISTED = 40
_DIGITS = 8


def further_words(executions: ExecutionFacts) -> str:
    """The line for page 1 where these data were used before; empty where they were not."""
    if not executions.tried and not executions.elsewhere:
        return ""
    words = f"Execution {executions.number} on these data"
    if executions.tried:
        words += f"; plan versions tried before: {_tried(executions, _MOST_ON_PAGE_1)}"
    if executions.elsewhere:
        words += f"; {_elsewhere(executions.elsewhere, _MOST_ON_PAGE_1)}"
    return words + _void(executions, _MOST_ON_PAGE_1)


def execution_words(executions: ExecutionFacts) -> str:
    """The number of this execution, and the plan versions of those before it."""
    words = f"execution {executions.number} of this study on exactly these data files"
    if executions.tried:
        words += f"; plan versions tried before: {_tried(executions, _MOST_LISTED)}"
    return words + _void(executions, _MOST_LISTED)


def elsewhere_words(executions: ExecutionFacts) -> str:
    """The other runs that used these data."""
    if not executions.elsewhere:
        return "by no other study, and by no run on a part of them, before this one"
    return _elsewhere(executions.elsewhere, _MOST_LISTED)


def _tried(executions: ExecutionFacts, most: int) -> str:
    """Each version with the number of its executions: the present one first, then in order of appearance."""
    tries = Counter(executions.tried)
    present = executions.plan
    names = [
        f"{_named(version)} ({'the present one, ' if version == present else ''}{counted(runs, 'run')})"
        for version, runs in sorted(tries.items(), key=lambda item: item[0] != present)
    ]
    return first_of(names, most, ", ")


def _void(executions: ExecutionFacts, most: int) -> str:
    """The runs among them that are void."""
    if not executions.void:
        return ""
    runs = [f"{run} (investigation {reference})" for run, reference in executions.void]
    return f"; void: {first_of(runs, most, ', ')}"


def _named(version: PlanVersion) -> str:
    definition = version.definition[:_DIGITS] if version.definition else "not recorded"
    if version.exclusions is None:
        return definition
    return f"{definition} with exclusions {version.exclusions[:_DIGITS]}"


def _elsewhere(uses: tuple[ElsewhereFacts, ...], most: int) -> str:
    whole = [f"{use.study} {use.run}" for use in uses if use.all_data]
    part = [f"{use.study} {use.run}" for use in uses if not use.all_data]
    sentences = []
    if whole:
        sentences.append(f"these data were also used by {first_of(whole, most, ', ')}")
    if part:
        sentences.append(f"some of these data were also used by {first_of(part, most, ', ')}")
    return "; ".join(sentences)
