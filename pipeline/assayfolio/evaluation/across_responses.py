"""One question asked of several responses: adjusting its tests for that.

Bonferroni tests the question on each of m responses at alpha / m, intervals included. Holm takes the tests
of all responses together as one family, so that it has no intervals. A question that Holm cannot take so (it
is asked of one response only, or its own family is not adjusted by Holm) is tested at alpha / m instead.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from math import log10

from assayfolio.exact import to_double
from assayfolio.statistics.adjustment import Tail, holm
from assayfolio.study.plan import AcrossResponses, StudyDefinition


@dataclass(frozen=True, slots=True)
class FamilyTails:
    """The tails of one family on one response: unadjusted, and adjusted within the family.

    `missing` is the number of planned rows that could not be given.
    """

    raw: tuple[Tail, ...]
    within: tuple[Tail, ...]
    missing: int = 0


@dataclass(frozen=True, slots=True)
class AcrossRule:
    """How one question is adjusted for the `responses` it counts as asked of."""

    method: AcrossResponses
    responses: int

    @property
    def has_intervals(self) -> bool:
        """Whether intervals go with the adjusted tests."""
        return self.method != "holm"

    def level(self, alpha: Fraction) -> float:
        """The level of the intervals and critical values of one response."""
        return to_double(alpha / self.responses if self.method == "bonferroni" else alpha)

    def adjusted(self, families: Sequence[FamilyTails | None]) -> list[tuple[Tail, ...]]:
        """The adjusted tails, one list a response; a family that is None could not be formed.

        What could not be formed keeps its place in the count, as if its p were 1.
        """
        if self.method == "none":
            return [() if family is None else family.within for family in families]
        if self.method == "bonferroni":
            return [
                () if family is None else tuple(_times(tail, self.responses) for tail in family.within)
                for family in families
            ]
        return _pooled_holm(families)


def across_rule(study: StudyDefinition, adjust: str, size: int, asked_of: int) -> AcrossRule:
    """The rule for a family of `size` adjusted by `adjust`, asked of `asked_of` responses of the study."""
    method, responses = study.design.across_responses, len(study.data.response)
    if method == "none" or responses == 1:
        return AcrossRule("none", 1)
    if method == "holm" and (asked_of < responses or not (adjust == "holm" or size == 1)):
        return AcrossRule("bonferroni", responses)
    return AcrossRule(method, responses)


def _pooled_holm(families: Sequence[FamilyTails | None]) -> list[tuple[Tail, ...]]:
    sizes = [0 if family is None else len(family.raw) for family in families]
    planned = max((len(family.raw) + family.missing for family in families if family is not None), default=0)
    known = [tail for family in families if family is not None for tail in family.raw]
    missing = planned * len(families) - len(known)
    adjusted = iter(holm([*known, *(Tail(1.0, 0.0) for _ in range(missing))]))
    return [tuple(next(adjusted) for _ in range(size)) for size in sizes]


def _times(tail: Tail, factor: int) -> Tail:
    return Tail(min(1.0, factor * tail.p), min(0.0, tail.log10_p + log10(factor)))
