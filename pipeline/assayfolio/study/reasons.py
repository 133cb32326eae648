"""Whether a reason says what happened, or only that something did."""

import re

SHORTEST_REASON = 10
_FEWEST_LETTERS = 4
_WORDS = re.compile(r"\w+")

# Words that say nothing of what happened to a measurement. A reason made of these alone is none.
_FITS_ANY_VALUE = """
a an the this that these it its as at by for from in is was were are be been of on to and or with without
not no none nil n na very too just only due because per please same do does did outlier outliers outlying
extreme aberrant abnormal unusual unexpected odd strange suspicious suspect doubtful implausible wrong bad
poor incorrect invalid erroneous faulty inconsistent high low large small error errors mistake mistakes
problem problems issue issues human analyst operator instrument laboratory lab technical measuring
statistical statistically obvious obviously clear clearly evident evidently value values result results
reading readings measurement measurements data point points row rows line sample samples replicate number
test testing tests check tbd todo dummy placeholder text ok okay lorem ipsum dolor unknown reason reasons
comment comments note notes remark remarks see above below applicable given stated report discussed agreed
requested required necessary needed decided grubbs dixon cochran out range fit fits failed fails fail
representative expected what we because there does limit limits exclude excluded exclusion remove removed
delete deleted reject rejected discard discarded drop dropped ignore ignored omit omitted left out
"""
_EMPTY = frozenset(_FITS_ANY_VALUE.split())


def emptiness(reason: str) -> str | None:
    """Why `reason` is none, in words that continue "is ..."; None where it may be one.

    Refused: fewer than 10 characters, hardly any different letters, and words that fit any value, such as
    "obvious outlier". Whether what remains is true, only a person can judge.
    """
    words = _WORDS.findall(reason.lower())
    letters = {character for word in words for character in word if character.isalpha()}
    if len(letters) >= _FEWEST_LETTERS and all(word.isdigit() or word in _EMPTY for word in words):
        return "made of words that would fit any value"
    if len(reason) < SHORTEST_REASON:
        return f"only {len(reason)} characters long"
    return "no text" if len(letters) < _FEWEST_LETTERS else None
