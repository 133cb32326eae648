"""Labels of pairs: whether two pairs of levels would bear the same one."""

from collections.abc import Iterable, Iterator

_BETWEEN = " - "


def shared_label(levels: Iterable[str]) -> str | None:
    """A label `A - B` that two different pairs of `levels` would both bear, or None.

    If `a - b` and `c - d` are equal and `a` is the longer, then `a` begins with `c` and `d` ends with `b`.
    What is left of each must agree: only levels with the sign between the names can bring that about.
    """
    known = frozenset(levels)
    by_rest: dict[str, list[tuple[str, str]]] = {}
    for whole in sorted(known):
        for rest, end in _beginnings(whole):
            if end in known:
                by_rest.setdefault(rest, []).append((whole, end))
    for whole in sorted(known):
        for start, rest in _ends(whole):
            for other, end in by_rest.get(rest, ()) if start in known else ():
                if whole != end and start != other and {whole, end} != {start, other}:
                    return whole + _BETWEEN + end
    return None


def _ends(text: str) -> Iterator[tuple[str, str]]:
    """Each start of `text` before a sign, with the rest from the sign on."""
    at = text.find(_BETWEEN)
    while at >= 0:
        yield text[:at], text[at:] + _BETWEEN
        at = text.find(_BETWEEN, at + 1)
    if text.endswith(" -"):  # this sign and that of the label share a blank
        yield text[:-2], " - - "


def _beginnings(text: str) -> Iterator[tuple[str, str]]:
    """Each end of `text` behind a sign, with the rest up to and with the sign, and a sign before it."""
    at = text.find(_BETWEEN)
    while at >= 0:
        yield _BETWEEN + text[: at + len(_BETWEEN)], text[at + len(_BETWEEN) :]
        at = text.find(_BETWEEN, at + 1)
    if text.startswith("- "):
        yield " - - ", text[2:]
