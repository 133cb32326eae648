"""Gathering the faults of one file, and naming what was found in words that are safe to print."""

from assayfolio.errors import Fault, Place, StudyError

LISTED_FAULTS = 100
_SHOWN_CHARACTERS = 60


class Faults:
    """The faults of one file, gathered in one pass and raised together."""

    def __init__(self, file: str) -> None:
        self.file = file
        self._faults: list[Fault] = []
        self._unlisted = 0

    def __len__(self) -> int:
        return len(self._faults) + self._unlisted

    @property
    def full(self) -> bool:
        """Whether there are more faults than are listed, so that care in wording is wasted."""
        return len(self) >= LISTED_FAULTS

    def add(self, place: Place, found: str, advice: str) -> None:
        """Remember one fault."""
        self._faults.append(Fault(place, found, advice))

    def add_unlisted(self, count: int) -> None:
        """Count faults that stand beyond what is listed."""
        self._unlisted += count

    def raise_if_any(self, subject: str) -> None:
        """Raise StudyError with all faults in the order of the file, if there are any.

        `subject` names what cannot be used. The first 100 are listed, the rest are counted.
        """
        if not self._faults:
            return
        ordered = sorted(self._faults, key=lambda fault: (fault.place.line or 0, fault.place.column or 0))
        count = "1 fault" if len(self) == 1 else f"{len(self)} faults"
        raise StudyError(
            f"{self.file}: {subject} cannot be used ({count}); nothing was analysed",
            tuple(ordered[:LISTED_FAULTS]),
            len(self) - len(ordered[:LISTED_FAULTS]),
        )


def shown(text: str) -> str:
    """`text` between back quotes, cut to 60 characters, with what cannot be seen written as its number."""
    cut = text if len(text) <= _SHOWN_CHARACTERS else text[: _SHOWN_CHARACTERS - 3] + "..."
    return "`" + "".join(c if c.isprintable() else f"<U+{ord(c):04X}>" for c in cut) + "`"


def listed(words: tuple[str, ...], last: str = "or") -> str:
    """`a, b or c`."""
    return words[0] if len(words) == 1 else f"{', '.join(words[:-1])} {last} {words[-1]}"
