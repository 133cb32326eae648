"""Bytes to a tree of nodes in which every scalar is still the text that was typed.

A small, safe part of YAML: one document of mappings, lists and scalars, in block or flow style. Nothing is
resolved, so `1.50` stays `1.50`, `no` stays `no` and `012` stays `012`. What could make a text mean
something that it does not show - anchors, aliases, tags, merge keys, equal keys - is refused, and so is what
would be dear to read.
"""

import re
from collections.abc import Iterator
from typing import Any

import yaml

from assayfolio.errors import Place
from assayfolio.study.faults import Faults, shown
from assayfolio.study.nodes import Entry, MappingNode, Node, RefusedNode, ScalarNode, SequenceNode
from assayfolio.study.source import decode

MAX_DEPTH = 32
MAX_VALUES = 10_000

_PARSER: Any = getattr(yaml, "CSafeLoader", yaml.SafeLoader)


def compose(content: bytes, faults: Faults) -> Node | None:
    """The tree of the one document in `content`, or None where nothing could be read.

    Whatever is refused goes to `faults` with its place: see `source.decode` for text, then YAML syntax
    errors, more than one document, directives, more than 32 levels or 10,000 values, equal keys, keys that
    are no text, anchors, aliases, tags and merge keys. Where one of the last five is met, the rest is still
    read, so that all faults show in one pass.
    """
    text = decode(content, faults)
    if text is None:
        return None
    try:
        return _Composer(text, faults).document()
    except _StoppedError:
        return None
    except (yaml.YAMLError, ValueError, OverflowError) as error:
        from assayfolio.study.syntax import in_plain_words  # its tables are needed only here

        fault = in_plain_words(error)
        faults.add(_End(text).place(faults.file, fault.line, fault.column), fault.found, fault.advice)
        return None


class _End:
    """The end of a text. A parser may put what it misses on a line behind it; here it is put at the end."""

    def __init__(self, text: str) -> None:
        lines = re.split(r"\r\n|\r|\n", text)
        self._line, self._column = len(lines), len(lines[-1]) + 1

    def place(self, file: str, line: int, column: int) -> Place:
        """The place given, or the end of the text if that comes first."""
        return Place(file, line, column) if line <= self._line else Place(file, self._line, self._column)


class _StoppedError(Exception):
    """Reading stops here; the reason has been reported."""


class _Composer:
    """Builds nodes from the events of a parser, one event at a time."""

    def __init__(self, text: str, faults: Faults) -> None:
        self._events: Iterator[Any] = yaml.parse(text, Loader=_PARSER)
        self._end = _End(text)
        self._faults = faults
        self._depth = 0
        self._values = 0

    def document(self) -> Node:
        """The only document."""
        next(self._events)  # the start of the stream
        event = next(self._events)
        if isinstance(event, yaml.StreamEndEvent):
            self._faults.add(Place(self._faults.file, 1, 1), "the file is empty", "write the compulsory keys")
            raise _StoppedError
        node = self._node(next(self._events))
        next(self._events)  # the end of the document
        event = next(self._events)
        if not isinstance(event, yaml.StreamEndEvent):
            self._stop(event, "a second document begins here", "keep one document a file, without `---`")
        return node

    def _node(self, event: Any) -> Node:
        self._count(event)
        place = self._place(event)
        if isinstance(event, yaml.AliasEvent):
            self._faults.add(place, f"an alias ({shown(f'*{event.anchor}')}) is not allowed", _WRITE_OUT)
            return RefusedNode(place)
        if event.anchor is not None:
            self._faults.add(place, f"an anchor ({shown(f'&{event.anchor}')}) is not allowed", _WRITE_OUT)
        if event.tag is not None:
            tag = shown(event.tag.replace("tag:yaml.org,2002:", "!!", 1))
            self._faults.add(place, f"a tag ({tag}) is not allowed", "delete the tag")
        if isinstance(event, yaml.ScalarEvent):
            return _scalar(event, place)
        self._depth += 1
        if self._depth > MAX_DEPTH:
            self._stop(event, f"values are nested more than {MAX_DEPTH} deep", "write it flatter")
        node = self._sequence(place) if isinstance(event, yaml.SequenceStartEvent) else self._mapping(place)
        self._depth -= 1
        return node

    def _sequence(self, place: Place) -> SequenceNode:
        items: list[Node] = []
        while not isinstance(event := next(self._events), yaml.SequenceEndEvent):
            items.append(self._node(event))
        return SequenceNode(tuple(items), place)

    def _mapping(self, place: Place) -> MappingNode:
        entries: dict[str, Entry] = {}
        while not isinstance(event := next(self._events), yaml.MappingEndEvent):
            key = self._node(event)
            value = self._node(next(self._events))
            if not isinstance(key, ScalarNode):
                if not isinstance(key, RefusedNode):
                    self._faults.add(key.place, "a list or mapping cannot be a key", "write a word as key")
            elif key.plain and key.text == "<<":
                self._faults.add(key.place, "a merge key (`<<`) is not allowed", _WRITE_OUT)
            elif key.empty:
                self._faults.add(key.place, "a key is missing before the colon", "write the key")
            elif key.text in entries:
                line = entries[key.text].key.place.line
                found = f"the key {shown(key.text)} stands here a second time"
                self._faults.add(key.place, found, f"the first is on line {line}; keep one of them")
            else:
                entries[key.text] = Entry(key, value)
        return MappingNode(tuple(entries.values()), place)

    def _count(self, event: Any) -> None:
        self._values += 1
        if self._values > MAX_VALUES:
            self._stop(event, f"the file holds more than {MAX_VALUES} values", "is it the right file?")

    def _place(self, event: Any) -> Place:
        mark = event.start_mark
        return self._end.place(self._faults.file, mark.line + 1, mark.column + 1)

    def _stop(self, event: Any, found: str, advice: str) -> None:
        self._faults.add(self._place(event), found, advice)
        raise _StoppedError


_WRITE_OUT = "write the values out"


def _scalar(event: Any, place: Place) -> ScalarNode:
    # The line break that ends a text written with `|` or `>` is part of the notation, not of the text.
    text: str = event.value.rstrip("\n") if event.style in {"|", ">"} else event.value
    one_line = event.start_mark.line == event.end_mark.line
    width = event.end_mark.column - event.start_mark.column if one_line else None
    return ScalarNode(text, place, not event.style, width)
