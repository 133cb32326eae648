"""Which comparisons had been registered before the data were seen: marked in findings, never recomputed."""

from collections.abc import Collection
from dataclasses import replace

from assayfolio.findings import Findings, ResponseFindings
from assayfolio.findings_intake import Deviation


def with_registration(
    findings: Findings,
    comparisons: Collection[str],
    equivalence: Collection[str],
    deviations: tuple[Deviation, ...],
) -> Findings:
    """`findings` with the named families marked as registered, and further `deviations` behind its own."""
    return replace(
        findings,
        responses=tuple(_marked(found, comparisons, equivalence) for found in findings.responses),
        deviations=(*findings.deviations, *deviations),
    )


def _marked(
    found: ResponseFindings, comparisons: Collection[str], equivalence: Collection[str]
) -> ResponseFindings:
    without = found.without_exclusions
    return replace(
        found,
        comparisons=tuple(replace(one, registered=one.name in comparisons) for one in found.comparisons),
        equivalence=tuple(replace(one, registered=one.name in equivalence) for one in found.equivalence),
        without_exclusions=None if without is None else _marked(without, comparisons, equivalence),
    )
