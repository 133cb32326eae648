"""Sentences that several parts of a report share."""

import re
from collections.abc import Sequence
from fractions import Fraction
from typing import Protocol

from assayfolio.findings import (
    DIFFERENCE_NOT_SHOWN,
    DIFFERENCE_SHOWN,
    EQUIVALENCE_NOT_SHOWN,
    EQUIVALENCE_SHOWN,
    NON_INFERIORITY_NOT_SHOWN,
    NON_INFERIORITY_SHOWN,
    CheckFindings,
    ComparisonFamily,
    ComparisonRow,
    Interval,
)
from assayfolio.report.basis import Basis
from assayfolio.report.methods import adjustment_of
from assayfolio.report.notation import (
    INFINITY,
    MINUS,
    Number,
    Scale,
    confidence,
    decimal,
    degrees_of_freedom,
    equals,
    probability,
    statistic,
    three_digits,
)
from assayfolio.report.numbering import Part
from assayfolio.report.prose import Prose, prose

NOT_REGISTERED = "not pre-registered"
EXPLORATORY = "Not pre-registered: every result is exploratory."
STANDING = "exploratory, as the plan was not pre-registered"
DRAFT_SENTENCE = "draft unless every sign-off field on page 1 carries a valid signature"
NO_SIGN_OFF = "the study plans no sign-off: this report carries no signatures"

CAUTION_SHOWN = "Whether a difference shown matters, its size and interval say."
CAUTION_NOT_SHOWN = "Not shown is not absent: the data are compatible with every value in the interval."
CAUTION_NO_INTERVAL = "Not shown is not absent: a difference too small for this many values may exist."
CAUTION_MIXED = "A difference shown may be too small to matter; one not shown may still exist."
CAUTIONS = (
    "What this document is not: it is not a release decision and takes no decision on any lot, method or "
    "instrument; that is for the responsible persons under the laboratory’s own procedures and the "
    "regulations that apply. Whether it meets a regulation or standard is for the laboratory’s quality "
    "system to say. The results relate only to the items tested. This report shall not be reproduced except "
    "in full."
)

BLANK = "–"
_AUTHORS = re.compile(
    r"\b(Brown|Shapiro|Anderson|Tukey|Games|Welch|Dunnett)-(Forsythe|Wilk|Darling|Kramer|Howell|Satterthwaite"
    r"|Tamhane)\b"
)
_SHORT_VERDICTS = {
    DIFFERENCE_SHOWN: "shown",
    DIFFERENCE_NOT_SHOWN: "not shown",
    EQUIVALENCE_SHOWN: "shown",
    EQUIVALENCE_NOT_SHOWN: "not shown",
    NON_INFERIORITY_SHOWN: "shown",
    NON_INFERIORITY_NOT_SHOWN: "not shown",
}


def about_equivalence(basis: Basis) -> str:
    """What a verdict on differences says of equivalence: nothing, and where that question is answered."""
    if basis.equivalence_plans:
        return "Equivalence is a question of its own."
    return "Equivalence was not tested."


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


def interval_cells(scale: Scale, interval: Interval | None) -> list[str]:
    """The two ends of an interval for a table, an open end as infinity, none at all as a dash."""
    if interval is None:
        return [BLANK, BLANK]
    low, high = interval
    return [
        f"{MINUS}{INFINITY}" if low is None else scale.mean(low),
        INFINITY if high is None else scale.mean(high),
    ]


def significant_ends(interval: Interval | None) -> list[str]:
    """As `interval_cells`, for quantities printed with three significant digits."""
    if interval is None:
        return [BLANK, BLANK]
    low, high = interval
    return [
        f"{MINUS}{INFINITY}" if low is None else three_digits(low),
        INFINITY if high is None else three_digits(high),
    ]


def p_words(basis: Basis, p: float, log10_p: float | None = None) -> Prose:
    """`p = ...` with the symbol in italics."""
    return prose("*p*\u202f{value}", value=equals(probability(p, basis.response.alpha, log10_p)))


def adjusted_p(basis: Basis, row: ComparisonRow) -> str:
    """The adjusted p of a comparison as printed."""
    return probability(row.p_adjusted, basis.response.alpha, row.log10_p_adjusted)


def is_adjusted(family: ComparisonFamily) -> bool:
    """Whether p-values of `family` are adjusted, for the family or for the number of responses."""
    return family.adjust != "none" or family.responses > 1


def interval_kind(basis: Basis, family: ComparisonFamily) -> str:
    """The kind of interval: "simultaneous 95 % interval", or "individual" where nothing was adjusted."""
    level = confidence(1 - basis.response.alpha / family.responses)
    if family.family_size == 1:
        return f"{level} interval"
    return f"{adjustment_of(family).interval} {level} interval"


class Sized(Protocol):
    """A family that knows how many rows were planned."""

    @property
    def family_size(self) -> int:
        """The number of planned rows."""

    @property
    def rows(self) -> Sequence[object]:
        """The rows that could be given."""


