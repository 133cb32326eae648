"""What all answers on the first page share."""

from assayfolio.findings import NOT_ASSESSABLE
from assayfolio.report.basis import Basis
from assayfolio.report.content import Card
from assayfolio.report.numbering import Part
from assayfolio.report.prose import Prose, prose
from assayfolio.report.wording import capitalised

SAYS_NOTHING = "Nothing is said about a difference either way."
_MOST_NAMED = 4
_MOST_NAMED_CHARACTERS = 96


def card_head(basis: Basis, *parts: str) -> Prose:
    """The small line above a question; with several responses it begins with the one it is about."""
    words = [basis.response.response, *parts] if basis.several else list(parts)
    return prose("{words}", words=" · ".join(words))


def exploratory_mark(basis: Basis, *, registered: bool) -> tuple[str, ...]:
    """The word that marks one question as exploratory where others of the plan stand as registered."""
    return () if registered or not basis.content.run.registration.is_registered else ("exploratory",)


def how_many_named(names: list[str]) -> int:
    """How many of `names` a card holds: at most four, as far as two lines go, and one in any case."""
    count = min(_MOST_NAMED, len(names))
    while count > 1 and len("; ".join(names[:count])) > _MOST_NAMED_CHARACTERS:
        count -= 1
    return count


def not_assessable_card(
    basis: Basis, name: str, question: Prose, what: str, caution: str = SAYS_NOTHING
) -> Card:
    """A card for a question that could not be answered; `what` is its name among what is not reported."""
    place = basis.place(Part.NOT_REPORTED)
    about = (None, basis.response.response)
    reasons = [
        item.reason
        for item in basis.content.findings.not_reported
        if item.response in about and (item.what == what or item.what.startswith(f"{what}:"))
    ]
    reason = reasons[0] if reasons else f"the reason stands in section {place.number}"
    return Card(
        family=card_head(basis, name),
        question=question,
        verdict=capitalised(NOT_ASSESSABLE),
        lines=(prose("{reason}", reason=reason),),
        caution=prose(caution),
        picture=None,
        section=place.number,
        anchor=place.anchor,
    )
