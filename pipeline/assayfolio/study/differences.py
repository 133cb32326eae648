"""What differs between two plans, field by field: where, what it was, what it is."""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

from assayfolio.canonical import Json

# What tells the entries of a list of mappings apart, by the key of the list.
_IDENTITY: Mapping[str, tuple[str, ...]] = {
    "comparisons": ("name",),
    "contrasts": ("name",),
    "equivalence": ("name",),
    "criteria": ("quantity", "level", "response"),
    "sign-off": ("role",),
    "measurement": ("key",),
}
_LONGEST = 300


@dataclass(frozen=True, slots=True)
class Difference:
    """One field that differs: its dotted key, and its value in the earlier and the later plan.

    None where the one or the other has no such field.
    """

    key: str
    old: str | None
    new: str | None


def differences(old: Mapping[str, Json], new: Mapping[str, Json]) -> tuple[Difference, ...]:
    """Every field in which two plan documents differ, in the order of the later one; none where equal.

    Entries of a list that have a name are told apart by it; where all that differs is their order, the list
    itself is named.
    """
    return tuple(_of_mappings("", old, new))


def _of_mappings(prefix: str, old: Mapping[str, Json], new: Mapping[str, Json]) -> Iterator[Difference]:
    for key in dict.fromkeys((*new, *old)):
        yield from _of_values(f"{prefix}{key}", key, old.get(key), new.get(key))


def _of_values(path: str, key: str, old: Json, new: Json) -> Iterator[Difference]:
    if old == new and isinstance(old, bool) == isinstance(new, bool):
        return
    if isinstance(old, Mapping) and isinstance(new, Mapping):
        yield from _of_mappings(f"{path}.", old, new)
        return
    before, after = _entries(key, old), _entries(key, new)
    if before is None or after is None or not (before or after):
        yield Difference(path, _text(old), _text(new))
        return
    for name in dict.fromkeys((*after, *before)):
        yield from _of_entries(f"{path}.{name}", before.get(name), after.get(name))
    kept_before, kept_after = [n for n in before if n in after], [n for n in after if n in before]
    if kept_before != kept_after:
        yield Difference(f"{path} (order)", ", ".join(kept_before), ", ".join(kept_after))


def _of_entries(
    path: str, old: Mapping[str, Json] | None, new: Mapping[str, Json] | None
) -> Iterator[Difference]:
    if old is not None and new is not None:
        yield from _of_mappings(f"{path}.", old, new)
    else:
        yield Difference(path, _text(old), _text(new))


def _entries(key: str, value: Json) -> dict[str, Mapping[str, Json]] | None:
    """The entries of a list of mappings by name; None where it is none, or two bear the same name."""
    if key not in _IDENTITY or not isinstance(value, Sequence) or isinstance(value, str):
        return None
    named: dict[str, Mapping[str, Json]] = {}
    for entry in value:
        if not isinstance(entry, Mapping):
            return None
        parts = [str(entry[part]) for part in _IDENTITY[key] if entry.get(part) is not None]
        name = " of ".join(parts)
        if name in named:
            return None
        named[name] = entry
    return named


def _text(value: Json) -> str | None:
    """A value for people, in one line."""
    if value is None:
        return None
    if isinstance(value, Mapping):
        parts = [f"{key}: {_inner(part)}" for key, part in value.items() if part not in (None, [], {})]
        return "; ".join(parts)
    return _inner(value)


def _inner(value: Json) -> str:
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, Mapping):
        return "{" + ", ".join(f"{key} {_inner(part)}" for key, part in value.items()) + "}"
    if isinstance(value, Sequence) and not isinstance(value, str):
        return ", ".join(_inner(item) for item in value)
    return "none" if value is None else str(value)


def shortened(text: str | None) -> str:
    """A value for a line or a table cell: "none" where there is none, long ones cut with a mark."""
    if not text:
        return "none"
    return text if len(text) <= _LONGEST else f"{text[: _LONGEST - 2]} …"


def kept_names(section: str, old: Mapping[str, Json], new: Mapping[str, Json]) -> frozenset[str]:
    """The names of the entries of `section` that mean the same in both plan documents.

    Empty where the level alpha, the design or the data section differ: then none means quite the same.
    """
    if any(old.get(key) != new.get(key) for key in ("alpha", "design", "data")):
        return frozenset()
    before, after = _entries(section, old.get(section)) or {}, _entries(section, new.get(section)) or {}
    return frozenset(name for name, entry in after.items() if before.get(name) == entry)
