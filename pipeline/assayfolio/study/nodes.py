"""The tree of a settings document: mappings, sequences and scalars, each scalar the text that was typed."""

from dataclasses import dataclass

from assayfolio.errors import Place


@dataclass(frozen=True, slots=True)
class ScalarNode:
    """One scalar as text; `plain` if it stood without quotation marks, `width` as typed if on one line."""

    text: str
    place: Place
    plain: bool
    width: int | None

    @property
    def empty(self) -> bool:
        """Whether nothing was written: no text at all, or an unquoted `~` or `null`."""
        return not self.text or (self.plain and self.text in {"~", "null", "Null", "NULL"})

    def place_of_character(self, index: int) -> Place:
        """Where the character with this index stands; the start of the scalar where that cannot be told."""
        quotes = (self.width or 0) - len(self.text)
        line, column = self.place.line, self.place.column
        if quotes not in {0, 2} or line is None or column is None:
            return self.place
        return Place(self.place.file, line, column + quotes // 2 + index)


@dataclass(frozen=True, slots=True)
class SequenceNode:
    """A list of nodes."""

    items: "tuple[Node, ...]"
    place: Place


@dataclass(frozen=True, slots=True)
class Entry:
    """One key of a mapping with its value."""

    key: ScalarNode
    value: "Node"


@dataclass(frozen=True, slots=True)
class MappingNode:
    """Keys with values, in the order of the file; no key twice."""

    entries: tuple[Entry, ...]
    place: Place

    def entry(self, key: str) -> Entry | None:
        """The entry under `key`, or None."""
        return next((entry for entry in self.entries if entry.key.text == key), None)


@dataclass(frozen=True, slots=True)
class RefusedNode:
    """Something that was refused while reading and already reported: readers pass it by in silence."""

    place: Place


Node = ScalarNode | SequenceNode | MappingNode | RefusedNode
