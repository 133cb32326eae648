"""The nearest known word to a misspelt one."""

from collections.abc import Iterable

_LONGEST = 40


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


def nearest(word: str, known: Iterable[str]) -> str | None:
    """The known word that `word` most likely stands for, or None if none is near.

    Near means at most one edit for every three letters, and at most three; case, underscores and blanks
    count as no difference. Among equally near words the first wins.
    """
    if len(word) > _LONGEST:
        return None
    plain = _plain(word)
    best: str | None = None
    limit = min(3, max(1, len(plain) // 3)) + 1
    for candidate in known:
        if abs(len(candidate) - len(plain)) < limit:
            distance = edit_distance(plain, _plain(candidate))
            if distance < limit:
                best, limit = candidate, distance
    return best


def _plain(word: str) -> str:
    return word.strip().lower().replace("_", "-").replace(" ", "-")
