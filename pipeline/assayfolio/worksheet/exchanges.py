"""Positions that were exchanged: pairs where each holds what was planned for the other."""

from collections import defaultdict, deque
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass

from assayfolio.worksheet.matching import Met

_Identity = tuple[str, str | None]  # level and label


@dataclass(frozen=True, slots=True)
class Exchange:
    """Two positions that changed places, in words."""

    first: Met
    second: Met
    detail: str


def label_differs(met: Met) -> bool:
    """Whether the data give another label than the planned one; no label is no other label."""
    return met.received.item is not None and met.received.item != met.planned.item


def level_and_label(level: str, label: str | None) -> str:
    """A level with the label of the item, where there is one."""
    return level if label is None else f"{level} ({label})"


def exchanges(met: Sequence[Met]) -> tuple[Exchange, ...]:
    """Pairs that hold each other's level and label; then, among the rest, each other's level alone."""
    whole = tuple(_pairs(met, _whole))
    settled = {one.position for pair in whole for one in pair}
    rest = [one for one in met if one.position not in settled and not label_differs(one)]
    return (
        *(_exchange(first, second, _both_words(first, second)) for first, second in whole),
        *(_exchange(first, second, _level_words(first, second)) for first, second in _pairs(rest, _level)),
    )


def _pairs(
    met: Sequence[Met], identities: Callable[[Met], tuple[_Identity, _Identity]]
) -> Iterator[tuple[Met, Met]]:
    waiting: dict[tuple[_Identity, _Identity], deque[Met]] = defaultdict(deque)
    for one in met:
        planned, received = identities(one)
        if planned == received:
            continue
        partners = waiting[received, planned]
        if partners:
            yield partners.popleft(), one
        else:
            waiting[planned, received].append(one)


def _whole(met: Met) -> tuple[_Identity, _Identity]:
    received = met.received
    return (met.planned.level, _shown_label(met)), (received.level, received.item)


def _level(met: Met) -> tuple[_Identity, _Identity]:
    return (met.planned.level, None), (met.received.level, None)


def _shown_label(met: Met) -> str | None:
    """The planned label, where the data have labels to compare it with."""
    return None if met.received.item is None else met.planned.item


def _both_words(first: Met, second: Met) -> str:
    one, other = first.planned, second.planned
    if one.level == other.level:
        return f"{one.item} and {other.item} exchanged, both of {one.level}"
    words = (level_and_label(met.planned.level, _shown_label(met)) for met in (first, second))
    return f"{' and '.join(words)} exchanged"


def _level_words(first: Met, second: Met) -> str:
    labels = "" if first.received.item is None else ", the labels as planned"
    return f"{first.planned.level} and {second.planned.level} exchanged{labels}"


def _exchange(first: Met, second: Met, words: str) -> Exchange:
    return Exchange(first, second, f"positions {first.position} and {second.position}: {words}")
