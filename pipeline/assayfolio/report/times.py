"""What the times in a report rest on: this computer's clock, and who outside knows of them."""

from collections.abc import Mapping
from dataclasses import dataclass

_OUTSIDE: Mapping[str, str] = {
    "file": "each head of the audit trail goes to a file outside the workspace",
    "folder": "each head of the audit trail goes to a folder outside the workspace",
    "time-stamp": "the heads of the audit trail are stamped by a time-stamp authority",
}


@dataclass(frozen=True, slots=True)
class ClockFacts:
    """Whether a time source kept the clock (None: not known), and the kinds of the trail's witnesses."""

    synchronised: bool | None
    witnesses: tuple[str, ...]


def times_words(clock: ClockFacts) -> str:
    """By which clock the times are, and what stands beside it."""
    kept = {True: ", which a time source keeps", False: ", which no time source keeps", None: ""}
    outside = (_OUTSIDE[kind] for kind in dict.fromkeys(clock.witnesses))
    return "; ".join((f"by this computer’s clock{kept[clock.synchronised]}", *outside))
