"""The nearest known word to a misspelt one."""

from collections.abc import Sequence

_LONGEST = 30
_MOST_KNOWN = 50


def edit_distance(a: str, b: str) -> int:
    """Insertions, deletions, replacements and swaps of neighbours that turn `a` into `b`.

    Optimal string alignment: no part is edited twice.
    """
    before: list[int] = []
    above = list(range(len(b) + 1))
    for i, x in enumerate(a, start=1):
        row = [i]
        for j, y in enumerate(b, start=1):
            best = min(above[j] + 1, row[j - 1] + 1, above[j - 1] + (x != y))
            if i > 1 and j > 1 and x == b[j - 2] and a[i - 2] == y:
                best = min(best, before[j - 2] + 1)
            row.append(best)
        before, above = above, row
    return above[-1]


def nearest(word: str, known: Sequence[str]) -> str | None:
    """The known word that `word` most likely stands for, or None if none is near.

    Near means at most one edit for every three letters, and at most three, or else the beginning of a word;
    case counts as no difference, nor does an underscore or a blank for a hyphen. Among equally near words
    there is no suggestion: it would be a guess. A very long word, or one among very many, gets none either,
    since looking would be dear.
    """
    if len(word) > _LONGEST or len(known) > _MOST_KNOWN:
        return None
    plain = _plain(word)
    best: list[str] = []
    limit = min(3, max(1, len(plain) // 3))
    for candidate in dict.fromkeys(known):
        if abs(len(candidate) - len(plain)) <= limit:
            distance = edit_distance(plain, _plain(candidate))
            if distance < limit or (distance == limit and not best):
                best, limit = [candidate], distance
            elif distance == limit:
                best.append(candidate)
    if not best:
        best = [word for word in known if len(plain) > 3 and word.startswith(plain)][:1]
    return best[0] if len(best) == 1 else None


def _plain(word: str) -> str:
    return word.strip().lower().replace("_", "-").replace(" ", "-")
