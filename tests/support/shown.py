"""What a reader of a run is to find for an option: the kind of line that the tables by hand are made of."""

from dataclasses import dataclass

BOTH = "bonferroni over the responses"
ADJUSTED_BY_HOLM = (
    "the adjusted p in place i of the rising order is the largest of min(1, (m − j + 1) × p(j))"
)
HOLM_RULE = "largest of min(1, (m − j + 1) × p(j)) over j ≤ i"


@dataclass(frozen=True, slots=True)
class Shown:
    """Where an option shows.

    `study` is the study that was run; `result` and `name` are in findings.json, the result a number, the
    standard name as "path = name", with paths inside the first response or the planned power. `printed` are
    words of the report that name the option, `formula` words of its formula or rule in the section on
    methods, `sources` author and year of its references.
    """

    study: str
    result: str
    name: str
    printed: str
    formula: str
    sources: tuple[str, ...] = ()
