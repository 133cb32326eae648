"""Choosing entries of the audit trail by who, what, when, why and study."""

import re
from collections.abc import Iterable
from dataclasses import dataclass

from assayfolio.canonical import canonical_bytes
from assayfolio.errors import InputError
from assayfolio.evidence.entries import TrailEntry
from assayfolio.evidence.stamps import own_details, person_of, roles_of

_MOMENT = re.compile(r"\d{4}(-\d\d(-\d\d(T\d\d(:\d\d(:\d\d(\.\d{1,6})?)?)?)?)?)?Z?", re.ASCII)


@dataclass(frozen=True, slots=True)
class Period:
    """From one moment to another, both included, in UTC; an empty text leaves that side open.

    A moment may be cut short: "2026-03" as the end is the whole of March.
    """

    first: str = ""
    last: str = ""

    def holds(self, time: str) -> bool:
        """Whether an entry of this time lies within."""
        return time[: len(self.first)] >= self.first and time[: len(self.last)] <= self.last


def parse_period(text: str) -> Period:
    """The period that is written as FROM..TO, FROM.., ..TO, or as one day, hour or minute.

    Raises InputError for anything else.
    """
    first, dots, last = text.partition("..")
    sides = [
        side.strip().replace(" ", "T").removesuffix("Z") for side in ((first, last) if dots else (text, text))
    ]
    if not any(sides) or not all(not side or _MOMENT.fullmatch(side) for side in sides):
        raise InputError(
            f"{text!r} is no period; write FROM..TO in UTC, such as 2026-03-01..2026-03-31 or "
            "2026-03-02T08:00..2026-03-02T17:30; one side may be left out."
        )
    if sides[0] and sides[1] and sides[0][: len(sides[1])] > sides[1][: len(sides[0])]:
        raise InputError(f"{text!r} ends before it begins.")
    return Period(*sides)


@dataclass(frozen=True, slots=True)
class TrailFilter:
    """What an entry must have; None asks for nothing. Texts may stand anywhere and in any case.

    `who`: account, person or role. `what`: action, subject or details. `why`: reason, or the outcome of a
    review. `study`: the study of the subject or of the details, exactly.
    """

    who: str | None = None
    what: str | None = None
    when: Period | None = None
    why: str | None = None
    study: str | None = None

    def chosen(self, entries: Iterable[TrailEntry]) -> tuple[TrailEntry, ...]:
        """The entries that have it all, in their order."""
        return tuple(entry for entry in entries if self.holds(entry))

    def holds(self, entry: TrailEntry) -> bool:
        """Whether `entry` has it all."""
        return (
            (self.when is None or self.when.holds(entry.time))
            and (self.study is None or self.study in studies_of(entry))
            and _within(self.who, (entry.actor, person_of(entry) or "", *roles_of(entry)))
            and _within(self.why, (entry.reason or "", _text(entry, "outcome")))
            and (self.what is None or _within(self.what, _event_texts(entry)))
        )

    @property
    def chooses_all(self) -> bool:
        """Whether nothing is asked for."""
        return self == TrailFilter()


def studies_of(entry: TrailEntry) -> frozenset[str]:
    """The studies that an entry is about, by its subject and its details."""
    named = (entry.subject, _text(entry, "study"), _text(entry, "run"))
    return frozenset(name.partition("/")[0] for name in named if name)


def _event_texts(entry: TrailEntry) -> tuple[str, ...]:
    return entry.action, entry.subject, canonical_bytes(own_details(entry)).decode("utf-8")


def _text(entry: TrailEntry, key: str) -> str:
    value = entry.details.get(key)
    return value if isinstance(value, str) else ""


def _within(wanted: str | None, texts: Iterable[str]) -> bool:
    if wanted is None:
        return True
    folded = wanted.casefold()
    return any(folded in text.casefold() for text in texts)
