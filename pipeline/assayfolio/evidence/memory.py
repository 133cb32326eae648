"""Keeping the collector of cyclic garbage out of the way while very many values are made at once."""

import gc
from collections.abc import Iterator
from contextlib import contextmanager

_VERY_MANY = 100_000


@contextmanager
def collector_paused() -> Iterator[None]:
    """Collect no cyclic garbage within the block.

    A hundred thousand entries hold none, and to look through them again and again takes longer than reading.
    Very many values that were made are not looked through later either; they go as nobody refers to them.
    """
    active = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if active:
            if gc.get_count()[0] > _VERY_MANY:
                gc.freeze()
            gc.enable()
