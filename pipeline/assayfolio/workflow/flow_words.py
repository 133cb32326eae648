"""The counts from received to analysed, in words: for a check and for the first step of a run."""

from collections import Counter

from assayfolio.observations.values import Observations

_LEFT_OUT = (
    ("missing", "missing"),
    ("below_limit", "below a limit and omitted"),
    ("above_limit", "above a limit and omitted"),
    ("excluded", "excluded"),
    ("merged", "merged by averaging repeats"),
)


def flow_words(observed: Observations) -> str:
    """How many values were received, what became of them, and how many are analysed."""
    received = sum(counts.received for counts in observed.flow)
    analysed = sum(counts.analysed for counts in observed.flow)
    left_out = [
        f"{count:,} {words}"
        for key, words in _LEFT_OUT
        if (count := sum(getattr(counts, key) for counts in observed.flow))
    ]
    words = f"{analysed:,} values"
    if left_out:
        words = f"{received:,} values received, {', '.join(left_out)}; {analysed:,} analysed"
    put_in = Counter(row.kind for row in observed.rows if row.kind in ("below limit", "above limit"))
    told = [f"{count:,} {kind}" for kind, count in sorted(put_in.items(), reverse=True)]
    return f"{words} ({', '.join(told)}, put in as planned)" if told else words


def files_words(observed: Observations) -> str:
    """The data file, or the first of several and how many more there are."""
    more = len(observed.files) - 1
    return observed.file if not more else f"{observed.file} and {more} more"
