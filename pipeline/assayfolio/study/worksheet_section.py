"""Reading `worksheet:` - the seed of the measuring order, its blocks, and how items are labelled."""

from collections.abc import Iterator

from assayfolio.study.faults import shown
from assayfolio.study.fields import Fields, Reader, UnreadableError, Value, distinct, label, list_of
from assayfolio.study.names import Surroundings
from assayfolio.study.numbers import whole_number
from assayfolio.study.plan import WorksheetPlan
from assayfolio.study.vocabulary import WORKSHEET_KEYS

LARGEST_SEED = 2**53 - 1  # the largest whole number that every reader of JSON takes exactly

_seed = whole_number(0, LARGEST_SEED)
_blocks = distinct(list_of(label, "a list of blocks, such as [monday, tuesday]"))


def worksheet_in(surroundings: Surroundings) -> Reader[WorksheetPlan]:
    """A reader for `worksheet`; blocks must share the values of every level equally."""

    def read(value: Value) -> WorksheetPlan:
        fields = Fields.of(value, WORKSHEET_KEYS)
        seed = fields.required("seed", _seed)
        block = fields.optional("block", label)
        blocks = fields.optional("blocks", _blocks) or ()
        item = fields.optional("item", label)
        _report_half_a_blocking(fields)
        if block is not None and block in surroundings.columns:
            found = f"`worksheet.block` is {shown(block)}, which is `{surroundings.columns[block]}`"
            fields.faults.add(
                fields.place_of("block"), found, "name what the order is blocked by, such as day"
            )
        if blocks:
            _report_unequal_shares(fields, blocks, surroundings)
        if seed is None:
            raise UnreadableError
        return WorksheetPlan(seed, block, blocks, item, value.node.place)

    return read


def _report_half_a_blocking(fields: Fields) -> None:
    for key, other, advice in (
        ("block", "blocks", "list the blocks, such as `blocks: [monday, tuesday]`"),
        ("blocks", "block", "say what they are, such as `block: day`"),
    ):
        if key in fields and other not in fields and not fields.unreadable(other):
            found = f"`worksheet.{key}` stands without `worksheet.{other}`"
            fields.faults.add(fields.place_of(key), found, advice)


def _report_unequal_shares(fields: Fields, blocks: tuple[str, ...], surroundings: Surroundings) -> None:
    value = fields.value("blocks")
    assert value is not None, "it has just been read"
    if len(blocks) == 1:
        value.report(f"is only {shown(blocks[0])}", "two blocks or more, or leave both keys out")
    unequal = [f"{shown(level)} ({count})" for level, count in _unequal(len(blocks), surroundings)]
    if unequal:
        more = f" and {len(unequal) - 3} more" if len(unequal) > 3 else ""
        found = f"are {len(blocks)}, which cannot share equally the values of {', '.join(unequal[:3])}{more}"
        value.report(found, "a number of blocks that divides the number of values of every level")


def _unequal(blocks: int, surroundings: Surroundings) -> Iterator[tuple[str, int]]:
    """Each level whose number of values the number of blocks does not divide, with that number."""
    planned = surroundings.replicates
    if isinstance(planned, int):
        planned = tuple((level, planned) for level in surroundings.levels or ())
    for level, count in planned or ():
        if count % blocks:
            yield level, count
