"""Whether a reason for changing a plan says why, or only that it was changed."""

import re
from collections.abc import Iterable

from assayfolio.study.reasons import SHORTEST_REASON, emptiness

_WORDS = re.compile(r"\w+")
# Words that say nothing of why a plan was changed. A reason made of these alone is none.
_FITS_ANY_CHANGE_WORDS = """
a an the this that these it its i we as at by for from in into is was were are be been has had have of on to
and or with not no new old now all some more other another several minor major small slight editorial formal
plan plans planned protocol study definition document file version revision amendment amendments amend
amended amending change changes changed changing update updates updated updating correct corrects corrected
correction corrections edit edits edited editing fix fixes fixed fixing modify modified modification adapt
adapted adaptation adjust adjusted adjustment improve improved improvement revise revised add added adding
remove removed removing alter altered alteration reason reasons see above below made make done do due
because per please required requested necessary needed need decided agreed discussed analysis analyses
comparison comparisons better needs again once further also then here there something anything thing things
stuff yes ok etc today number wording text typo typos mistake mistakes error errors wrong right so they you
he she should would could can will must want wants wanted
"""
_FITS_ANY_CHANGE = frozenset(_FITS_ANY_CHANGE_WORDS.split())


def change_emptiness(reason: str, earlier: Iterable[str] = ()) -> str | None:
    """Why `reason` is none, in words that continue "is ..."; None where it may be one.

    Refused beside what `reasons.emptiness` refuses: words that fit any change, such as "minor update of the
    plan", and the text of an `earlier` reason of the same study.
    """
    text = " ".join(reason.split())
    empty = emptiness(text)
    if empty is not None:
        return empty.replace("any value", "anything")
    words = _WORDS.findall(text.lower())
    if all(word.isdigit() or word in _FITS_ANY_CHANGE for word in words):
        return "made of words that would fit any change"
    if any(text.casefold() == " ".join(other.split()).casefold() for other in earlier):
        return "the very text of an earlier reason"
    return None


EXPECTED = f"say what led to it, and where that is recorded, in {SHORTEST_REASON} characters or more"
