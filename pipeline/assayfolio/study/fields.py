"""Typed values from nodes: the keys of a mapping, and readers for single values.

A reader takes a `Value` and gives what it means, or reports why it cannot and gives None.
"""

import re
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from fractions import Fraction
from typing import TypeAlias, TypeVar

from assayfolio.characters import describe, is_settable
from assayfolio.errors import Place
from assayfolio.exact import MAX_DIGITS, NotADecimalError, parse_decimal
from assayfolio.study.faults import Faults, listed, shown
from assayfolio.study.nodes import MappingNode, Node, RefusedNode, ScalarNode, SequenceNode
from assayfolio.study.suggestions import nearest
from assayfolio.study.vocabulary import LONGEST_LABEL

T = TypeVar("T")
D = TypeVar("D")


@dataclass(frozen=True, slots=True)
class Value:
    """A node under its name for people, such as `data.levels`."""

    node: Node
    name: str
    faults: Faults

    def refuse(self, found: str, expected: str, place: Place | None = None) -> None:
        """Report that `name` `found`, where `expected` was expected."""
        self.faults.add(place or self.node.place, f"`{self.name}` {found}", f"expected {expected}")

    def items(self) -> "Iterator[Value]":
        """The items of a sequence, each under the name of the whole; nothing where it is no sequence."""
        if isinstance(self.node, SequenceNode):
            for item in self.node.items:
                yield Value(item, self.name, self.faults)


Reader: TypeAlias = Callable[[Value], T | None]


class Fields:
    """The keys of one mapping. Unknown keys are reported at once, missing ones when they are asked for."""

    def __init__(self, node: MappingNode, name: str, known: tuple[str, ...], faults: Faults) -> None:
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
    def of(value: Value, known: tuple[str, ...]) -> "Fields | None":
        """The fields of `value`, or None (and a report) where it is no mapping."""
        if isinstance(value.node, MappingNode):
            return Fields(value.node, value.name, known, value.faults)
        if not isinstance(value.node, RefusedNode):
            value.refuse(_kind(value.node), f"a mapping with the keys {listed(known, 'and')}")
        return None

    def _refuse_key(self, key: ScalarNode, known: tuple[str, ...]) -> None:
        near = nearest(key.text, [word for word in known if word not in self._values])
        advice = f"did you mean `{near}`?" if near else f"known here: {', '.join(known)}"
        where = f"in `{self._name}`" if self._name else "here"
        self.faults.add(key.place, f"the key {shown(key.text)} is not known {where}", advice)

    def __contains__(self, key: str) -> bool:
        return key in self._values

    def named(self, key: str) -> str:
        """`key` as people find it: under the keys that enclose it."""
        return f"{self._name}.{key}" if self._name else key

    def value(self, key: str) -> Value | None:
        """The value under `key`, or None where it is absent."""
        node = self._values.get(key)
        return None if node is None else Value(node, self.named(key), self.faults)

    def place_of(self, key: str) -> Place:
        """Where the key stands, or the mapping where it is absent."""
        return self._places.get(key, self.place)

    def places(self) -> tuple[tuple[str, Place], ...]:
        """Every key that is present, as people find it, with its place."""
        return tuple((self.named(key), place) for key, place in self._places.items())

    def unreadable(self, key: str) -> bool:
        """Whether the value under `key` was asked for and could not be read."""
        return key in self._unreadable

    def required(self, key: str, reader: Reader[T]) -> T | None:
        """What stands under `key`; its absence is reported at the mapping that should hold it."""
        value = self.value(key)
        if value is None:
            self._unreadable.add(key)
            self.faults.add(self.place, f"the key `{self.named(key)}` is missing", f"add `{key}: ...`")
            return None
        return self._read(key, value, reader)

    def optional(self, key: str, reader: Reader[T], default: D) -> T | D:
        """What stands under `key`; `default` where it is absent, and also where it cannot be read."""
        value = self.value(key)
        read = None if value is None else self._read(key, value, reader)
        return default if read is None else read

    def _read(self, key: str, value: Value, reader: Reader[T]) -> T | None:
        read = reader(value)
        if read is None:
            self._unreadable.add(key)
        return read


def _kind(node: Node) -> str:
    if isinstance(node, ScalarNode):
        return "is empty" if node.empty else f"is {shown(node.text)}"
    return "is a list" if isinstance(node, SequenceNode) else "is a mapping"


def scalar(value: Value, expected: str) -> ScalarNode | None:
    """The scalar node, or None (and a report) for a list, a mapping or nothing."""
    node = value.node
    if isinstance(node, ScalarNode) and not node.empty:
        return node
    if not isinstance(node, RefusedNode):
        value.refuse(_kind(node), expected)
    return None


def choice(options: tuple[T, ...]) -> Reader[T]:
    """One of some fixed words."""
    words = tuple(str(option) for option in options)
    expected = listed(words)

    def read(value: Value) -> T | None:
        node = scalar(value, expected)
        if node is None:
            return None
        if node.text in words:
            return options[words.index(node.text)]
        near = nearest(node.text, words)
        value.refuse(f"is {shown(node.text)}", f"{expected}; did you mean `{near}`?" if near else expected)
        return None

    return read


def line_of_text(longest: int) -> Reader[str]:
    """One line of at most `longest` characters that the report's font can set, without outer blanks."""
    expected = f"one line of text of at most {longest} characters"

    def read(value: Value) -> str | None:
        node = scalar(value, expected)
        return node.text if node is not None and _is_good_line(value, node, longest, expected) else None

    return read


def _is_good_line(value: Value, node: ScalarNode, longest: int, expected: str) -> bool:
    text = node.text
    if "\n" in text or "\r" in text:
        value.refuse("has more than one line", expected)
    elif len(text) > longest:
        value.refuse(f"has {len(text)} characters", expected)
    elif text != text.strip():
        value.refuse(f"is {shown(text)}, with a blank at an end", "the text without outer blanks")
    else:
        return _is_settable(value, node)
    return False


