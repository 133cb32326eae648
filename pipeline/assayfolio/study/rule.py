"""What a rule about a whole definition is, what it may ask of the definition, and where keys stand in it."""

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from fractions import Fraction
from typing import TypeAlias

from assayfolio.study.nodes import Entry, MappingNode, ScalarNode, SequenceNode
from assayfolio.study.vocabulary import Effects, Variances


@dataclass(frozen=True, slots=True)
class Outline:
    """What the rules ask of a whole definition; None where it could not be read, which breaks no rule.

    `levels` is empty where none are declared; `estimates` tells whether estimates of precision are planned.
    `absent` are the keys of `data` that are evidently left out, not misspelt.
    """

    root: MappingNode
    effects: Effects | None
    variances: Variances | None
    across_responses: str | None
    levels: tuple[str, ...] | None
    responses: tuple[str, ...] | None
    estimates: bool | None
    alpha: Fraction | None
    units: Mapping[str, str | None] | None
    absent: frozenset[str]

    @property
    def random(self) -> bool:
        """Whether the levels are a sample."""
        return self.effects == "random"

    @property
    def fixed(self) -> bool:
        """Whether the levels themselves are of interest."""
        return self.effects == "fixed"

    @property
    def pooled(self) -> bool:
        """Whether fixed levels share one variance."""
        return self.fixed and self.variances == "pooled"

    @property
    def separate(self) -> bool:
        """Whether each fixed level has its own variance; random levels rule that out, and are told alone."""
        return self.fixed and self.variances == "separate"


Broken: TypeAlias = Callable[[Outline, MappingNode], bool]


@dataclass(frozen=True, slots=True)
class Rule:
    """`key` may not hold one of `words` (no words: may not be there) where `broken` holds.

    `broken` is asked about the definition and the mapping in which the key stands. `why` continues the
    sentence that names key and word; `instead` is what to do.
    """

    key: str
    words: tuple[str, ...]
    broken: Broken
    why: str
    instead: str


def places(root: MappingNode, key: str) -> Iterator[tuple[MappingNode, Entry]]:
    """Each mapping that holds the last part of `key`, in the section that its first part names."""
    section, _, last = key.rpartition(".")
    for mapping in mappings(root, section) if section else (root,):
        entry = mapping.entry(last)
        if entry is not None:
            yield mapping, entry


def mappings(root: MappingNode, section: str) -> Iterator[MappingNode]:
    """The mapping under `section`, or each in the list there."""
    entry = root.entry(section)
    node = None if entry is None else entry.value
    for item in node.items if isinstance(node, SequenceNode) else (node,):
        if isinstance(item, MappingNode):
            yield item


def word_of(mapping: MappingNode, key: str) -> str | None:
    """The word under `key`, or None where there is none."""
    entry = mapping.entry(key)
    return entry.value.text if entry is not None and isinstance(entry.value, ScalarNode) else None
