"""Typed values from nodes: the keys of a mapping, and readers for single values.

A reader takes a `Value` and gives what it means, or reports why it cannot and raises UnreadableError.
"""

import re
from collections.abc import Callable, Iterable
from dataclasses import dataclass
from typing import TypeAlias, TypeVar

from assayfolio.characters import describe, is_settable
from assayfolio.errors import Place
from assayfolio.study.faults import Faults, listed, shown
from assayfolio.study.nodes import MappingNode, Node, RefusedNode, ScalarNode, SequenceNode
from assayfolio.study.suggestions import nearest
from assayfolio.study.vocabulary import LONGEST_LABEL

T = TypeVar("T")


class UnreadableError(Exception):
    """A value cannot be read; why has been reported already. Never leaves this package."""


@dataclass(frozen=True, slots=True)
class Value:
    """A node under its name for people, such as `data.levels`."""

    node: Node
    name: str
    faults: Faults

    def report(self, found: str, expected: str) -> None:
        """Report that `name` `found`, where `expected` was expected."""
        self.faults.add(self.node.place, f"`{self.name}` {found}", f"expected {expected}")

    def unreadable(self, found: str, expected: str) -> UnreadableError:
        """Report the same, and give the error to raise."""
        self.report(found, expected)
        return UnreadableError()

    def wrong_kind(self, expected: str) -> UnreadableError:
        """Report what kind of node this is, unless it was refused before, and give the error to raise."""
        if isinstance(self.node, RefusedNode):
            return UnreadableError()
        return self.unreadable(_kind(self.node), expected)

    def items(self) -> "tuple[Value, ...]":
        """The items of a sequence, each under the name of the whole; none where it is no sequence."""
        nodes = self.node.items if isinstance(self.node, SequenceNode) else ()
        return tuple(Value(node, self.name, self.faults) for node in nodes)

    def under(self, key: str) -> "tuple[Value, ...]":
        """What stands under `key` in each mapping among the items of a sequence."""
        mappings = (item.node for item in self.items() if isinstance(item.node, MappingNode))
        entries = (mapping.entry(key) for mapping in mappings)
        name = f"{self.name}.{key}"
        return tuple(Value(entry.value, name, self.faults) for entry in entries if entry is not None)


Reader: TypeAlias = Callable[[Value], T]


class Fields:
    """The keys of one mapping. Unknown keys are reported at once, missing ones when they are asked for."""

    def __init__(self, node: MappingNode, name: str, known: tuple[str, ...], faults: Faults) -> None:
        self.node = node
        self.place = node.place
        self.faults = faults
        self._name = name
        self._values = {entry.key.text: entry.value for entry in node.entries}
        self._places = {entry.key.text: entry.key.place for entry in node.entries}
        self._unreadable: set[str] = set()
        for entry in node.entries:
            if entry.key.text not in known:
                self._refuse_key(entry.key, known)

    @staticmethod
    def of(value: Value, known: tuple[str, ...]) -> "Fields":
        """The fields of `value`. Raises UnreadableError, after a report, where it is no mapping."""
        if not isinstance(value.node, MappingNode):
            raise value.wrong_kind(f"a mapping with the keys {listed(known, 'and')}")
        return Fields(value.node, value.name, known, value.faults)

    def _refuse_key(self, key: ScalarNode, known: tuple[str, ...]) -> None:
        open_keys = [word for word in known if word not in self._values]
        near = None if self.faults.full else nearest(key.text, open_keys)
        if near:
            self._unreadable.add(near)  # it is misspelt, not missing
        advice = f"did you mean `{near}`?" if near else f"known here: {', '.join(known)}"
        where = f"in `{self._name}`" if self._name else "here"
        self.faults.add(key.place, f"the key {shown(key.text)} is not known {where}", advice)

    def __contains__(self, key: str) -> bool:
        return key in self._values

    @property
    def keys(self) -> frozenset[str]:
        """The keys that are present."""
        return frozenset(self._values)

    def named(self, key: str) -> str:
        """`key` as people find it: under the keys that enclose it."""
        return f"{self._name}.{key}" if self._name else key

    def value(self, key: str) -> Value | None:
        """The value under `key`, or None where it is absent."""
        node = self._values.get(key)
        return None if node is None else Value(node, self.named(key), self.faults)

    def text(self, key: str) -> str | None:
        """The text under `key`, whatever it means; None where it is absent or no scalar."""
        node = self._values.get(key)
        return node.text if isinstance(node, ScalarNode) else None

    def place_of(self, key: str) -> Place:
        """Where the key stands, or the mapping where it is absent."""
        return self._places.get(key, self.place)

    def places(self) -> tuple[tuple[str, Place], ...]:
        """Every key that is present, as people find it, with its place."""
        return tuple((self.named(key), place) for key, place in self._places.items())

    def unreadable(self, key: str) -> bool:
        """Whether `key` was evidently meant, but is misspelt or its value could not be read."""
        return key in self._unreadable

    def absent(self, keys: Iterable[str]) -> frozenset[str]:
        """Those of `keys` that are evidently left out: neither present nor misspelt."""
        return frozenset(key for key in keys if key not in self._values and key not in self._unreadable)

    def required(self, key: str, reader: Reader[T]) -> T | None:
        """What stands under `key`; its absence is reported at the mapping that should hold it."""
        value = self.value(key)
        if value is not None:
            return self._read(key, value, reader)
        if key not in self._unreadable:
            self._unreadable.add(key)
            self.faults.add(self.place, f"the key `{self.named(key)}` is missing", f"add `{key}: ...`")
        return None

    def optional(self, key: str, reader: Reader[T]) -> T | None:
        """What stands under `key`; None where it is absent or cannot be read."""
        value = self.value(key)
        return None if value is None else self._read(key, value, reader)

    def _read(self, key: str, value: Value, reader: Reader[T]) -> T | None:
        try:
            return reader(value)
        except UnreadableError:
            self._unreadable.add(key)
            return None