def _is_settable(value: Value, node: ScalarNode) -> bool:
    strange = [index for index, c in enumerate(node.text) if c != "\n" and not is_settable(c)]
    if not strange:
        return True
    names = list(dict.fromkeys(describe(node.text[index]) for index in strange))
    more = f" and {len(names) - 3} more" if len(names) > 3 else ""
    value.faults.add(
        node.place_of_character(strange[0]),
        f"`{value.name}` holds {', '.join(names[:3])}{more}, which the report's font cannot set",
        "write it with other characters",
    )
    return False


label = line_of_text(LONGEST_LABEL)


def paragraphs(longest: int) -> Reader[str]:
    """Text of one or more lines, of at most `longest` characters that the report's font can set."""
    expected = f"text of at most {longest} characters"

    def read(value: Value) -> str | None:
        node = scalar(value, expected)
        if node is None:
            return None
        if not node.text.strip():
            value.refuse("is blank", expected)
        elif len(node.text) > longest:
            value.refuse(f"has {len(node.text)} characters", expected)
        elif _is_settable(value, node):
            return node.text
        return None

    return read


_FRACTION = re.compile(r"([+-]?[0-9]+)/([0-9]+)", re.ASCII)


class _NotANumberError(ValueError):
    """The text spells no exact number; the message says why."""


def exact_number(text: str) -> Fraction:
    """The number that `text` spells, exactly: a decimal (`0.05`, `1e-3`) or a fraction (`-1/2`).

    Raises ValueError, saying why, for anything else.
    """
    match = _FRACTION.fullmatch(text)
    try:
        if match is None:
            return parse_decimal(text).fraction
    except NotADecimalError as error:
        raise _NotANumberError(str(error)) from error
    if max(len(match[1].lstrip("+-")), len(match[2])) > MAX_DIGITS:
        raise _NotANumberError(f"more than {MAX_DIGITS} digits")
    if int(match[2]) == 0:
        raise _NotANumberError("a division by zero")
    return Fraction(int(match[1]), int(match[2]))


def number(expected: str, fits: Callable[[Fraction], bool]) -> Reader[Fraction]:
    """An exact number for which `fits` holds; `expected` says so in words."""

    def read(value: Value) -> Fraction | None:
        node = scalar(value, expected)
        if node is None:
            return None
        try:
            exact = exact_number(node.text)
        except ValueError as error:
            value.refuse(f"is {shown(node.text)}, {error}", expected)
            return None
        if not fits(exact):
            value.refuse(f"is {shown(node.text)}", expected)
            return None
        return exact

    return read


probability = number("a number above 0 and below 1, such as 0.05", lambda x: 0 < x < 1)
positive = number("a number above 0", lambda x: x > 0)
any_number = number("a number, such as -0.25 or 1/3", lambda _: True)


def whole_number(least: int, most: int) -> Reader[int]:
    """A whole number from `least` to `most`, written with digits alone."""
    expected = f"a whole number from {least} to {most}"

    def read(value: Value) -> int | None:
        node = scalar(value, expected)
        if node is None:
            return None
        digits = node.text.isascii() and node.text.isdigit() and len(node.text) <= len(str(most))
        if digits and least <= int(node.text) <= most:
            return int(node.text)
        value.refuse(f"is {shown(node.text)}", expected)
        return None

    return read


def truth(value: Value) -> bool | None:
    """`true` or `false`."""
    node = scalar(value, "true or false")
    if node is None:
        return None
    if node.text in {"true", "True", "TRUE", "false", "False", "FALSE"}:
        return node.text.lower() == "true"
    value.refuse(f"is {shown(node.text)}", "true or false")
    return None


def list_of(reader: Reader[T], expected: str) -> Reader[tuple[T, ...]]:
    """A list of at least one item, or None if any item cannot be read."""

    def read(value: Value) -> tuple[T, ...] | None:
        if not isinstance(value.node, SequenceNode):
            if not isinstance(value.node, RefusedNode):
                value.refuse(_kind(value.node), expected)
            return None
        if not value.node.items:
            value.refuse("is an empty list", f"{expected}, or leave the key out")
            return None
        items = [reader(item) for item in value.items()]
        good = tuple(item for item in items if item is not None)
        return good if len(good) == len(items) else None

    return read


def distinct(reader: Reader[tuple[str, ...]]) -> Reader[tuple[str, ...]]:
    """A list of texts of which none stands there twice."""

    def read(value: Value) -> tuple[str, ...] | None:
        texts = reader(value)
        return texts if texts is not None and refuse_repeats(value, list(value.items())) else None

    return read


def refuse_repeats(value: Value, scalars: list[Value]) -> bool:
    """Whether the texts of `scalars` all differ; each repeat is reported under the name of `value`."""
    first: dict[str, Place] = {}
    before = len(value.faults)
    for node in (item.node for item in scalars):
        if not isinstance(node, ScalarNode) or node.empty:
            continue
        if node.text in first:
            found = f"holds {shown(node.text)} twice"
            value.refuse(found, f"each once (first on line {first[node.text].line})", node.place)
        first.setdefault(node.text, node.place)
    return len(value.faults) == before


def refuse_repeats_of(value: Value, key: str) -> None:
    """Report each mapping in the list `value` whose text under `key` stood in an earlier one."""
    found = [item.node.entry(key) for item in value.items() if isinstance(item.node, MappingNode)]
    name = f"{value.name}.{key}"
    scalars = [Value(entry.value, name, value.faults) for entry in found if entry is not None]
    refuse_repeats(Value(value.node, name, value.faults), scalars)
