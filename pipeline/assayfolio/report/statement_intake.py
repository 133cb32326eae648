"""The method statement on how recorded entries became the values that are analysed."""

from assayfolio.report.basis import Basis
from assayfolio.report.notation import decimal
from assayfolio.report.statement_parts import Method, sentences

_BELOW = {
    "omit": "A value reported as below a limit is omitted.",
    "half-limit": "A value reported as below a limit is analysed as half the limit that stands with it, "
    "exactly.",
    "limit": "A value reported as below a limit is analysed as the limit that stands with it.",
}
_ABOVE = {
    "omit": "A value reported as above a limit is omitted.",
    "limit": "A value reported as above a limit is analysed as the limit that stands with it.",
}
_CONVENTION = (
    "That is a convention and no estimate of the value. Where any value lies below a limit the whole "
    "analysis is made under each way of taking such values (omitted, half the limit, the limit), the rest as "
    "planned."
)
_REPEATS = (
    "Repeats of one replicate are averaged exactly, as fractions, before anything else; *n* counts "
    "replicates. A repeat that is missing, excluded, or omitted as beyond a limit is left out of its mean; "
    "one that a limit was put in for enters the mean so."
)
_EXCLUSIONS = (
    "Exclusions are decided by the persons named with them, in a file of its own with place, text, reason, "
    "person and date; the program proposes and decides none. One counts only where the data file holds the "
    "text that it names. The whole analysis is made a second time as if nothing had been excluded."
)
_MISSING = "Entries that the plan declares to stand for a missing value are omitted; nothing is put in."
_WORKSHEET = (
    "The measuring order of the worksheet follows from the plan alone (seed, levels, numbers, blocks); it is "
    "drawn again and held against the order and the labels in the data, position by position."
)


def intake_method(bases: tuple[Basis, ...]) -> Method | None:
    """What the plan makes of entries before they are analysed; None where it takes all as they are."""
    study = bases[0].study
    data = study.data
    rules = []
    if data.missing == "omit":
        rules.append(_MISSING)
    if data.unit_column is not None:
        rules += [
            f"A value in {{unit_{at}}} is multiplied by exactly {decimal(factor)}."
            for at, (_, factor) in enumerate(data.convert)
        ]
    below, above = _BELOW.get(data.below_limit, ""), _ABOVE.get(data.above_limit, "")
    if below or above:
        parts = (below, above, _CONVENTION if below else "That is a convention and no estimate of the value.")
        rules.append(" ".join(part for part in parts if part))
    if data.replicate_unit is not None:
        rules.append(_REPEATS)
    if data.exclusions is not None:
        rules.append(_EXCLUSIONS)
    if study.worksheet is not None:
        rules.append(_WORKSHEET)
    units = {f"unit_{at}": unit for at, (unit, _) in enumerate(data.convert)}
    return Method("Values as received", (sentences(*rules, **units),), ()) if rules else None
