"""What every part of the method statement is made of."""

from dataclasses import dataclass

from assayfolio.report.content import Block, Formula, Items, Quotient
from assayfolio.report.prose import Prose, prose


@dataclass(frozen=True, slots=True)
class Method:
    """One heading of the method statement with what stands under it; `references` are keys of REFERENCES."""

    title: str
    blocks: tuple[Block, ...]
    references: tuple[str, ...]


def formula(what: str, *parts: str | tuple[str, str], **values: str) -> Formula:
    """A formula from patterns and (above, below) quotients in turn; `values` go into the patterns."""
    laid: list[tuple[Prose, Quotient | None]] = []
    for part in parts:
        if isinstance(part, tuple):
            laid.append(((), Quotient(prose(part[0]), prose(part[1]))))
        else:
            laid.append((prose(part, **values), None))
    return Formula(prose(what), tuple(laid))


def sentences(*patterns: str, **values: str) -> Items:
    """Sentences as a list; `values` go into the patterns."""
    return Items(tuple(prose(pattern, **values) for pattern in patterns))