def mapping_of(known: tuple[str, ...]) -> Reader[Fields]:
    """The fields of a mapping that has these keys."""
    return lambda value: Fields.of(value, known)


def _kind(node: Node) -> str:
    if isinstance(node, ScalarNode):
        return "is empty" if node.empty else f"is {shown(node.text)}"
    return "is a list" if isinstance(node, SequenceNode) else "is a mapping"


def scalar(value: Value, expected: str) -> ScalarNode:
    """The scalar node. Raises UnreadableError, after a report, for a list, a mapping or nothing."""
    if isinstance(value.node, ScalarNode) and not value.node.empty:
        return value.node
    raise value.wrong_kind(expected)


def choice(options: tuple[T, ...]) -> Reader[T]:
    """One of some fixed words."""
    words = tuple(str(option) for option in options)
    expected = listed(words)

    def read(value: Value) -> T:
        text = scalar(value, expected).text
        if text in words:
            return options[words.index(text)]
        near = nearest(text, words)
        hint = f"; did you mean `{near}`?" if near and len(words) > 1 else ""
        raise value.unreadable(f"is {shown(text)}", expected + hint)

    return read


def matching(pattern: re.Pattern[str], expected: str) -> Reader[str]:
    """Text that matches `pattern` from end to end."""

    def read(value: Value) -> str:
        text = scalar(value, expected).text
        if not pattern.fullmatch(text):
            raise value.unreadable(f"is {shown(text)}", expected)
        return text

    return read


def line_of_text(longest: int) -> Reader[str]:
    """One line of at most `longest` characters that the report's font can set, without outer blanks."""
    expected = f"one line of text of at most {longest} characters"

    def read(value: Value) -> str:
        node = scalar(value, expected)
        text = node.text
        if "\n" in text or "\r" in text:
            raise value.unreadable("has more than one line", expected)
        if len(text) > longest:
            raise value.unreadable(f"has {len(text)} characters", expected)
        if text != text.strip():
            raise value.unreadable(f"is {shown(text)}, with a blank at an end", "text without outer blanks")
        _refuse_unsettable(value, node)
        return text

    return read


label = line_of_text(LONGEST_LABEL)


def paragraphs(longest: int) -> Reader[str]:
    """Text of one or more lines, of at most `longest` characters that the report's font can set."""
    expected = f"text of at most {longest} characters"

    def read(value: Value) -> str:
        node = scalar(value, expected)
        if not node.text.strip():
            raise value.unreadable("is blank", expected)
        if len(node.text) > longest:
            raise value.unreadable(f"has {len(node.text)} characters", expected)
        _refuse_unsettable(value, node)
        return node.text

    return read


def _refuse_unsettable(value: Value, node: ScalarNode) -> None:
    strange = [index for index, c in enumerate(node.text) if c != "\n" and not is_settable(c)]
    if not strange:
        return
    names = list(dict.fromkeys(describe(node.text[index]) for index in strange))
    more = f" and {len(names) - 3} more" if len(names) > 3 else ""
    found = f"`{value.name}` holds {', '.join(names[:3])}{more}, which the report's font cannot set"
    value.faults.add(node.place_of_character(strange[0]), found, "write it with other characters")
    raise UnreadableError


def truth(value: Value) -> bool:
    """`true` or `false`."""
    text = scalar(value, "true or false").text
    if text not in {"true", "True", "TRUE", "false", "False", "FALSE"}:
        raise value.unreadable(f"is {shown(text)}", "true or false")
    return text.lower() == "true"


def list_of(reader: Reader[T], expected: str) -> Reader[tuple[T, ...]]:
    """A list of at least one item. All items are read; one that cannot be read spoils the list."""

    def read(value: Value) -> tuple[T, ...]:
        if not isinstance(value.node, SequenceNode):
            raise value.wrong_kind(expected)
        if not value.node.items:
            raise value.unreadable("is an empty list", f"{expected}, or leave the key out")
        return each(reader, value.items())

    return read


def each(reader: Reader[T], values: Iterable[Value]) -> tuple[T, ...]:
    """What each of `values` means. All are read, so that all faults show, before one spoils the whole."""
    read: list[T] = []
    spoiled = False
    for value in values:
        try:
            read.append(reader(value))
        except UnreadableError:
            spoiled = True
    if spoiled:
        raise UnreadableError
    return tuple(read)


def one_or_more(reader: Reader[T], expected: str) -> Reader[tuple[T, ...]]:
    """One item as a scalar, or a list of different ones."""
    several = distinct(list_of(reader, expected))

    def read(value: Value) -> tuple[T, ...]:
        return (reader(value),) if isinstance(value.node, ScalarNode) else several(value)

    return read


def distinct(reader: Reader[tuple[T, ...]]) -> Reader[tuple[T, ...]]:
    """A list of scalars of which none stands there twice."""

    def read(value: Value) -> tuple[T, ...]:
        items = reader(value)
        if not report_repeats(value.items()):
            return items
        raise UnreadableError

    return read


def report_repeats(values: Iterable[Value]) -> bool:
    """Whether some text stands twice among the scalars of `values`; each repeat is reported."""
    first: dict[str, Place] = {}
    repeated = False
    for value in values:
        node = value.node
        if not isinstance(node, ScalarNode) or node.empty:
            continue
        if node.text in first:
            repeated = True
            value.report(
                f"holds {shown(node.text)} twice", f"each once; it stands on line {first[node.text].line}"
            )
        first.setdefault(node.text, node.place)
    return repeated