def missing_rows(family: Sized) -> int:
    """How many planned rows of a family could not be given."""
    return family.family_size - len(family.rows)


def of_rows(family: Sized, shown: int, what: str) -> str:
    """Where something is shown: "in 2 of 6 comparisons", with the number of those not assessable."""
    total, missing = len(family.rows), missing_rows(family)
    noun = f"assessed {what}" if missing else what
    if not shown:
        words = f"in any of {total} {noun}"
    else:
        words = f"in {f'all {total}' if shown == total else f'{shown} of {total}'} {noun}"
    return words + (f"; {missing} not assessable" if missing else "")


def missing_note(basis: Basis, family: Sized) -> list[Prose]:
    """The note below a table that lacks planned rows; none where it has all."""
    missing = missing_rows(family)
    if not missing:
        return []
    words = (
        "{missing} of {size} planned rows cannot be given; section {number} gives the reasons. They count in "
        "the adjustment as if their *p* were 1."
    )
    number = str(basis.place(Part.NOT_REPORTED).number)
    return [prose(words, missing=str(missing), size=str(family.family_size), number=number)]


def critical_words(critical: float | None, df: float | None = None, *, one_sided: bool = False) -> Prose:
    """What standard errors are multiplied by for the intervals: one number, or (None) a column of them."""
    value = () if critical is None else prose(" = {c}", c=statistic(critical))
    freedom = "" if df is None else f", with {degrees_of_freedom(df)} degrees of freedom"
    how = "the bound is the estimate and" if one_sided else "the interval is the estimate ±"
    words = (
        "*c*{value}{freedom}: "
        + how
        + " *c* times its standard error"
        + (" on the side asked about." if one_sided else ".")
    )
    return prose(words, value=value, freedom=freedom)


def row_verdict(verdict: str) -> str:
    """A verdict inside a table whose head already says what it is about."""
    return _SHORT_VERDICTS.get(verdict, verdict)


def departs(basis: Basis, check: CheckFindings) -> bool:
    """Whether the data show at level alpha a departure from what the analysis assumes.

    Where every level has a variance of its own, unequal variances are none.
    """
    if is_unassumed(basis, check):
        return False
    return check.p is not None and check.p <= float(basis.response.alpha)


def is_unassumed(basis: Basis, check: CheckFindings) -> bool:
    """Whether a check is about equal variances, in an analysis that does not assume them."""
    return basis.is_separate and "variance" in check.name


def check_words(basis: Basis, check: CheckFindings) -> Prose:
    """What a check found, in a few words: its name, its reading without the part that never changes, p."""
    name = short_check_name(check)
    note = check.note.split(" at level ")[0].split(";")[0]
    if check.p is None:
        return prose("{name}: {note}", name=name, note=note)
    return prose("{name}: {note} ({p})", name=name, note=note, p=p_words(basis, check.p))


def short_check_name(check: CheckFindings) -> str:
    """The name of a check without what it tests: "Shapiro–Wilk"."""
    return re.split(r" tests?\b| on | of | \(", typographic(check.name))[0]


def typographic(name: str) -> str:
    """A method's name with a dash between the names of its authors, and their names spelt in full."""
    dashed = _AUTHORS.sub("\\1–\\2", name)
    return dashed.replace("Scheffe", "Scheffé").replace("Sidak", "Šidák")


def alpha_words(basis: Basis) -> str:
    """Alpha as planned."""
    return decimal(basis.response.alpha)


def with_unit(figure: str, unit: str | None) -> str:
    """A planned figure and its unit, held together by a thin space."""
    return f"{figure}\u202f{unit}" if unit else figure


def limits_words(lower: Fraction | None, upper: Fraction | None, unit: str | None) -> str:
    """Planned limits with their unit: "-0.5 to 0.5 mg/L", or one of them."""
    if lower is None:
        return f"below {with_unit(decimal(upper or Fraction(0)), unit)}"
    if upper is None:
        return f"above {with_unit(decimal(lower), unit)}"
    return with_unit(f"{decimal(lower)} to {decimal(upper)}", unit)


def significant_interval(interval: Interval, unit: str | None = None) -> str:
    """An interval in words, its ends with three significant digits."""
    low, high = interval
    if low is None:
        return "unbounded" if high is None else f"at most {with_unit(three_digits(high), unit)}"
    if high is None:
        return f"at least {with_unit(three_digits(low), unit)}"
    return with_unit(f"{three_digits(low)} to {three_digits(high)}", unit)


def spread_of(scale: Scale, value: Number) -> str:
    """A standard deviation by itself, with its unit."""
    return scale.with_unit(scale.spread(value, value))


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


def listed(words: Sequence[str]) -> str:
    """Words as a list in running text: "a, b and c"."""
    return words[0] if len(words) == 1 else f"{', '.join(words[:-1])} and {words[-1]}"
