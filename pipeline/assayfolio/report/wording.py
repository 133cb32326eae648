"""Sentences that several parts of a report share."""

from assayfolio.findings import (
    DIFFERENCE_NOT_SHOWN,
    DIFFERENCE_SHOWN,
    CheckFindings,
    ComparisonFamily,
    ComparisonRow,
    Interval,
)
from assayfolio.report.basis import Basis
from assayfolio.report.methods import adjustment_of
from assayfolio.report.notation import Scale, decimal, equals, probability
from assayfolio.report.prose import Prose, prose

NOT_REGISTERED = "not pre-registered"
EXPLORATORY = "Not pre-registered: every result is exploratory."
DRAFT_SENTENCE = "draft unless every sign-off field on page 1 carries a valid signature"
NO_SIGN_OFF = "the study plans no sign-off: this report carries no signatures"

CAUTION_SHOWN = "Whether a difference shown matters, its size and interval say. Equivalence was not tested."
CAUTION_NOT_SHOWN = (
    "Not shown is not absent: the data are compatible with every value in the interval. "
    "Equivalence was not tested."
)
CAUTION_NO_INTERVAL = (
    "Not shown is not absent: a difference too small for this many values may exist. "
    "Equivalence was not tested."
)
CAUTION_MIXED = (
    "A difference shown may be too small to matter; one not shown may still exist. "
    "Equivalence was not tested."
)
CAUTIONS = (
    "What this document is not: it is not a release decision and takes no decision on any lot, method or "
    "instrument; that is for the responsible persons under the laboratory’s own procedures and the "
    "regulations that apply. Whether it meets a regulation or standard is for the laboratory’s quality "
    "system to say. The results relate only to the items tested. This report shall not be reproduced except "
    "in full."
)


def interval_words(scale: Scale, interval: Interval) -> str:
    """An interval with its unit: "from ... to ...", or with one open end."""
    low, high = interval
    if low is None and high is None:
        return "unbounded"
    if low is None:
        return f"at most {scale.with_unit(scale.mean(high or 0.0))}"
    if high is None:
        return f"at least {scale.with_unit(scale.mean(low))}"
    return scale.with_unit(f"{scale.mean(low)} to {scale.mean(high)}")


def p_words(basis: Basis, p: float, log10_p: float | None = None) -> Prose:
    """`p = ...` with the symbol in italics."""
    return prose("*p*\u202f{value}", value=equals(probability(p, basis.response.alpha, log10_p)))


def adjusted_p(basis: Basis, row: ComparisonRow) -> str:
    """The adjusted p of a comparison as printed."""
    return probability(row.p_adjusted, basis.response.alpha, row.log10_p_adjusted)


def interval_kind(basis: Basis, family: ComparisonFamily) -> str:
    """The kind of interval: "simultaneous 95 % interval", or "individual" where nothing was adjusted."""
    if len(family.rows) == 1:
        return f"{basis.confidence} interval"
    return f"{adjustment_of(family).interval} {basis.confidence} interval"


def row_verdict(verdict: str) -> str:
    """A verdict inside a table whose head already says "difference"."""
    return {DIFFERENCE_SHOWN: "shown", DIFFERENCE_NOT_SHOWN: "not shown"}.get(verdict, verdict)


def check_words(basis: Basis, check: CheckFindings) -> Prose:
    """What a check found, in a few words: its name, its reading without the part that never changes, p."""
    name = typographic(check.name).split(" ")[0]
    note = check.note.split(" at level ")[0].split(";")[0]
    if check.p is None:
        return prose("{name}: {note}", name=name, note=note)
    return prose("{name}: {note} ({p})", name=name, note=note, p=p_words(basis, check.p))


def typographic(name: str) -> str:
    """A method's name with a dash between the names of its authors."""
    return name.replace("Brown-Forsythe", "Brown–Forsythe").replace("Shapiro-Wilk", "Shapiro–Wilk")


def alpha_words(basis: Basis) -> str:
    """Alpha as planned."""
    return decimal(basis.response.alpha)


def capitalised(text: str) -> str:
    """`text` with its first letter large."""
    return text[:1].upper() + text[1:]


def counted(number: int, singular: str, plural: str | None = None) -> str:
    """`number` with its noun."""
    return f"{number} {singular if number == 1 else plural or singular + 's'}"


def first_of(names: list[str], most: int, separator: str) -> str:
    """The first `most` of `names`, and how many more there are."""
    rest = len(names) - most
    return separator.join(names[:most]) + (f" and {rest} more" if rest > 0 else "")
