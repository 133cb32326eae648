"""Levels and responses by name, and what the rest of a definition says that its sections depend on."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from assayfolio.study.faults import shown
from assayfolio.study.fields import Reader, T, Value, each, label
from assayfolio.study.nodes import MappingNode
from assayfolio.study.suggestions import nearest

_NAMED = 3


@dataclass(frozen=True, slots=True)
class Surroundings:
    """What `data` says that other sections depend on; None where it could not be read.

    `levels` is empty where none are declared; `units` gives the unit of each response, or None; `replicates`
    is None also where no numbers of values are planned. `columns` gives each column that `data` names for a
    purpose of its own with the key that does.
    """

    levels: tuple[str, ...] | None
    responses: tuple[str, ...] | None
    units: Mapping[str, str | None] | None
    replicates: int | tuple[tuple[str, int], ...] | None
    columns: Mapping[str, str]

    @property
    def declared(self) -> tuple[str, ...] | None:
        """The declared levels, or None where any level may be named."""
        return self.levels or None

    @property
    def several_responses(self) -> bool:
        """Whether the study is known to have more than one response."""
        return len(self.responses or ()) > 1


def level_in(surroundings: Surroundings) -> Reader[str]:
    """A reader for a level by name; where levels are declared it must be one of them."""
    return lambda value: level_of(value, surroundings.declared)


def response_in(surroundings: Surroundings) -> Reader[str]:
    """A reader for one of the responses of the study."""
    return lambda value: response_of(value, surroundings.responses)


def level_of(value: Value, levels: tuple[str, ...] | None) -> str:
    """A level by name; where `levels` are declared it must be one of them."""
    return _one_of(value, levels, "names the level {}, which is not declared", "`data.levels`")


def response_of(value: Value, responses: tuple[str, ...] | None) -> str:
    """A response by name; where `responses` are known it must be one of them."""
    return _one_of(value, responses, "names {}, which is no response of the study", "`data.response`")


def _one_of(value: Value, known: tuple[str, ...] | None, found: str, source: str) -> str:
    name = label(value)
    if known is None or name in known:
        return name
    near = None if value.faults.full else nearest(name, known)
    expected = f"one of {source}" + (f"; did you mean {shown(near)}?" if near else "")
    raise value.unreadable(found.format(shown(name)), expected)


def by_name(
    value: Value, node: MappingNode, key_reader: Reader[str], reader: Reader[T]
) -> tuple[tuple[str, T], ...]:
    """The names that are the keys of a mapping, each with what stands under it."""
    keys = [Value(entry.key, value.name, value.faults) for entry in node.entries]
    values = [Value(entry.value, value.name, value.faults) for entry in node.entries]
    names = each(key_reader, keys)
    return tuple(zip(names, each(reader, values), strict=True))


def report_absent(
    value: Value, node: MappingNode, wanted: tuple[str, ...] | None, what: str, expected: str
) -> None:
    """Report the names of `wanted` under which the mapping gives no `what`."""
    absent = [name for name in wanted or () if node.entry(name) is None]
    if absent:
        value.report(f"gives no {what} for {few(absent)}", expected)


def few(names: Iterable[str]) -> str:
    """The first three of `names` between back quotes, and how many more there are."""
    listed = list(names)
    more = f" and {len(listed) - _NAMED} more" if len(listed) > _NAMED else ""
    return ", ".join(shown(name) for name in listed[:_NAMED]) + more
